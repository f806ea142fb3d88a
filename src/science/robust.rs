//! Middles and spreads that a few wild readings do not move.

/// What brings a median absolute deviation to a standard deviation of normal data, as rounded in
/// the Hampel identifier (1 / 0.67449).
pub const MAD_TO_SIGMA: f64 = 1.4826;

/// The median, in the unit of the values; `None` for none or for one that is not a number.
pub fn median(values: &[f64]) -> Option<f64> {
    median_in_place(&mut values.to_vec())
}

/// [`median`] of a slice whose order does not matter any more; allocates nothing.
pub fn median_in_place(values: &mut [f64]) -> Option<f64> {
    quantile_in_place(values, 0.5)
}

/// The value below which lies the share `p` of the values, in their unit.
///
/// Between two values on a straight line: type 7 of Hyndman and Fan, The American Statistician
/// 50(4):361 (1996). `None` for no value, one that is not a number, or `p` outside 0 to 1.
pub fn quantile(values: &[f64], p: f64) -> Option<f64> {
    quantile_in_place(&mut values.to_vec(), p)
}

fn quantile_in_place(values: &mut [f64], p: f64) -> Option<f64> {
    if values.is_empty() || !(0.0..=1.0).contains(&p) || values.iter().any(|v| v.is_nan()) {
        return None;
    }
    let position = p * (values.len() - 1) as f64;
    let share = position - position.floor();
    let (_, lower, above) = values.select_nth_unstable_by(position as usize, f64::total_cmp);
    let lower = *lower;
    if share == 0.0 {
        return Some(lower);
    }
    let upper = above.iter().copied().min_by(f64::total_cmp)?;
    // The middle of two without the rounding of a weighted sum.
    Some(if share == 0.5 { 0.5 * (lower + upper) } else { lower + share * (upper - lower) })
}

/// Median absolute deviation from the median times 1.4826, in the unit of the values.
///
/// The standard deviation, for normal data. `None` as for [`median`]. Zero where more than half
/// the values agree, as after a historian's compression: hold it above the resolution then.
pub fn mad_sigma(values: &[f64]) -> Option<f64> {
    mad_sigma_about(values, median(values)?)
}

fn mad_sigma_about(values: &[f64], middle: f64) -> Option<f64> {
    let mut deviations: Vec<f64> = values.iter().map(|v| (v - middle).abs()).collect();
    Some(MAD_TO_SIGMA * median_in_place(&mut deviations)?)
}

/// The value at which half the weight is reached, in the unit of the values; the mean of two
/// where exactly half the weight lies on either side.
///
/// `None` for no value, unequal lengths, a value that is not a number, a weight that is negative
/// or not finite, or no weight at all.
pub fn weighted_median(values: &[f64], weights: &[f64]) -> Option<f64> {
    if values.len() != weights.len()
        || values.iter().any(|v| v.is_nan())
        || !weights.iter().all(|w| w.is_finite() && *w >= 0.0)
    {
        return None;
    }
    let mut pairs: Vec<(f64, f64)> =
        values.iter().copied().zip(weights.iter().copied()).filter(|(_, w)| *w > 0.0).collect();
    pairs.sort_by(|a, b| a.0.total_cmp(&b.0));
    let half = 0.5 * pairs.iter().map(|(_, w)| w).sum::<f64>();
    let mut below = 0.0;
    for (at, (value, weight)) in pairs.iter().enumerate() {
        below += weight;
        if below > half {
            return Some(*value);
        }
        if below == half {
            let next = pairs.get(at + 1).map_or(*value, |(v, _)| *v);
            return Some(0.5 * (value + next));
        }
    }
    None
}

/// What the Hampel identifier saw at one value.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct HampelPoint {
    /// Median of the window, unit of the values.
    pub median: f64,
    /// Its spread as a standard deviation, unit of the values.
    pub sigma: f64,
    /// Whether the value lies further from the median than the threshold allows.
    pub outlier: bool,
}

