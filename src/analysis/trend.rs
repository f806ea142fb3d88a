//! Stage 3: the trend of a run, in start-of-cycle resistance over filtered volume. Daily
//! values follow one another, so the slope's interval is widened by what they have in common.

use serde::{Deserialize, Serialize};

use crate::base::Instant;
use crate::science::{self, HamedRao, Removed};

use super::days::Day;

/// Days that the slope looks back: long against the noise of a day, short against a season.
pub const WINDOW_DAYS: usize = 21;
/// Fewer days than this tell no trend of their own.
pub const FEWEST_DAYS: usize = 5;

/// Lag-1 autocorrelation of the days' residuals where there are too few to tell (common
/// practice, no source).
const USUAL_LIKENESS: f64 = 0.5;

/// The trend of a run.
#[derive(Clone, Copy, Debug, PartialEq, Serialize, Deserialize)]
pub struct Trend {
    /// First day used.
    pub from: Instant,
    /// End of the last day used.
    pub to: Instant,
    /// Days used.
    pub days: u32,
    /// Median slope of resistance over filtered volume, 1/m per m3/m2.
    pub slope_1_m_per_m: f64,
    /// Standard error of it, widened for autocorrelation.
    pub slope_sd_1_m_per_m: f64,
    /// Two-sided p of no trend: Mann-Kendall with the Hamed-Rao correction, lags up to 3.
    pub p: f64,
    /// Resistance now, by the line, 1/m.
    pub level_1_m: f64,
    /// Standard error of that, 1/m.
    pub level_sd_1_m: f64,
    /// Filtered volume per area on a day, m3/m2, median of the last week.
    pub volume_per_day_m: f64,
}

impl Trend {
    /// Slope over time at the volume of the last week, 1/m per day.
    pub fn slope_per_day(&self) -> f64 {
        self.slope_1_m_per_m * self.volume_per_day_m
    }
}

/// The trend over the last days of a run; `None` with fewer than five days that have a value.
/// `days` are whole days of the run in order of time.
pub fn trend(days: &[Day]) -> Option<Trend> {
    let mut volume_m = 0.0;
    let mut points: Vec<(f64, f64, &Day)> = Vec::with_capacity(days.len());
    for day in days {
        let middle = volume_m + day.volume_m / 2.0;
        volume_m += day.volume_m;
        if let Some(r) = day.resistance_1_m {
            points.push((middle, r, day));
        }
    }
    let recent = points.len().saturating_sub(WINDOW_DAYS);
    let points = &points[recent..];
    if points.len() < FEWEST_DAYS {
        return None;
    }
    let x: Vec<f64> = points.iter().map(|p| p.0).collect();
    let y: Vec<f64> = points.iter().map(|p| p.1).collect();
    let line = science::theil_sen(&x, &y, 0.90)?;
    let residuals: Vec<f64> = x.iter().zip(&y).map(|(x, y)| y - line.at(*x)).collect();
    let n = x.len() as f64;
    let inflation = variance_inflation(&residuals);
    // Sen's 90 % interval is 2 x 1.645 standard errors wide where errors are independent.
    let slope_sd = (line.slope_high - line.slope_low) / (2.0 * 1.645) * inflation.sqrt();
    let spread = science::mad_sigma(&residuals).unwrap_or(0.0);
    let (first, last) = (points.first()?.2, points.last()?.2);
    let reach = volume_m - science::median(&x)?;
    let at_middle = 1.2533 * spread * (inflation / n).sqrt();
    Some(Trend {
        from: first.start,
        to: last.end,
        days: points.len() as u32,
        slope_1_m_per_m: line.slope,
        slope_sd_1_m_per_m: slope_sd,
        p: trend_p(&y),
        level_1_m: line.at(volume_m),
        level_sd_1_m: (at_middle * at_middle + (reach * slope_sd) * (reach * slope_sd)).sqrt(),
        volume_per_day_m: volume_per_day(days)?,
    })
}

/// Two-sided p of no trend; 1 where all values are alike. A narrowed variance would cry wolf.
fn trend_p(values: &[f64]) -> f64 {
    let correction = HamedRao { alpha: 0.05, max_lag: Some(3), may_narrow: false };
    science::mann_kendall_hamed_rao(values, correction).map_or(1.0, |t| t.p)
}

/// How much the variance of a slope grows because neighbouring days are alike. Fewer than ten
/// days cannot tell their likeness; that of a day to the next at other times stands in.
fn variance_inflation(residuals: &[f64]) -> f64 {
    let rho = science::lag1_autocorrelation(residuals, Removed::Line).unwrap_or(USUAL_LIKENESS);
    residuals.len() as f64 / science::effective_number(residuals.len(), rho)
}

/// Filtered volume per area on a day: the median of the last seven days that filtered at all.
pub fn volume_per_day(days: &[Day]) -> Option<f64> {
    let recent: Vec<f64> =
        days.iter().rev().take(7).map(|d| d.volume_m).filter(|v| *v > 0.0).collect();
    science::median(&recent)
}
