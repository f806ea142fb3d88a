//! Stage 3: runs. A run is the time from one clean in place to the next; its row holds what
//! the clean that began it gave back, and the verdict on that.

use serde::{Deserialize, Serialize};

use crate::base::{DAY_US, HOUR_US, Instant, TrainId};
use crate::science;

use super::Site;
use super::cleans::{Clean, Origin};
use super::hours::Hour;

/// A verdict needs the starts of cycle of this much filtration after the return, s.
pub const VERDICT_AFTER_S: f64 = 24.0 * 3600.0;
/// And uses no more than this, s.
pub const VERDICT_UPTO_S: f64 = 48.0 * 3600.0;
/// The state before a clean is that of the last filtration before it, s.
const BEFORE_S: f64 = 24.0 * 3600.0;
/// Fewer hours with a start of cycle than this tell nothing.
const FEWEST_HOURS: usize = 6;
/// The best after a clean counts for twelve months.
const BEST_WITHIN_US: i64 = 365 * DAY_US;
/// Restored from here on, share of the best permeability (common practice, no source).
const RESTORED: f64 = 0.95;
/// Partly restored from here on (common practice, no source).
const PARTLY: f64 = 0.85;
/// More than this is too good to be true (common practice, no source).
const TOO_GOOD: f64 = 1.05;
/// Before and after are alike if their fluxes are within this share.
const LIKE_FLUX: f64 = 0.15;

/// What a clean was worth.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Serialize, Deserialize)]
#[serde(rename_all = "snake_case")]
pub enum Verdict {
    /// At least 95 % of the best permeability after a clean.
    Restored,
    /// 85 to 95 %.
    PartlyRestored,
    /// Less.
    NotRestored,
    /// Better than the best: an instrument or an opening in the membrane, not a clean.
    Doubtful,
    /// Not known yet, or nothing to compare with.
    CannotTellYet,
}

impl Verdict {
    /// The word used in the API.
    pub const fn code(self) -> &'static str {
        match self {
            Self::Restored => "restored",
            Self::PartlyRestored => "partly_restored",
            Self::NotRestored => "not_restored",
            Self::Doubtful => "doubtful",
            Self::CannotTellYet => "cannot_tell_yet",
        }
    }
    /// The verdict of a word; `CannotTellYet` if it is none.
    pub fn from_code(code: &str) -> Self {
        [Self::Restored, Self::PartlyRestored, Self::NotRestored, Self::Doubtful]
            .into_iter()
            .find(|v| v.code() == code)
            .unwrap_or(Self::CannotTellYet)
    }
}

/// Which baseline a number is held against.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord, Serialize, Deserialize)]
#[serde(rename_all = "snake_case")]
pub enum BaselineKind {
    /// After the last clean that was judged restored.
    AfterClean,
    /// After the last good clean, as the plant file states it.
    AfterCleanStated,
    /// Best after a clean in twelve months.
    BestAfterClean,
    /// The new membrane, as the plant file states it.
    AsNew,
}

impl BaselineKind {
    /// The word used in the API.
    pub const fn code(self) -> &'static str {
        match self {
            Self::AfterClean => "after_clean",
            Self::AfterCleanStated => "after_clean_stated",
            Self::BestAfterClean => "best_after_clean",
            Self::AsNew => "as_new",
        }
    }
    /// The kind of a word.
    pub fn from_code(code: &str) -> Option<Self> {
        [Self::AfterClean, Self::AfterCleanStated, Self::BestAfterClean, Self::AsNew]
            .into_iter()
            .find(|k| k.code() == code)
    }
}

/// A resistance to hold others against.
#[derive(Clone, Copy, Debug, PartialEq, Serialize, Deserialize)]
pub struct Baseline {
    /// Which.
    pub kind: BaselineKind,
    /// 1/m.
    pub resistance_1_m: f64,
    /// When it was observed; `None` where the plant file gives no date.
    pub at: Option<Instant>,
}