/// The Hampel identifier: an outlier is further than `threshold` spreads from its window's median.
///
/// The window holds `half_window` values on either side and is cut off at the ends; the usual
/// threshold is 3. `least_sigma`, in the unit of the values, is the spread below which no window
/// is believed: the resolution of the instrument, or 0. A value that is not finite is an outlier
/// and left out of the windows; a window without values gives a median that is not a number.
///
/// Hampel, J. Am. Stat. Assoc. 69:383 (1974); Pearson, IEEE Trans. Control Syst. Technol.
/// 10(1):55 (2002).
pub fn hampel(
    values: &[f64],
    half_window: usize,
    threshold: f64,
    least_sigma: f64,
) -> Vec<HampelPoint> {
    let mut window = Vec::with_capacity(2 * half_window + 1);
    values
        .iter()
        .enumerate()
        .map(|(at, value)| {
            let end = at.saturating_add(half_window).saturating_add(1).min(values.len());
            window.clear();
            window.extend(
                values[at.saturating_sub(half_window)..end].iter().filter(|v| v.is_finite()),
            );
            let median = median_in_place(&mut window).unwrap_or(f64::NAN);
            for v in &mut window {
                *v = (*v - median).abs();
            }
            let sigma = MAD_TO_SIGMA * median_in_place(&mut window).unwrap_or(f64::NAN);
            let sigma = sigma.max(least_sigma);
            // Written so that a value or a window that is no number counts as an outlier.
            let inside = (value - median).abs() <= threshold * sigma;
            HampelPoint { median, sigma, outlier: !inside }
        })
        .collect()
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn medians_and_quantiles_by_hand() {
        assert_eq!(median(&[3.0, 1.0, 2.0]), Some(2.0));
        assert_eq!(median(&[4.0, 1.0, 3.0, 2.0]), Some(2.5));
        assert_eq!(quantile(&[4.0, 1.0, 3.0, 2.0], 0.25), Some(1.75));
        assert_eq!(quantile(&[4.0, 1.0, 3.0, 2.0], 0.0), Some(1.0));
        assert_eq!(quantile(&[4.0, 1.0, 3.0, 2.0], 1.0), Some(4.0));
        assert_eq!(quantile(&[7.0], 0.3), Some(7.0));
        assert_eq!(median(&[]), None);
        assert_eq!(median(&[1.0, f64::NAN]), None);
        assert_eq!(quantile(&[1.0], 1.1), None);
        assert_eq!(mad_sigma(&[1.0, 1.0, 2.0, 2.0, 4.0, 6.0, 9.0]), Some(MAD_TO_SIGMA));
    }

    #[test]
    fn weighted_median_is_the_median_of_repeats() {
        let values = [5.0, 1.0, 4.0, 2.0];
        let weights = [3.0, 1.0, 1.0, 2.0];
        assert_eq!(
            weighted_median(&values, &weights),
            median(&[5.0, 5.0, 5.0, 1.0, 4.0, 2.0, 2.0])
        );
        assert_eq!(weighted_median(&[1.0, 2.0], &[1.0, 1.0]), Some(1.5));
        assert_eq!(weighted_median(&[1.0, 9.0, 2.0], &[1.0, 0.0, 2.0]), Some(2.0));
        assert_eq!(weighted_median(&[1.0, 2.0], &[0.0, 0.0]), None);
        assert_eq!(weighted_median(&[1.0, 2.0], &[1.0, -1.0]), None);
        assert_eq!(weighted_median(&[], &[]), None);
    }

    #[test]
    fn a_flat_window_needs_a_least_spread() {
        let values = [1.0, 1.0, 1.0, 1.001, 1.0, 1.0, 1.0];
        assert!(hampel(&values, 3, 3.0, 0.0)[3].outlier);
        assert!(!hampel(&values, 3, 3.0, 0.001)[3].outlier);
    }

    #[test]
    fn a_missing_value_is_an_outlier_and_spoils_no_window() {
        let values = [1.0, 1.1, f64::NAN, 0.9, 1.0];
        let outliers: Vec<bool> = hampel(&values, 2, 3.0, 0.05).iter().map(|p| p.outlier).collect();
        assert_eq!(outliers, [false, false, true, false, false]);
    }
}
