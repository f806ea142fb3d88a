//! What stands for a train at the end of an hour: the last assessment, and the hours since.

use crate::base::{DAY_US, Instant, MINUTE_US, TrainId};
use crate::plant::Limits;

use super::Site;
use super::assess::{Assessment, GrowthFrom};
use super::cleans::{self, PhaseRow, RecordedClean};
use super::forecast::Dates;
use super::hours::Hour;
use super::limits::{self, Hold, Holds, LimitKind};
use super::reason::{Quality, Reason};
use super::runs::{Baseline, Run};

/// A start of cycle speaks for the train this long.
const FRESH_US: i64 = DAY_US;
/// Filtration that shows a train to be back.
const BACK_US: i64 = 15 * MINUTE_US;

/// Loss of permeability now.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Loss {
    /// Share of 1 against the baseline; negative where better.
    pub share: f64,
    /// Low end of the 95 % interval.
    pub low: f64,
    /// High end.
    pub high: f64,
    /// The hour whose median start of cycle it is.
    pub hour: Instant,
}

/// Why there are no dates.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum NoDates {
    /// The train is being cleaned.
    InClean,
    /// A clean has ended and five days of filtration have not passed since.
    YoungRun,
    /// There is no baseline and no TMP limit.
    NothingToHoldAgainst,
    /// No day has been worked yet, or none had a start of cycle.
    NoDays,
}

/// What stands for a train.
#[derive(Clone, Debug, PartialEq)]
pub struct Standing {
    /// Whose.
    pub train: TrainId,
    /// The end of the last hour used.
    pub as_of: Instant,
    /// Return to service of the last clean.
    pub run_start: Option<Instant>,
    /// What losses are held against.
    pub baseline: Option<Baseline>,
    /// Loss now; `None` without a baseline or a start of cycle in the last day of the run.
    pub loss: Option<Loss>,
    /// Highest TMP at the end of a cycle in the last hour that had one, Pa, with the hour.
    pub end_tmp_pa: Option<(f64, Instant)>,
    /// How far the limits have come to counting.
    pub holds: Holds,
    /// Dates of the limits.
    pub dates: [Option<Dates>; 4],
    /// Where the growth behind the dates comes from.
    pub growth_from: Option<GrowthFrom>,
    /// Why there are none, where there are none.
    pub no_dates: Option<NoDates>,
    /// Whole days of the run at the last midnight.
    pub run_days: u32,
    /// The assessment that this stands on.
    pub assessed: Option<Instant>,
    /// The clean that is under way.
    pub in_clean: Option<Instant>,
    /// The clean that began the run, with its verdict as known now.
    pub clean: Option<Run>,
    /// The verdicts before it, newest first, at most three.
    pub earlier_verdicts: Vec<super::runs::Verdict>,
    /// Reasons that kept a whole hour of filtration from counting, in the last day.
    pub troubles: Vec<Reason>,
}

impl Standing {
    /// The hold of a limit.
    pub fn hold(&self, kind: LimitKind) -> Hold {
        self.holds[index(kind)]
    }
    /// The dates of a limit.
    pub fn dates_of(&self, kind: LimitKind) -> Option<Dates> {
        self.dates[index(kind)]
    }
    /// The limit that comes first among those that ask for a clean, with its dates.
    pub fn binding(&self) -> Option<(LimitKind, Dates)> {
        let far = Instant::from_micros(i64::MAX);
        LimitKind::ALL
            .into_iter()
            .filter(|k| k.is_clean())
            .filter_map(|k| self.dates_of(k).map(|d| (k, d)))
            .min_by_key(|(_, d)| (d.p50.unwrap_or(far), d.p10.unwrap_or(far)))
            .filter(|(_, d)| d.p10.is_some())
    }
}

fn index(kind: LimitKind) -> usize {
    LimitKind::ALL.iter().position(|k| *k == kind).unwrap_or(0)
}

/// Rows that a standing is worked from; none may be later than its moment.
pub struct Rows<'a> {
    /// The last assessment before the day of the moment.
    pub assessment: Option<&'a Assessment>,
    /// Hours of the last two days at least, in order of time.
    pub hours: &'a [Hour],
    /// Phases of clean in place of the last weeks, in order of time.
    pub pieces: &'a [PhaseRow],
    /// Recorded cleans of the last weeks.
    pub recorded: &'a [RecordedClean],
    /// The train's runs, in order of time.
    pub runs: &'a [Run],
}