/// A level of start-of-cycle resistance over some hours.
#[derive(Clone, Copy, Debug, PartialEq, Serialize, Deserialize)]
pub struct Level {
    /// Median, 1/m.
    pub resistance_1_m: f64,
    /// Half the 95 % interval, 1/m.
    pub half_width_1_m: f64,
    /// Median flux, m/s.
    pub flux_m_s: f64,
    /// Median temperature, degrees Celsius.
    pub temperature_degc: f64,
    /// Hours with a start of cycle.
    pub hours: u32,
    /// First hour used.
    pub from: Instant,
    /// End of the last hour used.
    pub to: Instant,
}

/// A run. Keyed by train and start.
#[derive(Clone, Debug, PartialEq)]
pub struct Run {
    /// Whose.
    pub train: TrainId,
    /// The clean's end: the return to service.
    pub start: Instant,
    /// The clean's beginning.
    pub clean_start: Instant,
    /// Where the clean is known from.
    pub origin: Origin,
    /// Before the clean.
    pub before: Option<Level>,
    /// After the clean: 24 to 48 hours of filtration.
    pub after: Option<Level>,
    /// What "after" is held against.
    pub best: Option<Baseline>,
    /// What the clean was worth.
    pub verdict: Verdict,
    /// From when the verdict is known: the end of a plant day.
    pub verdict_known: Option<Instant>,
    /// Slope of the run so far, 1/m per m3/m2.
    pub slope_1_m_per_m: Option<f64>,
}

impl Run {
    /// Permeability after the clean over the best after a clean, share.
    pub fn restored_share(&self) -> Option<f64> {
        Some(self.best?.resistance_1_m / self.after?.resistance_1_m)
    }
    /// Share of the loss that the clean took back, in resistance.
    pub fn regained_share(&self) -> Option<f64> {
        let (before, after) = (self.before?.resistance_1_m, self.after?.resistance_1_m);
        let lost = before - self.best?.resistance_1_m;
        (lost > 0.02 * before).then_some((before - after) / lost)
    }
    /// Whether before and after were read at like flux.
    pub fn like_flux(&self) -> Option<bool> {
        Some((self.before?.flux_m_s / self.after?.flux_m_s - 1.0).abs() <= LIKE_FLUX)
    }
    /// The verdict as it could be told at a moment.
    pub fn verdict_at(&self, at: Instant) -> Verdict {
        match self.verdict_known {
            Some(known) if known <= at => self.verdict,
            _ => Verdict::CannotTellYet,
        }
    }
}

/// Opens the run that a clean begins. `hours` are those before the clean, in order of time.
pub fn open(site: &Site, clean: &Clean, earlier: &[Run], hours: &[Hour]) -> Run {
    let until = hours.partition_point(|h| h.end <= clean.start);
    let mut filtered_s = 0.0;
    let from = hours[..until]
        .iter()
        .rposition(|h| {
            filtered_s += h.filtration_s;
            filtered_s >= BEFORE_S
        })
        .unwrap_or(0);
    Run {
        train: site.train.id.clone(),
        start: clean.end,
        clean_start: clean.start,
        origin: clean.origin.clone(),
        before: level(&hours[from..until]),
        after: None,
        best: best(site, earlier, clean.start),
        verdict: Verdict::CannotTellYet,
        verdict_known: None,
        slope_1_m_per_m: None,
    }
}

/// Judges a run's clean if its time has come. `hours` hold those since the return; `now` is the
/// end of a plant day.
pub fn judge(run: &mut Run, hours: &[Hour], now: Instant) {
    if run.verdict_known.is_some() {
        return;
    }
    // The first hour after the return still wets and rinses.
    let settled = run.start.plus(HOUR_US);
    let first = hours.partition_point(|h| h.start < settled);
    let mut filtered_s = 0.0;
    let mut upto = first;
    for hour in &hours[first..] {
        if hour.end > now || filtered_s >= VERDICT_UPTO_S {
            break;
        }
        filtered_s += hour.filtration_s;
        upto += 1;
    }
    let after = level(&hours[first..upto]);
    let enough = after.is_some_and(|l| l.hours as usize >= FEWEST_HOURS);
    if filtered_s < VERDICT_AFTER_S || !enough {
        return;
    }
    run.after = after;
    run.verdict_known = Some(now);
    run.verdict = match run.restored_share() {
        None => Verdict::CannotTellYet,
        Some(share) if share > TOO_GOOD => Verdict::Doubtful,
        Some(share) if share >= RESTORED => Verdict::Restored,
        Some(share) if share >= PARTLY => Verdict::PartlyRestored,
        Some(_) => Verdict::NotRestored,
    };
}

