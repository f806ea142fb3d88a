//! Resistance at the start of a filtration cycle: what the backwash could not remove.

use super::normal::student_t_quantile;
use super::theil_sen::median_line;

/// Fewest points that make a start.
const LEAST_POINTS: usize = 3;
/// One residual in so many, the widest, is left out of the spread.
const TRIMMED: usize = 6;
/// Standard deviation of normal data over that of what is left without its widest sixth: the
/// normal distribution cut off at 1.383 keeps 0.491 of its variance.
const TRIMMED_TO_SIGMA: f64 = 1.427;
/// Variance of a median over that of a mean, for normal data (pi / 2).
const MEDIAN_VARIANCE: f64 = std::f64::consts::FRAC_PI_2;
/// Variance of a Theil-Sen slope over that of least squares, for normal data (pi / 3; Sen 1968).
const SLOPE_VARIANCE: f64 = std::f64::consts::FRAC_PI_3;

/// Resistance at zero filtered volume.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct StartValue {
    /// Resistance, 1/m.
    pub resistance_1_m: f64,
    /// Resistance laid down by a filtered m3/m2, 1/m2.
    pub slope: f64,
    /// Half the width of its 95 % interval, 1/m.
    pub interval_half_width: f64,
    /// Number of points.
    pub n: usize,
}

/// The start of a cycle from the readings of its minutes 2 to 8: a Theil-Sen line of resistance
/// (1/m) over the volume filtered since the backwash (m3/m2), taken back to zero volume.
///
/// One wild reading in six moves it by less than its interval. A median of the same readings
/// would hold the cake of five minutes. Straight as long as a cake grows at constant flux.
/// The interval is Student's on the residuals without their widest sixth (a median absolute
/// deviation of so few is too unsteady: it covered 79 to 90 % where 95 were meant) and holds for
/// independent ones [its form derived here, its cover simulated in the tests]. `None` for fewer
/// than three points, unequal lengths, a value that is not finite, one volume only, or a start
/// that is not above zero.
pub fn start_value(volume_m3_m2: &[f64], resistance_1_m: &[f64]) -> Option<StartValue> {
    let n = volume_m3_m2.len();
    if n < LEAST_POINTS {
        return None;
    }
    let (slope, start_1_m) = median_line(volume_m3_m2, resistance_1_m)?;
    if !start_1_m.is_finite() || start_1_m <= 0.0 {
        return None;
    }
    let mut residuals_1_m: Vec<f64> = volume_m3_m2
        .iter()
        .zip(resistance_1_m)
        .map(|(v, r)| (r - start_1_m - slope * v).abs())
        .collect();
    residuals_1_m.sort_by(f64::total_cmp);
    let trimmed = n / TRIMMED;
    residuals_1_m.truncate(n - trimmed);
    let freedom = (residuals_1_m.len() - 2) as f64;
    let squares: f64 = residuals_1_m.iter().map(|r| r * r).sum();
    let widened = if trimmed > 0 { TRIMMED_TO_SIGMA } else { 1.0 };
    let sigma_1_m = widened * (squares / freedom).sqrt();

    let count = n as f64;
    let middle = volume_m3_m2.iter().sum::<f64>() / count;
    let spread: f64 = volume_m3_m2.iter().map(|v| (v - middle) * (v - middle)).sum();
    let variance_share = MEDIAN_VARIANCE / count + SLOPE_VARIANCE * middle * middle / spread;
    Some(StartValue {
        resistance_1_m: start_1_m,
        slope,
        interval_half_width: student_t_quantile(0.975, freedom)?
            * sigma_1_m
            * variance_share.sqrt(),
        n,
    })
}

#[cfg(test)]
mod tests {
    use super::super::autocorrelation::tests::noise;
    use super::*;

    /// Minutes 2 to 8 at 60 L/(m2.h), a reading a minute: 1e-3 m3/m2 a minute.
    fn volumes(n: usize) -> Vec<f64> {
        (0..n).map(|i| 2e-3 + 6e-3 * i as f64 / (n - 1) as f64).collect()
    }

    #[test]
    fn an_exact_line_is_found_without_doubt() {
        let v = volumes(7);
        let r: Vec<f64> = v.iter().map(|v| 1.5e12 + 2e13 * v).collect();
        let start = start_value(&v, &r).unwrap();
        assert!((start.resistance_1_m / 1.5e12 - 1.0).abs() < 1e-12);
        assert!((start.slope / 2e13 - 1.0).abs() < 1e-9);
        assert!(start.interval_half_width < 1e-9 * 1.5e12);
        assert_eq!(start.n, 7);
    }

    #[test]
    fn one_wild_reading_in_six_does_not_matter() {
        let v = volumes(6);
        let mut noise = noise(3);
        let r: Vec<f64> = v.iter().map(|v| 1.5e12 + 2e13 * v + 5e9 * noise()).collect();
        let clean = start_value(&v, &r).unwrap();
        for at in 0..6 {
            for factor in [0.2, 3.0] {
                let mut wild = r.clone();
                wild[at] *= factor;
                let start = start_value(&v, &wild).unwrap();
                let moved = (start.resistance_1_m - clean.resistance_1_m).abs();
                assert!(moved < 0.02 * 1.5e12, "{at}, {factor}: moved by {moved:e}");
                let doubt = start.interval_half_width;
                assert!(moved < doubt, "{at}, {factor}: moved by {moved:e}, doubt {doubt:e}");
            }
        }
    }

    #[test]
    fn the_interval_covers_what_it_says() {
        for n in [3, 5, 6, 7, 11, 12, 37] {
            let v = volumes(n);
            let mut noise = noise(11);
            let mut covered = 0;
            for _ in 0..2000 {
                let r: Vec<f64> = v.iter().map(|v| 1.5e12 + 2e13 * v + 1e10 * noise()).collect();
                let start = start_value(&v, &r).unwrap();
                let off = (start.resistance_1_m - 1.5e12).abs();
                covered += usize::from(off <= start.interval_half_width);
            }
            let share = covered as f64 / 2000.0;
            assert!((0.94..0.985).contains(&share), "{n} points: {share}");
        }
    }

    #[test]
    fn no_start_from_too_little() {
        assert_eq!(start_value(&[1e-3, 2e-3], &[1e12, 1e12]), None);
        assert_eq!(start_value(&[1e-3; 4], &[1e12; 4]), None);
        assert_eq!(start_value(&[1e-3, 2e-3, 3e-3], &[1e12, f64::NAN, 1e12]), None);
        assert_eq!(start_value(&[1e-3, 2e-3, 3e-3], &[1e12, 2e12]), None);
        assert_eq!(start_value(&[1e-3, 2e-3, 3e-3], &[1e11, 1e12, 2e12]), None);
    }
}
