//! The Mann-Kendall test for a trend, and its correction for autocorrelation.

use super::autocorrelation::autocorrelation;
use super::normal::{normal_cdf, normal_quantile};
use super::theil_sen::{median_line, pairs_term, ties};

/// What a Mann-Kendall test found.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct TrendTest {
    /// Kendall's score: pairs that rise less pairs that fall.
    pub s: i64,
    /// Variance of the score where there is no trend, ties and correction counted.
    pub variance: f64,
    /// Standardised score with continuity correction, positive for a rise.
    pub z: f64,
    /// Probability of a score as far from zero without a trend, both sides.
    pub p: f64,
    /// Score over the number of pairs, -1 to 1 (tau-a).
    pub tau: f64,
    /// Factor by which autocorrelation widened the variance, 1 for the plain test.
    pub variance_factor: f64,
    /// Number of independent values that tell as much: `n / variance_factor`.
    pub effective_n: f64,
}

/// Which autocorrelation the Hamed-Rao correction counts.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct HamedRao {
    /// Two-sided significance a lag's autocorrelation needs to be counted, for example 0.05.
    pub alpha: f64,
    /// Highest lag looked at; `None` for all. High lags of a short series are mostly chance and
    /// can make the variance collapse: 1 or 3 are safer.
    pub max_lag: Option<usize>,
    /// Whether negative autocorrelation may narrow the variance. The published method says yes;
    /// a daemon that must not cry wolf says no.
    pub may_narrow: bool,
}

/// The Mann-Kendall test of values in the order of time, for independent values.
///
/// Values need not be equally spaced. `None` for fewer than three, one that is not finite, or
/// all equal. The normal approximation is fair from about ten values. Mann, Econometrica 13:245
/// (1945); Kendall, Rank Correlation Methods (1975).
pub fn mann_kendall(values: &[f64]) -> Option<TrendTest> {
    let (s, variance) = score(values)?;
    test(values.len(), s, variance, 1.0)
}

/// The Mann-Kendall test with the variance corrected for the autocorrelation of the ranks left
/// once the Theil-Sen line is taken off.
///
/// Values in the order of time, equally spaced. `None` as for [`mann_kendall`], for an alpha
/// outside 0 to 1, or where the corrected variance is not above zero. A series that lies exactly
/// on a line has no ranks to correct by: the plain test. Time grows with the square of the number
/// of values. Hamed and Rao, J. Hydrology 204:182 (1998).
pub fn mann_kendall_hamed_rao(values: &[f64], correction: HamedRao) -> Option<TrendTest> {
    let (s, variance) = score(values)?;
    let n = values.len();
    // Beyond this quantile a lag's autocorrelation is not chance.
    let least = normal_quantile(1.0 - 0.5 * correction.alpha)? / (n as f64).sqrt();
    let index: Vec<f64> = (1..=n).map(|i| i as f64).collect();
    let (slope, _) = median_line(&index, values)?;
    let left: Vec<f64> = values.iter().zip(&index).map(|(v, i)| v - i * slope).collect();
    let ranks = ranks(&left);
    let highest = correction.max_lag.unwrap_or(n).min(n - 1);
    let mut sum = 0.0;
    for lag in 1..=highest {
        let Some(r) = autocorrelation(&ranks, lag) else { break };
        if r.abs() > least {
            let m = (n - lag) as f64;
            sum += m * (m - 1.0) * (m - 2.0) * r;
        }
    }
    let count = n as f64;
    let factor = 1.0 + 2.0 * sum / (count * (count - 1.0) * (count - 2.0));
    let factor = if correction.may_narrow { factor } else { factor.max(1.0) };
    test(n, s, variance, factor)
}

/// Kendall's score and its variance with ties.
fn score(values: &[f64]) -> Option<(i64, f64)> {
    if values.len() < 3 || !values.iter().all(|v| v.is_finite()) {
        return None;
    }
    let mut s = 0_i64;
    for (at, earlier) in values.iter().enumerate() {
        for later in &values[at + 1..] {
            s += i64::from(later > earlier) - i64::from(later < earlier);
        }
    }
    Some((s, (pairs_term(values.len()) - ties(values)) / 18.0))
}

fn test(n: usize, s: i64, plain_variance: f64, variance_factor: f64) -> Option<TrendTest> {
    let variance = plain_variance * variance_factor;
    if variance.is_nan() || variance <= 0.0 {
        return None;
    }
    let z = (s - s.signum()) as f64 / variance.sqrt();
    let count = n as f64;
    Some(TrendTest {
        s,
        variance,
        z,
        p: 2.0 * normal_cdf(-z.abs()),
        tau: s as f64 / (0.5 * count * (count - 1.0)),
        variance_factor,
        effective_n: count / variance_factor,
    })
}

/// Rank of each value from 1; equal values share the mean of their ranks.
fn ranks(values: &[f64]) -> Vec<f64> {
    let mut order: Vec<(f64, usize)> =
        values.iter().copied().enumerate().map(|(at, v)| (v, at)).collect();
    order.sort_by(|a, b| a.0.total_cmp(&b.0));
    let mut ranks = vec![0.0; values.len()];
    let mut below = 0;
    for group in order.chunk_by(|a, b| a.0 == b.0) {
        let rank = below as f64 + 0.5 * (group.len() + 1) as f64;
        for (_, at) in group {
            ranks[*at] = rank;
        }
        below += group.len();
    }
    ranks
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn ranks_share_ties() {
        assert_eq!(ranks(&[10.0, 30.0, 20.0, 20.0]), [1.0, 4.0, 2.5, 2.5]);
    }

    #[test]
    fn no_test_without_variation() {
        assert_eq!(mann_kendall(&[1.0, 1.0, 1.0, 1.0]), None);
        assert_eq!(mann_kendall(&[1.0, 2.0]), None);
        assert_eq!(mann_kendall(&[1.0, f64::NAN, 2.0]), None);
        let all = HamedRao { alpha: 0.0, max_lag: None, may_narrow: true };
        assert_eq!(mann_kendall_hamed_rao(&[1.0, 3.0, 2.0], all), None);
    }

    #[test]
    fn an_exact_line_is_the_plain_test() {
        let line: Vec<f64> = (1..=10).map(f64::from).collect();
        let correction = HamedRao { alpha: 0.05, max_lag: Some(3), may_narrow: true };
        assert_eq!(mann_kendall_hamed_rao(&line, correction), mann_kendall(&line));
    }
}
