//! Stage 3: one assessment a train and plant day, from that day's rows and what the run has
//! shown before. It stands on rows up to its day's end only.

use crate::base::{DAY_US, Instant, Span, TrainId};
use crate::plant::Plant;
use crate::science;

use super::Site;
use super::cleans::Clean;
use super::days::Day;
use super::forecast::{self, Dates};
use super::growth::{Expected, Growth};
use super::hours::Hour;
use super::limits::{self, Holds, LimitKind};
use super::runs::{self, Baseline, Run};
use super::trend::{self, Trend};

/// Days of a run that are kept at hand: more than the trend looks back.
pub const DAYS_KEPT: usize = 60;
/// Hours are kept at hand this long: before a clean and after it.
pub const HOURS_KEPT_US: i64 = 10 * DAY_US;
/// A run too young for a trend of its own borrows the rate of the train's earlier runs, which
/// differ from each other by about half (common practice, no source).
const BORROWED_SPREAD: f64 = 0.5;
/// A run's own trend is where the search for its rate begins, not what it must find.
const OWN_SPREAD: f64 = 2.0;
/// Water changes by about this much in a day, and does not wander further than this, K
/// (common practice, no source).
const TEMPERATURE_STEP_K: f64 = 0.35;
const TEMPERATURE_REACH_K: f64 = 3.0;

/// Where the growth of a forecast comes from.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum GrowthFrom {
    /// The run's own trend.
    OwnTrend,
    /// Earlier runs of this train, the run being younger than five days.
    EarlierRuns,
}

impl GrowthFrom {
    /// The code used in the store.
    pub const fn code(self) -> &'static str {
        match self {
            Self::OwnTrend => "own_trend",
            Self::EarlierRuns => "earlier_runs",
        }
    }
    /// The one of a code.
    pub fn from_code(code: &str) -> Option<Self> {
        [Self::OwnTrend, Self::EarlierRuns].into_iter().find(|g| g.code() == code)
    }
}

/// What could be said of a train at the end of a plant day. Keyed by train and day.
#[derive(Clone, Debug, PartialEq)]
pub struct Assessment {
    /// Whose.
    pub train: TrainId,
    /// Local midnight at which the day began.
    pub day: Instant,
    /// Local midnight at which it ended: nothing later was used.
    pub as_of: Instant,
    /// Return to service of the last clean; `None` before the first.
    pub run_start: Option<Instant>,
    /// What losses are held against.
    pub baseline: Option<Baseline>,
    /// Whole days of the run so far.
    pub run_days: u32,
    /// The run's trend; `None` with fewer than five days.
    pub trend: Option<Trend>,
    /// Growth used for the dates; `None` where nothing can be told.
    pub growth: Option<Growth>,
    /// Where that came from.
    pub growth_from: Option<GrowthFrom>,
    /// Expected temperature, degrees Celsius: the last week's.
    pub temperature_degc: Option<f64>,
    /// How far the limits had come to counting at the day's end.
    pub holds: Holds,
    /// Dates of the limits, in the order of [`LimitKind::ALL`]; `None` where there is no limit
    /// or nothing to tell it from.
    pub dates: [Option<Dates>; 4],
}

/// What a train has shown, as far as the next day needs it. Built by replaying days in order.
#[derive(Clone, Debug, Default)]
pub struct Memory {
    /// All runs, in order of time.
    pub runs: Vec<Run>,
    /// Whole days of the current run, the last [`DAYS_KEPT`].
    pub days: Vec<Day>,
    /// Whole days of the current run, all.
    pub run_days: u32,
    /// Hours of the last days, the day to be assessed included.
    pub hours: Vec<Hour>,
    /// How far the limits have come to counting.
    pub holds: Holds,
}

/// Takes a day that has ended further, and says what stands at its end. The memory already
/// holds the day's hours; `cleans` are those that could be told at its end.
pub fn assess(
    plant: &Plant,
    site: &Site,
    memory: &mut Memory,
    day: &Day,
    cleans: &[Clean],
) -> Assessment {
    let span = Span::new(day.start, day.end);
    let keep_from = day.end.plus(-HOURS_KEPT_US);
    let drop = memory.hours.partition_point(|h| h.start < keep_from);
    memory.hours.drain(..drop);
    for clean in cleans.iter().filter(|c| ended_within(c, span)) {
        begin_run(site, memory, clean);
    }
    let run_start = memory.runs.last().map(|r| r.start);
    let Memory { runs, hours: recent, .. } = memory;
    if let Some(run) = runs.last_mut() {
        runs::judge(run, recent, day.end);
    }
    let baseline = runs::baseline(site, &memory.runs, day.end);
    let resistance = baseline.map(|b| b.resistance_1_m);
    let Memory { holds, hours: recent, .. } = memory;
    for hour in recent.iter().filter(|h| span.contains(h.start)) {
        if run_start.is_none_or(|s| hour.start >= s) {
            limits::step(holds, hour, resistance, &site.train.limits);
        }
    }
    if is_run_day(day, cleans, run_start) {
        memory.run_days += 1;
        memory.days.push(day.clone());
        let drop = memory.days.len().saturating_sub(DAYS_KEPT);
        memory.days.drain(..drop);
    }
    let trend = trend::trend(&memory.days);
    if let Some(run) = memory.runs.last_mut() {
        run.slope_1_m_per_m = trend.map(|t| t.slope_1_m_per_m);
    }
    let (growth, growth_from) = growth(memory, trend.as_ref());
    let temperature_degc = last_week(&memory.days, |d| d.temperature_degc);
    let mut out = Assessment {
        train: day.train.clone(),
        day: day.start,
        as_of: day.end,
        run_start,
        baseline,
        run_days: memory.run_days,
        trend,
        growth,
        growth_from,
        temperature_degc,
        holds: memory.holds,
        dates: [None; 4],
    };
    out.dates = dates(plant, site, &out, &memory.days);
    out
}

