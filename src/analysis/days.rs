//! Stage 2: days. One row a train, from that day's hours and cycles alone.

use crate::base::{Instant, Span, TrainId};
use crate::science;

use super::cycles::Cycle;
use super::hours::Hour;
use super::reason::{Quality, Reason};

/// One plant day of one train. Keyed by train and start.
#[derive(Clone, Debug, PartialEq)]
pub struct Day {
    /// Whose.
    pub train: TrainId,
    /// Local midnight.
    pub start: Instant,
    /// The next local midnight.
    pub end: Instant,
    /// Median of the hours' starts of cycle, 1/m; the steady median where there is none.
    pub resistance_1_m: Option<f64>,
    /// Half the 95 % interval of it, 1/m.
    pub half_width_1_m: Option<f64>,
    /// Hours with a start of cycle.
    pub start_hours: u32,
    /// Whether a plain median stands in for starts of cycle.
    pub coarse: bool,
    /// Median of the hours' steady medians, 1/m.
    pub steady_resistance_1_m: Option<f64>,
    /// Median flux, m/s.
    pub flux_m_s: Option<f64>,
    /// Median temperature, degrees Celsius.
    pub temperature_degc: Option<f64>,
    /// Highest TMP at the end of a cycle, as read, Pa.
    pub end_tmp_max_pa: Option<f64>,
    /// Median over the hours of the highest TMP at the end of a cycle, Pa.
    pub end_tmp_pa: Option<f64>,
    /// Median laid down in a cycle, 1/m.
    pub laid_down_1_m: Option<f64>,
    /// Median taken off by a backwash, 1/m.
    pub taken_off_1_m: Option<f64>,
    /// Filtered volume per area, m3/m2.
    pub volume_m: f64,
    /// Time in filtration, s.
    pub filtration_s: f64,
    /// Counted readings over expected, 0 to 1.
    pub coverage: f64,
    /// Cycles that ended.
    pub cycles: u32,
    /// Of them, left out.
    pub cycles_left_out: u32,
    /// How far the numbers can be trusted.
    pub quality: Quality,
    /// Why not fully; ascending.
    pub reasons: Vec<Reason>,
}

/// Works out the day from its hours and cycles; `None` without hours.
pub fn day(train: &TrainId, span: Span, hours: &[Hour], cycles: &[Cycle]) -> Option<Day> {
    if hours.is_empty() {
        return None;
    }
    let middle = |values: Vec<f64>| science::median(&values);
    let steady = |f: fn(&super::hours::Steady) -> f64| {
        middle(hours.iter().filter_map(|h| h.steady.as_ref().map(f)).collect())
    };
    let starts: Vec<f64> = hours.iter().filter_map(|h| h.start_resistance_1_m).collect();
    let steady_resistance_1_m = steady(|s| s.resistance_1_m);
    let coarse = starts.is_empty() && steady_resistance_1_m.is_some();
    let (resistance_1_m, half_width_1_m) = level(&starts, hours, steady_resistance_1_m);
    let expected: u32 = hours.iter().map(|h| h.expected).sum();
    let counted: u32 = hours.iter().map(|h| h.samples).sum();
    let mut reasons: Vec<Reason> = hours.iter().flat_map(|h| h.reasons.iter().copied()).collect();
    if coarse {
        reasons.push(Reason::Coarse);
    }
    reasons.sort_unstable();
    reasons.dedup();
    let poor = hours.iter().filter(|h| h.quality != Quality::Good).count();
    let quality = match resistance_1_m {
        None if hours.iter().any(|h| h.filtration_s > 0.0) => Quality::Bad,
        _ if coarse || 2 * poor > hours.len() => Quality::Uncertain,
        _ => Quality::Good,
    };
    Some(Day {
        train: train.clone(),
        start: span.from,
        end: span.to,
        resistance_1_m,
        half_width_1_m,
        start_hours: starts.len() as u32,
        coarse,
        steady_resistance_1_m,
        flux_m_s: steady(|s| s.flux_m_s),
        temperature_degc: steady(|s| s.temperature_degc),
        end_tmp_max_pa: hours.iter().filter_map(|h| h.end_tmp_max_pa).reduce(f64::max),
        end_tmp_pa: middle(hours.iter().filter_map(|h| h.end_tmp_max_pa).collect()),
        laid_down_1_m: middle(
            cycles
                .iter()
                .filter(|c| c.left_out.is_none())
                .filter_map(Cycle::laid_down_1_m)
                .collect(),
        ),
        taken_off_1_m: middle(cycles.iter().filter_map(|c| c.taken_off_before_1_m).collect()),
        volume_m: hours.iter().map(|h| h.volume_m).sum(),
        filtration_s: hours.iter().map(|h| h.filtration_s).sum(),
        coverage: f64::from(counted) / f64::from(expected.max(1)),
        cycles: cycles.len() as u32,
        cycles_left_out: cycles.iter().filter(|c| c.left_out.is_some()).count() as u32,
        quality,
        reasons,
    })
}

/// The day's level with its interval: from the starts if there are any, else from the steady
/// median, widened by the range of the hours' own readings.
fn level(starts: &[f64], hours: &[Hour], steady: Option<f64>) -> (Option<f64>, Option<f64>) {
    if let Some(level) = science::median(starts) {
        let n = starts.len() as f64;
        let spread = science::mad_sigma(starts).unwrap_or(0.0);
        let own: Vec<f64> = hours.iter().filter_map(|h| h.start_half_width_1_m).collect();
        let own = science::median(&own).unwrap_or(0.0);
        // 1.96: 95 % of a normal; 1.2533: a median against a mean.
        let half = (1.96 * 1.2533 * spread / n.sqrt()).max(own / n.sqrt());
        return (Some(level), Some(half));
    }
    let ranges: Vec<f64> = hours
        .iter()
        .filter_map(|h| h.steady.as_ref())
        .map(|s| s.resistance_max_1_m - s.resistance_min_1_m)
        .collect();
    (steady, science::median(&ranges))
}
