//! The line of Theil and Sen, with Sen's interval.

use super::normal::normal_quantile;
use super::robust::median_in_place;

/// A line by the median of the slopes between pairs of points.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct RobustLine {
    /// Slope, unit of y per unit of x.
    pub slope: f64,
    /// Lower end of the slope's interval.
    pub slope_low: f64,
    /// Upper end of the slope's interval.
    pub slope_high: f64,
    /// Median of what is left of y at x = 0, unit of y.
    pub intercept: f64,
    /// Number of points.
    pub n: usize,
}

impl RobustLine {
    /// The line's value at `x`.
    pub fn at(&self, x: f64) -> f64 {
        self.intercept + self.slope * x
    }
}

/// The Theil-Sen line through points in any order, with Sen's interval of the slope.
///
/// `confidence` is the interval's, 0 to 1, for example 0.95. The interval holds for independent
/// residuals: where they are autocorrelated it is too narrow, see `effective_number`. Up to 29 %
/// of the points may be wild. `None` for fewer than two points, unequal lengths, a value that is
/// not finite, x that does not vary, or a confidence that is none.
///
/// Time and memory grow with the square of the number of points (8 MB for 1400): thin or take
/// daily medians before. Sen, J. Am. Stat. Assoc. 63:1379 (1968); ties in x and y counted, ranks
/// rounded half to even as in scipy 1.17.1, against which it is checked.
pub fn theil_sen(x: &[f64], y: &[f64], confidence: f64) -> Option<RobustLine> {
    let mut slopes = pair_slopes(x, y)?;
    let z = normal_quantile(0.5 + 0.5 * confidence).filter(|z| *z > 0.0)?;
    let slope = median_in_place(&mut slopes)?;
    let n = x.len();
    let variance = (pairs_term(n) - ties(x) - ties(y)) / 18.0;
    let spread = z * variance.max(0.0).sqrt();
    let pairs = slopes.len() as f64;
    let low = (0.5 * (pairs - spread)).round_ties_even().max(1.0) as usize - 1;
    let high = (0.5 * (pairs + spread)).round_ties_even() as usize;
    let high = high.min(slopes.len() - 1);
    Some(RobustLine {
        slope,
        slope_low: nth(&mut slopes, low),
        slope_high: nth(&mut slopes, high),
        intercept: intercept(x, y, slope)?,
        n,
    })
}

/// Slope and intercept alone.
pub(super) fn median_line(x: &[f64], y: &[f64]) -> Option<(f64, f64)> {
    let slope = median_in_place(&mut pair_slopes(x, y)?)?;
    Some((slope, intercept(x, y, slope)?))
}

fn intercept(x: &[f64], y: &[f64], slope: f64) -> Option<f64> {
    let mut left: Vec<f64> = x.iter().zip(y).map(|(x, y)| y - slope * x).collect();
    median_in_place(&mut left)
}

/// The slope of every pair of points at different x; never empty.
fn pair_slopes(x: &[f64], y: &[f64]) -> Option<Vec<f64>> {
    let n = x.len();
    if n < 2 || y.len() != n || !x.iter().chain(y).all(|v| v.is_finite()) {
        return None;
    }
    let mut slopes = Vec::with_capacity(n * (n - 1) / 2);
    for (at, (x1, y1)) in x.iter().zip(y).enumerate() {
        for (x2, y2) in x.iter().zip(y).skip(at + 1) {
            if x1 != x2 {
                slopes.push((y2 - y1) / (x2 - x1));
            }
        }
    }
    (!slopes.is_empty()).then_some(slopes)
}

fn nth(values: &mut [f64], rank: usize) -> f64 {
    *values.select_nth_unstable_by(rank, f64::total_cmp).1
}

/// `k (k - 1) (2 k + 5)`: 18 times the variance of Kendall's score of k values, or what k equal
/// ones take off it.
pub(super) fn pairs_term(k: usize) -> f64 {
    let k = k as f64;
    k * (k - 1.0) * (2.0 * k + 5.0)
}

/// Sum of [`pairs_term`] over the groups of equal values.
pub(super) fn ties(values: &[f64]) -> f64 {
    let mut sorted = values.to_vec();
    sorted.sort_by(f64::total_cmp);
    sorted.chunk_by(|a, b| a == b).map(|group| pairs_term(group.len())).sum()
}
