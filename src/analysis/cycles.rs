//! Stage 1: filtration cycles. The start of a cycle carries what a backwash cannot remove, and
//! is what trends and limits use; it is told from minutes 2 to 8, extrapolated to zero volume.

use crate::base::{Instant, MINUTE_US, Span, TrainId};
use crate::plant::Phase;
use crate::science;

use super::day_input::Samples;
use super::normalise::{FLOW_BAND, Normalised};
use super::phases::{Ended, PhaseSpan};
use super::reason::Reason;

/// A start of cycle belongs to the hour and day of this minute.
pub const START_KNOWN_US: i64 = 8 * MINUTE_US;
/// From here on a reading may tell the start of the cycle.
const START_FROM_US: i64 = 2 * MINUTE_US;
/// The end of a cycle is the median of the steady readings of its last minutes.
const END_WINDOW_US: i64 = 5 * MINUTE_US;

/// The resistance at the start of a cycle.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Start {
    /// When it was known: minute 8.
    pub known: Instant,
    /// 1/m, at zero filtered volume.
    pub resistance_1_m: f64,
    /// Half the 95 % interval, 1/m.
    pub half_width_1_m: f64,
}

/// A filtration cycle that has ended. Keyed by train and start.
#[derive(Clone, Debug, PartialEq)]
pub struct Cycle {
    /// Whose.
    pub train: TrainId,
    /// First reading of filtration.
    pub start: Instant,
    /// First reading of what followed, or one row after the last before a pause.
    pub end: Instant,
    /// When its end was known; decides the day to which the row belongs.
    pub decided: Instant,
    /// Filtered volume per area, m3/m2.
    pub volume_m: f64,
    /// Median flux of the steady readings, m/s; NaN without any.
    pub flux_m_s: f64,
    /// Median temperature, degrees Celsius; NaN without any.
    pub temperature_degc: f64,
    /// At the start, 1/m; `None` where it cannot be told.
    pub start_resistance_1_m: Option<f64>,
    /// Half the 95 % interval of the start, 1/m.
    pub start_half_width_1_m: Option<f64>,
    /// At the end, 1/m.
    pub end_resistance_1_m: Option<f64>,
    /// TMP at the end as read, Pa.
    pub end_tmp_pa: Option<f64>,
    /// What the backwash before this cycle took off: end of the cycle before less this start,
    /// 1/m. `None` where one of the two cannot be told or more than a backwash lay between.
    pub taken_off_before_1_m: Option<f64>,
    /// What came before.
    pub preceded_by: Option<Phase>,
    /// What followed.
    pub followed_by: Option<Phase>,
    /// Why it does not count; `None` if it does.
    pub left_out: Option<Reason>,
}

impl Cycle {
    /// What was laid down within the cycle, 1/m.
    pub fn laid_down_1_m(&self) -> Option<f64> {
        Some(self.end_resistance_1_m? - self.start_resistance_1_m?)
    }
}

/// Cycles and starts found in a window of samples.
pub struct Found {
    /// Cycles whose end was decided within the day.
    pub cycles: Vec<Cycle>,
    /// Starts of cycle known within the day.
    pub starts: Vec<Start>,
}

/// Cuts cycles. Only cycles decided, and starts known, within `day` are returned.
pub fn cycles(
    train: &TrainId,
    samples: &Samples,
    spans: &[PhaseSpan],
    normalised: &Normalised,
    day: Span,
) -> Found {
    let mut found = Found { cycles: Vec::new(), starts: Vec::new() };
    let mut before: Option<Cycle> = None;
    for (k, span) in spans.iter().enumerate() {
        if span.phase != Phase::Filtration {
            continue;
        }
        let cleansed = washed_before(spans, k);
        let (start, why_not) = start_of(samples, normalised, span, cleansed);
        if let Some(s) = start.filter(|s| day.contains(s.known)) {
            found.starts.push(s);
        }
        let (decided, followed_by) = match span.ended {
            Ended::Open => continue,
            Ended::Next(phase, at) => (at, Some(phase)),
            Ended::Gap(at) | Ended::Midnight(at) => (at, None),
        };
        let mut cycle = cycle(train, samples, normalised, span);
        cycle.decided = decided;
        cycle.followed_by = followed_by;
        cycle.preceded_by = (span.began && k > 0).then(|| spans[k - 1].phase);
        cycle.start_resistance_1_m = start.map(|s| s.resistance_1_m);
        cycle.start_half_width_1_m = start.map(|s| s.half_width_1_m);
        cycle.left_out = why_not.or(match span.ended {
            Ended::Gap(_) => Some(Reason::Gap),
            Ended::Midnight(_) => Some(Reason::CutAtMidnight),
            _ => None,
        });
        cycle.taken_off_before_1_m = before
            .filter(|b| only_backwash_between(spans, k, b.end))
            .and_then(|b| Some(b.end_resistance_1_m? - cycle.start_resistance_1_m?));
        before = Some(cycle.clone());
        if day.contains(decided) {
            found.cycles.push(cycle);
        }
    }
    found
}

