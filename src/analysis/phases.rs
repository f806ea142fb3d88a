//! Stage 1: what a train was doing, as spans.

use crate::base::{Instant, Span};
use crate::plant::Phase;

use super::day_input::Samples;

/// How far back of its midnight a day looks for the start of the cycle that was open then. A
/// cycle that is older at midnight is cut there.
pub const LOOKBACK_US: i64 = 12 * crate::base::HOUR_US;

/// How a span ended.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Ended {
    /// Another phase followed, first read at that moment.
    Next(Phase, Instant),
    /// Readings paused; the next came at that moment.
    Gap(Instant),
    /// Filtration ran on over midnight for more than twelve hours.
    Midnight(Instant),
    /// It had not ended by the last reading.
    Open,
}

/// Samples `first..=last` of one phase.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct PhaseSpan {
    /// What the train was doing.
    pub phase: Phase,
    /// First sample's time.
    pub from: Instant,
    /// The next sample's time, or one row after the last sample.
    pub to: Instant,
    /// Index of the first sample.
    pub first: usize,
    /// Index of the last sample.
    pub last: usize,
    /// Whether its beginning was seen: another phase was read just before.
    pub began: bool,
    /// How it ended.
    pub ended: Ended,
}

/// Cuts samples into spans of one phase. `day` is the plant day that is worked; the samples
/// begin [`LOOKBACK_US`] before it.
pub fn spans(samples: &Samples, day: Span) -> Vec<PhaseSpan> {
    let mut out: Vec<PhaseSpan> = Vec::new();
    let gap_us = samples.gap_us();
    let mut began = false;
    let mut first = 0;
    let n = samples.times.len();
    for i in 0..n {
        let (time, phase) = (samples.times[i], samples.phases[i]);
        let next = (i + 1 < n).then(|| (samples.times[i + 1], samples.phases[i + 1]));
        let (to, ended) = match next {
            None => (time.plus(samples.every_us), Ended::Open),
            Some((t, _)) if t.since(time) > gap_us => (time.plus(samples.every_us), Ended::Gap(t)),
            Some((t, p)) if p != phase => (t, Ended::Next(p, t)),
            // A cycle older than the look-back is cut at midnight, on either side of it.
            Some((t, _))
                if phase == Phase::Filtration
                    && time < day.from
                    && t >= day.from
                    && day.from.since(samples.times[first]) >= LOOKBACK_US - gap_us =>
            {
                (day.from, Ended::Midnight(day.from.plus(-1)))
            }
            Some(_) => continue,
        };
        let from = samples.times[first];
        out.push(PhaseSpan { phase, from, to, first, last: i, began, ended });
        began = matches!(ended, Ended::Next(..));
        first = i + 1;
    }
    if let Some(open) = out.last_mut() {
        let at_midnight = day.to.since(samples.times[open.last]) <= gap_us;
        let old = day.to.since(open.from) >= LOOKBACK_US - gap_us;
        if open.phase == Phase::Filtration && open.ended == Ended::Open && at_midnight && old {
            open.to = day.to;
            open.ended = Ended::Midnight(day.to.plus(-1));
        }
    }
    out
}