/// The level over some hours; `None` without a start of cycle.
fn level(hours: &[Hour]) -> Option<Level> {
    let told: Vec<&Hour> = hours.iter().filter(|h| h.start_resistance_1_m.is_some()).collect();
    let starts: Vec<f64> = told.iter().filter_map(|h| h.start_resistance_1_m).collect();
    let of = |f: fn(&super::hours::Steady) -> f64| {
        let values: Vec<f64> = told.iter().filter_map(|h| h.steady.as_ref().map(f)).collect();
        science::median(&values).unwrap_or(f64::NAN)
    };
    let spread = science::mad_sigma(&starts).unwrap_or(0.0);
    Some(Level {
        resistance_1_m: science::median(&starts)?,
        half_width_1_m: 1.96 * 1.2533 * spread / (starts.len() as f64).sqrt(),
        flux_m_s: of(|s| s.flux_m_s),
        temperature_degc: of(|s| s.temperature_degc),
        hours: starts.len() as u32,
        from: told.first()?.start,
        to: told.last()?.end,
    })
}

/// The best after a clean in the twelve months before `at`; failing that, what the plant file
/// states of the last good clean, and of the new membrane.
pub fn best(site: &Site, runs: &[Run], at: Instant) -> Option<Baseline> {
    let since = at.plus(-BEST_WITHIN_US);
    let observed = runs
        .iter()
        .filter(|r| r.start >= since && r.verdict_known.is_some_and(|k| k <= at))
        .filter(|r| r.verdict != Verdict::Doubtful)
        .filter_map(|r| r.after.map(|a| (a.resistance_1_m, r.start)));
    let stated = stated(site).filter(|b| b.at.is_some_and(|t| t >= since && t <= at));
    observed
        .map(|(r, t)| (r, BaselineKind::BestAfterClean, t))
        .chain(stated.and_then(|b| Some((b.resistance_1_m, b.kind, b.at?))))
        .min_by(|a, b| a.0.total_cmp(&b.0))
        .map(|(resistance_1_m, kind, t)| Baseline { kind, resistance_1_m, at: Some(t) })
        .or_else(|| as_new(site))
}

/// The baseline of losses at `at`: after the last clean judged restored; failing that, as stated.
pub fn baseline(site: &Site, runs: &[Run], at: Instant) -> Option<Baseline> {
    runs.iter()
        .rev()
        .find(|r| r.verdict_at(at) == Verdict::Restored)
        .and_then(|r| {
            Some(Baseline {
                kind: BaselineKind::AfterClean,
                resistance_1_m: r.after?.resistance_1_m,
                at: Some(r.start),
            })
        })
        .or_else(|| stated(site).filter(|b| b.at.is_none_or(|t| t <= at)))
        .or_else(|| as_new(site))
}

fn stated(site: &Site) -> Option<Baseline> {
    site.train.after_clean_permeability.map(|p| Baseline {
        kind: BaselineKind::AfterCleanStated,
        resistance_1_m: site.resistance_1_m(p.value),
        at: Some(p.from),
    })
}

/// The new membrane as the plant file states it.
pub fn as_new(site: &Site) -> Option<Baseline> {
    site.train.as_new_permeability.map(|p| Baseline {
        kind: BaselineKind::AsNew,
        resistance_1_m: site.resistance_1_m(p),
        at: None,
    })
}