/// A clean that reaches up to midnight goes on.
fn ended_within(clean: &Clean, day: Span) -> bool {
    day.contains(clean.end)
}

/// Whether a day belongs whole to the run: it began after the return, and no clean touched it.
pub fn is_run_day(day: &Day, cleans: &[Clean], run_start: Option<Instant>) -> bool {
    let span = Span::new(day.start, day.end);
    let in_clean = cleans.iter().any(|c| Span::new(c.start, c.end).overlaps(span));
    !in_clean && run_start.is_none_or(|s| day.start >= s)
}

fn begin_run(site: &Site, memory: &mut Memory, clean: &Clean) {
    // Steps on both sides of a midnight with a long rinse between them are one clean after all.
    if memory.runs.last().is_some_and(|r| r.clean_start == clean.start) {
        memory.runs.pop();
    }
    let run = runs::open(site, clean, &memory.runs, &memory.hours);
    memory.runs.push(run);
    memory.days.clear();
    memory.run_days = 0;
    memory.holds = Holds::default();
}

/// How the run grows: by its own days, from what its trend or earlier runs let expect.
fn growth(memory: &Memory, trend: Option<&Trend>) -> (Option<Growth>, Option<GrowthFrom>) {
    let Some(volume_m) = trend::volume_per_day(&memory.days) else { return (None, None) };
    let earlier: Vec<f64> =
        memory.runs.iter().rev().skip(1).take(3).filter_map(|r| r.slope_1_m_per_m).collect();
    let (expected, from) = match (trend, science::median(&earlier)) {
        (Some(t), _) => {
            let per_day_1_m = t.slope_1_m_per_m * volume_m;
            let own_sd = t.slope_sd_1_m_per_m * volume_m;
            // The days are about to be looked at again: expect little of them.
            let sd_1_m = libm::hypot(OWN_SPREAD * per_day_1_m, own_sd);
            (Expected { per_day_1_m, sd_1_m }, GrowthFrom::OwnTrend)
        }
        (None, Some(slope)) => {
            let per_day_1_m = slope * volume_m;
            let sd_1_m = BORROWED_SPREAD * per_day_1_m.abs();
            (Expected { per_day_1_m, sd_1_m }, GrowthFrom::EarlierRuns)
        }
        (None, None) => return (None, None),
    };
    let growth = Growth::follow(&memory.days, volume_m, expected);
    (growth, growth.map(|_| from))
}

fn last_week(days: &[Day], of: impl Fn(&Day) -> Option<f64>) -> Option<f64> {
    let values: Vec<f64> = days.iter().rev().take(7).filter_map(of).collect();
    science::median(&values)
}

/// Dates of the four limits.
fn dates(plant: &Plant, site: &Site, at: &Assessment, days: &[Day]) -> [Option<Dates>; 4] {
    let limits = &site.train.limits;
    let mut out = [None; 4];
    let Some(growth) = at.growth else { return out };
    for (slot, kind) in out.iter_mut().zip(LimitKind::ALL) {
        let Some(value) = kind.value(limits) else { continue };
        if kind.is_tmp() {
            *slot = tmp_dates(plant, at, days, &growth, value);
        } else if let Some(b) = at.baseline {
            let limit = b.resistance_1_m / (1.0 - value);
            *slot = Some(forecast::dates(at.as_of, &growth, |_| (limit, 0.0)));
        }
    }
    out
}

/// A TMP limit in resistance: `TMP/(mu(T) J)` less what a cycle lays down, at the temperature
/// expected on the day. The resistance it allows falls as the water cools.
fn tmp_dates(
    plant: &Plant,
    at: &Assessment,
    days: &[Day],
    growth: &Growth,
    limit_pa: f64,
) -> Option<Dates> {
    let flux = last_week(days, |d| d.flux_m_s)?;
    let temperature = at.temperature_degc?;
    let end = last_week(days, |d| {
        let mu = science::law_viscosity_pa_s(plant.temperature_law, d.temperature_degc?)?;
        Some(d.end_tmp_pa? / (mu * d.flux_m_s?) - d.resistance_1_m?)
    })?;
    let limit = |ahead: f64| -> (f64, f64) {
        let when = at.as_of.plus((ahead * DAY_US as f64) as i64);
        let degc = expected_temperature(plant, when).unwrap_or(temperature);
        let Some(mu) = science::law_viscosity_pa_s(plant.temperature_law, degc) else {
            return (f64::INFINITY, 0.0);
        };
        let allowed = limit_pa / (mu * flux);
        // Viscosity changes by about 2.5 % a kelvin between 5 and 25 degC (IAPWS table).
        let kelvin = (TEMPERATURE_STEP_K * ahead.sqrt()).min(TEMPERATURE_REACH_K);
        (allowed - end, 0.025 * kelvin * allowed)
    };
    Some(forecast::dates(at.as_of, growth, limit))
}

/// What the plant file says to expect, between the middles of its months; `None` where it says
/// nothing.
fn expected_temperature(plant: &Plant, when: Instant) -> Option<f64> {
    let of = |month: i8| {
        plant.outlook_temperature.iter().find(|m| m.month == month).map(|m| m.temperature_degc)
    };
    let wall = plant.zone.wall(when);
    let here = of(wall.month)?;
    let from_middle = (f64::from(wall.day) - 15.5) / 30.4;
    let neighbour = if from_middle < 0.0 { wall.month - 1 } else { wall.month + 1 };
    let neighbour = of((neighbour + 11) % 12 + 1).unwrap_or(here);
    Some(here + (neighbour - here) * from_middle.abs())
}
