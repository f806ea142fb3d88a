//! The straight line of least squares.

/// A straight line through points by least squares.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct LineFit {
    /// Value of the line at zero, in the unit of y.
    pub intercept: f64,
    /// Slope, unit of y per unit of x.
    pub slope: f64,
    /// Share of the variance of y that the line explains, 0 to 1; 1 where y does not vary.
    pub r_squared: f64,
    /// Number of points.
    pub n: usize,
    /// Standard errors; `None` for two points, which leave nothing over.
    pub errors: Option<LineErrors>,
}

/// Standard errors of a line. They hold for independent residuals of one variance: residuals of
/// neighbouring readings are neither, see `lag1_autocorrelation`.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct LineErrors {
    /// Standard deviation of the residuals with `n - 2` degrees of freedom, unit of y.
    pub residual: f64,
    /// Standard error of the intercept, unit of y.
    pub intercept: f64,
    /// Standard error of the slope, unit of y per unit of x.
    pub slope: f64,
}

impl LineFit {
    /// The line's value at `x`.
    pub fn at(&self, x: f64) -> f64 {
        self.intercept + self.slope * x
    }
}

/// Fits `y = intercept + slope x` by ordinary least squares, in two passes about the means.
///
/// `None` for fewer than two points, unequal lengths, a value that is not finite, or x that does
/// not vary. Checked against NIST StRD Norris.
pub fn fit_line(x: &[f64], y: &[f64]) -> Option<LineFit> {
    let n = x.len();
    if n < 2 || y.len() != n || !x.iter().chain(y).all(|v| v.is_finite()) {
        return None;
    }
    let count = n as f64;
    let x_mean = x.iter().sum::<f64>() / count;
    let y_mean = y.iter().sum::<f64>() / count;
    let (mut sxx, mut sxy, mut syy) = (0.0, 0.0, 0.0);
    for (x, y) in x.iter().zip(y) {
        let (dx, dy) = (x - x_mean, y - y_mean);
        sxx += dx * dx;
        sxy += dx * dy;
        syy += dy * dy;
    }
    if sxx <= 0.0 {
        return None;
    }
    let slope = sxy / sxx;
    // The residuals about the means, not syy - sxy^2/sxx, which loses its digits on a good line.
    let rss: f64 = x
        .iter()
        .zip(y)
        .map(|(x, y)| {
            let residual = (y - y_mean) - slope * (x - x_mean);
            residual * residual
        })
        .sum();
    let errors = (n > 2).then(|| {
        let residual = (rss / (count - 2.0)).sqrt();
        LineErrors {
            residual,
            intercept: residual * (1.0 / count + x_mean * x_mean / sxx).sqrt(),
            slope: residual / sxx.sqrt(),
        }
    });
    let r_squared = if syy > 0.0 { 1.0 - rss / syy } else { 1.0 };
    Some(LineFit { intercept: y_mean - slope * x_mean, slope, r_squared, n, errors })
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn two_points_are_a_line_without_errors() {
        let line = fit_line(&[1.0, 3.0], &[2.0, 8.0]).unwrap();
        assert_eq!((line.intercept, line.slope, line.errors), (-1.0, 3.0, None));
        assert_eq!(line.at(2.0), 5.0);
    }

    #[test]
    fn no_line_without_two_places() {
        assert_eq!(fit_line(&[1.0], &[1.0]), None);
        assert_eq!(fit_line(&[1.0, 1.0], &[1.0, 2.0]), None);
        assert_eq!(fit_line(&[1.0, 2.0], &[1.0]), None);
        assert_eq!(fit_line(&[1.0, f64::NAN], &[1.0, 2.0]), None);
    }
}