/// Whether a backwash or a clean came between this span of filtration and the one before.
fn washed_before(spans: &[PhaseSpan], k: usize) -> bool {
    spans[..k].iter().rev().take_while(|s| s.phase != Phase::Filtration).any(|s| {
        matches!(
            s.phase,
            Phase::Backwash
                | Phase::ChemicalBackwash
                | Phase::MaintenanceClean
                | Phase::CleanInPlace
                | Phase::Relaxation
        )
    })
}

fn only_backwash_between(spans: &[PhaseSpan], k: usize, end: Instant) -> bool {
    let between: Vec<Phase> =
        spans[..k].iter().rev().take_while(|s| s.from >= end).map(|s| s.phase).collect();
    between.contains(&Phase::Backwash)
        && between.iter().all(|p| matches!(p, Phase::Backwash | Phase::Flush))
}

/// The start of the cycle, or why there is none.
fn start_of(
    samples: &Samples,
    normalised: &Normalised,
    span: &PhaseSpan,
    cleansed: bool,
) -> (Option<Start>, Option<Reason>) {
    if !span.began {
        return (None, Some(Reason::StartNotSeen));
    }
    if !cleansed {
        return (None, Some(Reason::NoBackwashBefore));
    }
    if span.to.since(span.from) < START_KNOWN_US {
        let why = if span.ended == Ended::Open { None } else { Some(Reason::ShortCycle) };
        return (None, why);
    }
    let (volume, resistance, why) = start_points(samples, normalised, span);
    match science::start_value(&volume, &resistance) {
        Some(s) if s.resistance_1_m > 0.0 => {
            let start = Start {
                known: span.from.plus(START_KNOWN_US),
                resistance_1_m: s.resistance_1_m,
                half_width_1_m: s.interval_half_width,
            };
            (Some(start), None)
        }
        _ => (None, Some(why.unwrap_or(Reason::FewReadings))),
    }
}

/// Volume and resistance of the readings of minutes 2 to 8 whose flow is within 5 % of their
/// median, and the commonest reason why others are not among them.
fn start_points(
    samples: &Samples,
    normalised: &Normalised,
    span: &PhaseSpan,
) -> (Vec<f64>, Vec<f64>, Option<Reason>) {
    let volumes = volumes(samples, span, START_KNOWN_US);
    let mut window = Vec::new();
    let mut flows = Vec::new();
    let mut why = None;
    for (i, volume) in (span.first..).zip(volumes) {
        let age_us = samples.times[i].since(span.from);
        if !(START_FROM_US..=START_KNOWN_US).contains(&age_us) {
            continue;
        }
        if normalised.resistance_1_m[i].is_finite() {
            window.push((i, volume));
            flows.push(samples.flux_m_s[i]);
        } else {
            why = why.or(normalised.reason[i]);
        }
    }
    let middle = science::median(&flows).unwrap_or(f64::NAN);
    window.retain(|(i, _)| (samples.flux_m_s[*i] / middle - 1.0).abs() <= FLOW_BAND);
    let resistance = window.iter().map(|(i, _)| normalised.resistance_1_m[*i]).collect();
    (window.into_iter().map(|(_, v)| v).collect(), resistance, why)
}

/// Filtered volume per area since the start of the span, at each of its samples up to an age.
/// Filtration began, on average, half a row before its first reading.
fn volumes(samples: &Samples, span: &PhaseSpan, age_us: i64) -> Vec<f64> {
    let mut out = Vec::new();
    let mut volume_m = 0.0;
    let mut flux = 0.0;
    let mut before = span.from.plus(-samples.every_us / 2);
    for i in span.first..=span.last {
        let time = samples.times[i];
        if time.since(span.from) > age_us {
            break;
        }
        let now = samples.flux_m_s[i];
        if now.is_finite() {
            flux = now.max(0.0);
        }
        volume_m += flux * time.seconds_since(before);
        before = time;
        out.push(volume_m);
    }
    out
}

fn cycle(train: &TrainId, samples: &Samples, normalised: &Normalised, span: &PhaseSpan) -> Cycle {
    let steady: Vec<usize> = (span.first..=span.last).filter(|i| normalised.counts(*i)).collect();
    let pick = |values: &[f64], of: &[usize]| -> Option<f64> {
        science::median(&of.iter().map(|i| values[*i]).collect::<Vec<_>>())
    };
    let end_from = samples.times[span.last].plus(-END_WINDOW_US);
    let mut tail: Vec<usize> =
        steady.iter().copied().filter(|i| samples.times[*i] >= end_from).collect();
    if tail.len() > 3 {
        tail.drain(..tail.len() - 3);
    }
    let whole = span.began && matches!(span.ended, Ended::Next(..));
    let end = |values: &[f64]| if whole { pick(values, &tail) } else { None };
    Cycle {
        train: train.clone(),
        start: span.from,
        end: span.to,
        decided: span.to,
        volume_m: volumes(samples, span, i64::MAX).last().copied().unwrap_or(0.0),
        flux_m_s: pick(&samples.flux_m_s, &steady).unwrap_or(f64::NAN),
        temperature_degc: pick(&samples.temperature_degc, &steady).unwrap_or(f64::NAN),
        start_resistance_1_m: None,
        start_half_width_1_m: None,
        end_resistance_1_m: end(&normalised.resistance_1_m),
        end_tmp_pa: end(&samples.tmp_pa),
        taken_off_before_1_m: None,
        preceded_by: None,
        followed_by: None,
        left_out: None,
    }
}
