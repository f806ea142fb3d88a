//! The normal distribution and Student's t.
//!
//! The normal distribution function comes from `libm`, the rest from `statrs`. As `statrs` calls
//! the `exp` and `ln` of `std`, whose last bits change with the processor, its answers are
//! rounded to 1e-12.

use statrs::distribution::{ContinuousCDF, Normal, StudentsT};

/// Probability that a standard normal variate is at most `z`; keeps its digits in both tails.
pub fn normal_cdf(z: f64) -> f64 {
    0.5 * libm::erfc(-z / std::f64::consts::SQRT_2)
}

/// The standard normal variate below which lies the probability `p`, to 1e-12.
///
/// `None` unless `0 < p < 1`.
pub fn normal_quantile(p: f64) -> Option<f64> {
    inside(p).then(|| rounded(Normal::standard().inverse_cdf(p)))
}

/// Probability that Student's t with `freedom` degrees is at most `t`, to 1e-12.
///
/// `None` unless `freedom > 0` and `t` is a number.
pub fn student_t_cdf(t: f64, freedom: f64) -> Option<f64> {
    (!t.is_nan()).then_some(())?;
    Some(rounded(student(freedom)?.cdf(t)))
}

/// The value below which Student's t with `freedom` degrees lies with probability `p`, to 1e-12.
///
/// `None` unless `0 < p < 1` and `freedom > 0`.
pub fn student_t_quantile(p: f64, freedom: f64) -> Option<f64> {
    inside(p).then_some(())?;
    Some(rounded(student(freedom)?.inverse_cdf(p)))
}

fn student(freedom: f64) -> Option<StudentsT> {
    if !freedom.is_finite() {
        return None;
    }
    StudentsT::new(0.0, 1.0, freedom).ok()
}

fn inside(p: f64) -> bool {
    p > 0.0 && p < 1.0
}

fn rounded(value: f64) -> f64 {
    (value * 1e12).round() / 1e12
}

#[cfg(test)]
mod tests {
    use super::*;

    /// Printed tables of the normal distribution (Abramowitz and Stegun, tables 26.1 and 26.5,
    /// from memory).
    #[test]
    fn normal_against_printed_tables() {
        let cases = [
            (0.0, 0.5),
            (1.0, 0.841_344_746_068_543),
            (-1.0, 0.158_655_253_931_457),
            (1.959_963_984_540_054, 0.975),
            (-3.0, 1.349_898_031_630_095e-3),
            (-6.0, 9.865_876_450_377e-10),
        ];
        for (z, p) in cases {
            assert!((normal_cdf(z) / p - 1.0).abs() < 1e-12, "cdf({z}) = {}", normal_cdf(z));
            let back = normal_quantile(p).unwrap();
            assert!((back - z).abs() < 1e-10, "quantile({p}) = {back}");
        }
        for p in [0.0, 1.0, -0.1, f64::NAN] {
            assert_eq!(normal_quantile(p), None);
        }
    }

    /// Printed table of Student's t, 97.5 % (Abramowitz and Stegun, table 26.10, from memory).
    #[test]
    fn student_against_a_printed_table() {
        let cases =
            [(1.0, 12.706), (2.0, 4.303), (3.0, 3.182), (4.0, 2.776), (10.0, 2.228), (30.0, 2.042)];
        for (freedom, t) in cases {
            let got = student_t_quantile(0.975, freedom).unwrap();
            assert!((got - t).abs() < 6e-4, "{freedom}: {got}");
            let p = student_t_cdf(got, freedom).unwrap();
            assert!((p - 0.975).abs() < 1e-9, "{freedom}: {p}");
        }
        // With one and two degrees the quantile has a closed form.
        for p in [0.6_f64, 0.9, 0.975, 0.995] {
            let one = (std::f64::consts::PI * (p - 0.5)).tan();
            let two = (2.0 * p - 1.0) / (2.0 * p * (1.0 - p)).sqrt();
            assert!((student_t_quantile(p, 1.0).unwrap() / one - 1.0).abs() < 1e-11, "{p}");
            assert!((student_t_quantile(p, 2.0).unwrap() / two - 1.0).abs() < 1e-11, "{p}");
        }
        assert_eq!(student_t_quantile(0.975, 0.0), None);
        assert_eq!(student_t_quantile(1.0, 3.0), None);
        assert_eq!(student_t_cdf(f64::NAN, 3.0), None);
        assert_eq!(student_t_cdf(1.0, f64::NAN), None);
    }
}
