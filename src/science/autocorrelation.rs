//! How much neighbouring residuals resemble each other, and what their number is worth then.

/// What was fitted to the values before their residuals were looked at.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Removed {
    /// Their mean.
    Mean,
    /// A straight line in time.
    Line,
}

/// Autocorrelation of equally spaced values at a lag, -1 to 1, about their mean.
///
/// The usual estimate with the whole sum of squares below (Box and Jenkins). `None` where the lag
/// is not below the number of values, a value is not finite, or the values do not vary.
pub fn autocorrelation(values: &[f64], lag: usize) -> Option<f64> {
    let n = values.len();
    if lag >= n || !values.iter().all(|v| v.is_finite()) {
        return None;
    }
    let mean = values.iter().sum::<f64>() / n as f64;
    let squares: f64 = values.iter().map(|v| (v - mean) * (v - mean)).sum();
    let products: f64 =
        values.iter().zip(&values[lag..]).map(|(a, b)| (a - mean) * (b - mean)).sum();
    (squares > 0.0).then(|| products / squares)
}

/// Autocorrelation at lag 1 of equally spaced residuals, -0.99 to 0.99, corrected for the bias of
/// a short series.
///
/// The estimate falls short by `(1 + 4 rho) / n` once a mean is taken off (Marriott and Pope,
/// Biometrika 41:390, 1954; Kendall, same volume, from memory), by about `(2 + 5 rho) / n` once a
/// line is (found by simulation, within 0.08 for n = 20 and rho to 0.8). `None` as for
/// [`autocorrelation`] and below ten residuals, where the correction is as large as the answer.
pub fn lag1_autocorrelation(residuals: &[f64], removed: Removed) -> Option<f64> {
    if residuals.len() < 10 {
        return None;
    }
    let n = residuals.len() as f64;
    let (constant, slope) = match removed {
        Removed::Mean => (1.0, 4.0),
        Removed::Line => (2.0, 5.0),
    };
    let raw = autocorrelation(residuals, 1)?;
    Some(((n * raw + constant) / (n - slope)).clamp(-0.99, 0.99))
}

/// Number of independent values whose mean is as sure as that of `n` values with autocorrelation
/// `rho` at lag 1, dying away as its powers; from 1 to `n`.
///
/// `n / (1 + 2 sum_k (1 - k/n) rho^k)`, Bayley and Hammersley, J. R. Stat. Soc. Suppl. 8:184
/// (1946). Negative autocorrelation earns nothing: it is mostly chance or a controller.
pub fn effective_number(n: usize, rho: f64) -> f64 {
    let count = n as f64;
    if rho.is_nan() || rho <= 0.0 || n < 2 {
        return count;
    }
    let rho = rho.min(0.99);
    let left = 1.0 - rho;
    let factor =
        (1.0 + rho) / left - 2.0 * rho * (1.0 - libm::pow(rho, count)) / (count * left * left);
    (count / factor).clamp(1.0, count)
}

#[cfg(test)]
pub(super) mod tests {
    use super::*;

    /// A fixed, simple stream of nearly normal numbers: the sum of twelve uniform ones less six.
    pub(crate) fn noise(seed: u64) -> impl FnMut() -> f64 {
        let mut state = seed;
        move || {
            let mut sum = -6.0;
            for _ in 0..12 {
                state = state.wrapping_mul(6_364_136_223_846_793_005).wrapping_add(1);
                sum += (state >> 11) as f64 / (1_u64 << 53) as f64;
            }
            sum
        }
    }

    #[test]
    fn by_hand() {
        // Deviations -1.5, -0.5, 0.5, 1.5: squares 5, products 0.75 - 0.25 + 0.75.
        assert_eq!(autocorrelation(&[1.0, 2.0, 3.0, 4.0], 1), Some(0.25));
        assert_eq!(autocorrelation(&[1.0, 2.0, 3.0, 4.0], 0), Some(1.0));
        assert_eq!(autocorrelation(&[1.0, 2.0], 2), None);
        assert_eq!(autocorrelation(&[1.0, 1.0, 1.0], 1), None);
        assert_eq!(lag1_autocorrelation(&[1.0, 2.0, 3.0, 4.0], Removed::Mean), None);
    }

    #[test]
    fn the_correction_takes_the_bias_out() {
        for (rho, removed) in [(0.0, Removed::Mean), (0.6, Removed::Mean), (0.6, Removed::Line)] {
            let (mut raw, mut corrected) = (0.0, 0.0);
            let mut noise = noise(7);
            for _ in 0..2000 {
                let mut last = noise() / (1.0_f64 - rho * rho).sqrt();
                let mut values: Vec<f64> = Vec::new();
                for _ in 0..25 {
                    values.push(last);
                    last = rho * last + noise();
                }
                if removed == Removed::Line {
                    let index: Vec<f64> = (0..25).map(f64::from).collect();
                    let line = crate::science::fit_line(&index, &values).unwrap();
                    for (value, at) in values.iter_mut().zip(&index) {
                        *value -= line.at(*at);
                    }
                }
                raw += autocorrelation(&values, 1).unwrap() / 2000.0;
                corrected += lag1_autocorrelation(&values, removed).unwrap() / 2000.0;
            }
            assert!(raw < rho - 0.03, "{removed:?}: {raw}");
            assert!((corrected - rho).abs() < 0.03, "{removed:?}: {corrected}");
        }
    }

    #[test]
    fn the_effective_number_is_its_sum() {
        for (n, rho) in [(2, 0.5), (10, 0.3), (60, 0.8), (400, 0.95)] {
            let count = f64::from(n);
            let mut power = 1.0;
            let mut sum = 0.0;
            for k in 1..n {
                power *= rho;
                sum += (1.0 - f64::from(k) / count) * power;
            }
            let want = count / (1.0 + 2.0 * sum);
            let got = effective_number(n as usize, rho);
            assert!((got / want - 1.0).abs() < 1e-11, "{n}, {rho}: {got}, wanted {want}");
        }
        assert_eq!(effective_number(30, -0.4), 30.0);
        assert_eq!(effective_number(30, f64::NAN), 30.0);
        assert_eq!(effective_number(0, 0.4), 0.0);
    }
}
