//! Stage 1: hours. A row depends on readings before its end only, so that posting hour by hour
//! and importing at once say the same.

use std::collections::BTreeMap;

use crate::base::{HOUR_US, Instant, Span, TrainId};
use crate::plant::Phase;
use crate::science;

use super::cycles::{Cycle, Start};
use super::day_input::Samples;
use super::normalise::Normalised;
use super::reason::{Quality, Reason};

/// One hour of one train. Keyed by train and start.
#[derive(Clone, Debug, PartialEq)]
pub struct Hour {
    /// Whose.
    pub train: TrainId,
    /// Local clock hour from here; the last of a day may be shorter.
    pub start: Instant,
    /// Up to here.
    pub end: Instant,
    /// Numbers of the steady readings; `None` where none counts.
    pub steady: Option<Steady>,
    /// Median of the starts of cycle known in it, 1/m.
    pub start_resistance_1_m: Option<f64>,
    /// Half the 95 % interval of that, 1/m.
    pub start_half_width_1_m: Option<f64>,
    /// How many starts.
    pub starts: u32,
    /// Highest TMP at the end of a cycle, as read, Pa.
    pub end_tmp_max_pa: Option<f64>,
    /// Readings that count.
    pub samples: u32,
    /// Readings expected: the hour over the spacing of rows.
    pub expected: u32,
    /// Time in filtration, s.
    pub filtration_s: f64,
    /// Filtered volume per area, m3/m2.
    pub volume_m: f64,
    /// What the train did for most of the hour.
    pub mostly: Phase,
    /// How far the numbers can be trusted.
    pub quality: Quality,
    /// Why not fully; ascending.
    pub reasons: Vec<Reason>,
}

/// Medians and range of the steady readings of an hour.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Steady {
    /// Median, 1/m.
    pub resistance_1_m: f64,
    /// Lowest, 1/m.
    pub resistance_min_1_m: f64,
    /// Highest, 1/m.
    pub resistance_max_1_m: f64,
    /// Median, m/s.
    pub flux_m_s: f64,
    /// Median, Pa.
    pub tmp_pa: f64,
    /// Median, degrees Celsius.
    pub temperature_degc: f64,
}

/// Works out the hours of a day that have readings.
pub fn hours(
    train: &TrainId,
    samples: &Samples,
    normalised: &Normalised,
    starts: &[Start],
    cycles: &[Cycle],
    day: Span,
) -> Vec<Hour> {
    let mut out = Vec::with_capacity(25);
    let mut from = day.from;
    while from < day.to {
        let span = Span::new(from, from.plus(HOUR_US).min(day.to));
        let a = samples.times.partition_point(|t| *t < span.from);
        let b = samples.times.partition_point(|t| *t < span.to);
        if a < b {
            let mut hour = hour(train, samples, normalised, span, a, b);
            add_starts(&mut hour, starts, span);
            hour.end_tmp_max_pa = cycles
                .iter()
                .filter(|c| span.contains(c.decided))
                .filter_map(|c| c.end_tmp_pa)
                .reduce(f64::max);
            out.push(hour);
        }
        from = span.to;
    }
    out
}

/// Summary of samples `a..b` as one step of any length; used for hours, minutes and days alike.
pub fn summarise(
    samples: &Samples,
    normalised: &Normalised,
    a: usize,
    b: usize,
) -> (Option<Steady>, u32) {
    let counted: Vec<usize> = (a..b).filter(|i| normalised.counts(*i)).collect();
    let of = |values: &[f64]| -> f64 {
        let picked: Vec<f64> = counted.iter().map(|i| values[*i]).collect();
        science::median(&picked).unwrap_or(f64::NAN)
    };
    if counted.is_empty() {
        return (None, 0);
    }
    let r = &normalised.resistance_1_m;
    let (low, high) =
        counted.iter().fold((f64::INFINITY, 0.0_f64), |(l, h), i| (l.min(r[*i]), h.max(r[*i])));
    let steady = Steady {
        resistance_1_m: of(r),
        resistance_min_1_m: low,
        resistance_max_1_m: high,
        flux_m_s: of(&samples.flux_m_s),
        tmp_pa: of(&samples.tmp_pa),
        temperature_degc: of(&samples.temperature_degc),
    };
    (Some(steady), counted.len() as u32)
}

fn hour(
    train: &TrainId,
    samples: &Samples,
    normalised: &Normalised,
    span: Span,
    a: usize,
    b: usize,
) -> Hour {
    let every_s = samples.every_us as f64 / 1e6;
    let (steady, counted) = summarise(samples, normalised, a, b);
    let mut phases: BTreeMap<Phase, u32> = BTreeMap::new();
    let mut reasons: BTreeMap<Reason, u32> = BTreeMap::new();
    let mut volume_m = 0.0;
    for i in a..b {
        *phases.entry(samples.phases[i]).or_default() += 1;
        if samples.phases[i] == Phase::Filtration && samples.flux_m_s[i] > 0.0 {
            volume_m += samples.flux_m_s[i] * every_s;
        }
        if let Some(reason) = normalised.reason[i] {
            *reasons.entry(reason).or_default() += 1;
        }
    }
    let filtering = phases.get(&Phase::Filtration).copied().unwrap_or(0);
    let (quality, reasons) = grade(&reasons, counted, filtering);
    Hour {
        train: train.clone(),
        start: span.from,
        end: span.to,
        steady,
        start_resistance_1_m: None,
        start_half_width_1_m: None,
        starts: 0,
        end_tmp_max_pa: None,
        samples: counted,
        expected: (span.length_us() / samples.every_us) as u32,
        filtration_s: f64::from(filtering) * every_s,
        volume_m,
        mostly: phases.iter().max_by_key(|(p, n)| (**n, **p)).map_or(Phase::Unknown, |(p, _)| *p),
        quality,
        reasons,
    }
}

/// An hour is good if at least half its filtration counts; the settling after each backwash is
/// no fault and is not told.
fn grade(reasons: &BTreeMap<Reason, u32>, counted: u32, filtering: u32) -> (Quality, Vec<Reason>) {
    let share = |n: u32| f64::from(n) / f64::from(filtering.max(1));
    let mut told: Vec<Reason> = reasons
        .iter()
        .filter(|(r, n)| **r != Reason::JustStarted && share(**n) > 0.1)
        .map(|(r, _)| *r)
        .collect();
    if filtering == 0 {
        return (if told.is_empty() { Quality::Good } else { Quality::Uncertain }, told);
    }
    if counted == 0 {
        if told.is_empty() {
            told.push(Reason::JustStarted);
        }
        return (Quality::Bad, told);
    }
    if share(counted) < 0.5 {
        told.push(Reason::LowCoverage);
        told.sort_unstable();
    }
    let quality = if told.is_empty() { Quality::Good } else { Quality::Uncertain };
    (quality, told)
}

fn add_starts(hour: &mut Hour, starts: &[Start], span: Span) {
    let within: Vec<&Start> = starts.iter().filter(|s| span.contains(s.known)).collect();
    let values: Vec<f64> = within.iter().map(|s| s.resistance_1_m).collect();
    let widths: Vec<f64> = within.iter().map(|s| s.half_width_1_m).collect();
    hour.starts = within.len() as u32;
    hour.start_resistance_1_m = science::median(&values);
    // A median of n starts is about as sure as their mean times 1.25 (normal errors).
    let shrink = if within.len() > 1 { 1.2533 / (within.len() as f64).sqrt() } else { 1.0 };
    hour.start_half_width_1_m = science::median(&widths).map(|w| w * shrink);
}