/// Works out what stands at `as_of`, the end of an hour. Later rows are not looked at.
pub fn standing(site: &Site, rows: &Rows, as_of: Instant) -> Standing {
    let assessed = rows.assessment.map(|a| a.as_of);
    let since = assessed.unwrap_or(Instant::from_micros(i64::MIN));
    let cleans = cleans::cleans(rows.pieces, rows.recorded, as_of);
    // A train is back once it has filtered again; between two steps of a clean it only rinses.
    let back = |end: Instant| {
        end.plus(BACK_US) <= as_of
            && rows
                .hours
                .iter()
                .any(|h| h.end > end && h.end <= as_of && h.filtration_s * 1e6 >= BACK_US as f64)
    };
    let in_clean = cleans.iter().find(|c| c.end >= since && !back(c.end)).map(|c| c.start);
    let returned = cleans.iter().rev().find(|c| c.end >= since && back(c.end)).map(|c| c.end);
    let run_start = returned.or(rows.assessment.and_then(|a| a.run_start));
    let baseline = rows
        .assessment
        .map_or_else(|| super::runs::baseline(site, rows.runs, as_of), |a| a.baseline);
    let hours: Vec<&Hour> = rows
        .hours
        .iter()
        .filter(|h| h.end <= as_of && run_start.is_none_or(|s| h.start >= s))
        .collect();
    let mut holds = match (returned, rows.assessment) {
        (None, Some(a)) => a.holds,
        _ => Holds::default(),
    };
    for hour in hours.iter().filter(|h| h.start >= since) {
        let resistance = baseline.map(|b| b.resistance_1_m);
        limits::step(&mut holds, hour, resistance, &site.train.limits);
    }
    let fresh = as_of.plus(-FRESH_US);
    let recent = || hours.iter().rev().take_while(|h| h.end > fresh);
    let loss = baseline.and_then(|b| recent().find_map(|h| loss_of(h, &b)));
    let end_tmp_pa = recent().find_map(|h| h.end_tmp_max_pa.map(|p| (p, h.start)));
    let (mut dates, no_dates) = dates(rows, returned, in_clean, baseline, &site.train.limits);
    for (dates, hold) in dates.iter_mut().zip(&holds) {
        // Once it counts, a limit has the date on which it was passed; no look moves it.
        if hold.held.is_some() && in_clean.is_none() {
            *dates = Some(Dates { p10: hold.since, p50: hold.since, p90: hold.since });
        }
    }
    let past: Vec<&Run> = rows.runs.iter().filter(|r| r.start < since).collect();
    Standing {
        train: site.train.id.clone(),
        as_of,
        run_start,
        baseline,
        loss,
        end_tmp_pa,
        holds,
        dates,
        growth_from: rows.assessment.and_then(|a| a.growth_from).filter(|_| returned.is_none()),
        no_dates,
        run_days: if returned.is_some() { 0 } else { rows.assessment.map_or(0, |a| a.run_days) },
        assessed,
        in_clean,
        clean: past.last().map(|r| as_known(r, since)),
        earlier_verdicts: past.iter().rev().skip(1).take(3).map(|r| r.verdict_at(since)).collect(),
        troubles: troubles(&hours, fresh),
    }
}

/// A run as it was known at a moment.
pub fn as_known(run: &Run, at: Instant) -> Run {
    let mut run = run.clone();
    if run.verdict_known.is_none_or(|k| k > at) {
        run.after = None;
        run.verdict = super::runs::Verdict::CannotTellYet;
        run.verdict_known = None;
    }
    run
}

fn loss_of(hour: &Hour, baseline: &Baseline) -> Option<Loss> {
    let r = hour.start_resistance_1_m?;
    let half = hour.start_half_width_1_m.unwrap_or(0.0);
    let share = |r: f64| limits::loss(r, baseline.resistance_1_m);
    Some(Loss { share: share(r), low: share(r - half), high: share(r + half), hour: hour.start })
}

fn dates(
    rows: &Rows,
    returned: Option<Instant>,
    in_clean: Option<Instant>,
    baseline: Option<Baseline>,
    limits: &Limits,
) -> ([Option<Dates>; 4], Option<NoDates>) {
    if in_clean.is_some() {
        return ([None; 4], Some(NoDates::InClean));
    }
    if returned.is_some() {
        return ([None; 4], Some(NoDates::YoungRun));
    }
    let Some(a) = rows.assessment else { return ([None; 4], Some(NoDates::NoDays)) };
    if a.dates.iter().any(Option::is_some) {
        return (a.dates, None);
    }
    let tmp_limit = LimitKind::TmpClean.value(limits).is_some();
    let why = if baseline.is_none() && !tmp_limit {
        NoDates::NothingToHoldAgainst
    } else if a.run_days < super::trend::FEWEST_DAYS as u32 {
        NoDates::YoungRun
    } else {
        NoDates::NoDays
    };
    (a.dates, Some(why))
}

fn troubles(hours: &[&Hour], fresh: Instant) -> Vec<Reason> {
    let mut out: Vec<Reason> = hours
        .iter()
        .rev()
        .take_while(|h| h.end > fresh)
        .filter(|h| h.quality == Quality::Bad)
        .flat_map(|h| h.reasons.iter().copied())
        .collect();
    out.sort_unstable();
    out.dedup();
    out
}
