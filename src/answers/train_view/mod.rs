//! A train and what stands for it: the answer to "which train, by when, how sure".

use serde::Serialize;
use utoipa::ToSchema;

use super::reason::{phase_code, reason_words, role_code};
use super::sentence::{self, Advice};
use super::time::{PlantTime, duration_text};
use super::units::{Shown, Units};
use crate::advice::Recommendation;
use crate::analysis::{LimitKind, Now, Reason, Site, Standing};
use crate::base::Instant;
use crate::plant::{Phase, Plant, Role};

/// A train.
#[derive(Clone, Debug, PartialEq, Serialize, ToSchema)]
pub struct TrainView {
    /// Short name.
    pub id: String,
    /// Name for people.
    pub name: String,
    /// The maintenance system's number.
    pub asset: Option<String>,
    /// What stands for it.
    pub standing: StandingView,
}

/// What stands for a train.
#[derive(Clone, Debug, PartialEq, Serialize, ToSchema)]
pub struct StandingView {
    /// What it is doing: a state of the plant file, or `unknown`.
    pub state: String,
    /// Since when.
    pub since: Option<PlantTime>,
    /// Loss of start-of-cycle permeability; null without a baseline or a start of cycle.
    pub loss: Option<LossView>,
    /// Its limits.
    pub limits: LimitsView,
    /// The clean limit that comes first; null where none is likely within 180 days.
    pub binding: Option<String>,
    /// An open recommendation's action, `no_clean_needed` or `cannot_advise`.
    pub advice: String,
    /// Instruments whose readings could not be used in the last day.
    pub distrusted: Vec<DistrustedView>,
    /// State codes read on the newest day that the plant file does not name.
    pub unknown_state_codes: Vec<String>,
    /// Age of the newest reading by the wall clock, ISO 8601; null without a reading.
    pub data_age: Option<String>,
    /// Whether that is beyond the age at which advice ends.
    pub stale: bool,
    /// The newest reading, on which all this stands; null without any.
    pub as_of: Option<PlantTime>,
    /// The same in plain words.
    pub sentence: String,
}

/// Loss of permeability.
#[derive(Clone, Debug, PartialEq, Serialize, ToSchema)]
pub struct LossView {
    /// Negative where permeability is better than the baseline.
    pub value: Option<f64>,
    /// UCUM code.
    pub unit: String,
    /// For people.
    pub unit_label: String,
    /// `after_clean`, `after_clean_stated` or `as_new`.
    pub baseline: String,
    /// 95 % interval.
    pub interval: Option<[f64; 2]>,
    /// The hour whose median start of cycle it is.
    pub at: PlantTime,
}

/// The four limits; null where none is set.
#[derive(Clone, Debug, PartialEq, Serialize, ToSchema)]
pub struct LimitsView {
    /// Loss worth watching.
    pub permeability_loss_advisory: Option<LimitView>,
    /// Loss at which to clean.
    pub permeability_loss_clean: Option<LimitView>,
    /// TMP worth watching.
    pub tmp_advisory: Option<LimitView>,
    /// TMP at which to clean.
    pub tmp_clean: Option<LimitView>,
}

/// A limit and when it is reached.
#[derive(Clone, Debug, PartialEq, Serialize, ToSchema)]
pub struct LimitView {
    /// The limit.
    pub limit: Option<f64>,
    /// UCUM code.
    pub unit: String,
    /// For people.
    pub unit_label: String,
    /// What is held against it now, in the same unit; null where it cannot be told.
    pub value: Option<f64>,
    /// Since when it has been exceeded without a break; null while it is not.
    pub exceeded_since: Option<PlantTime>,
    /// From when it counts: exceeded for the whole on-delay; null while it does not.
    pub held_since: Option<PlantTime>,
    /// One chance in ten that it is reached before.
    pub p10: Option<PlantTime>,
    /// As likely before as after.
    pub p50: Option<PlantTime>,
    /// Nine chances in ten that it is reached before.
    pub p90: Option<PlantTime>,
}

/// An instrument whose readings could not be used.
#[derive(Clone, Debug, PartialEq, Serialize, ToSchema)]
pub struct DistrustedView {
    /// What it measures.
    pub role: String,
    /// Source of its readings.
    pub source: String,
    /// Its name there.
    pub tag: String,
    /// Code of why.
    pub reason: String,
    /// The same in words; where a TMP is wrong, any of its pressures may be to blame.
    pub detail: String,
}

/// What a train's answer is worked from.
pub struct TrainCase<'a> {
    /// The plant.
    pub plant: &'a Plant,
    /// The train.
    pub site: &'a Site<'a>,
    /// What stands; `None` before its first hour of data.
    pub standing: Option<&'a Standing>,
    /// Its open recommendations.
    pub open: &'a [Recommendation],
    /// What it is doing by its newest readings; `None` without any.
    pub now: Option<&'a Now>,
    /// The wall clock.
    pub wall: Instant,
    /// Beyond this age of the newest reading there is no advice.
    pub stale_after_us: i64,
    /// State codes that the plant file does not name.
    pub unknown_codes: &'a [String],
}

impl TrainCase<'_> {
    /// The newest reading that is known of.
    pub(super) fn newest(&self) -> Option<Instant> {
        self.now.map(|n| n.newest).or(self.standing.map(|s| s.as_of))
    }
    /// Age of the newest reading; a reading a little ahead of the clock has none.
    pub(super) fn age_us(&self) -> Option<i64> {
        self.newest().map(|t| self.wall.since(t).max(0))
    }
    /// Whether the data are too old to advise on.
    pub(super) fn is_stale(&self) -> bool {
        self.age_us().is_none_or(|age| age > self.stale_after_us)
    }
}

/// A train as it is shown.
pub fn train_view(units: &Units, case: &TrainCase) -> TrainView {
    let train = case.site.train;
    TrainView {
        id: train.id.to_string(),
        name: train.name.clone(),
        asset: train.asset.clone(),
        standing: standing_view(units, case),
    }
}

fn standing_view(units: &Units, case: &TrainCase) -> StandingView {
    let zone = &case.plant.zone;
    let binding = case.standing.and_then(Standing::binding);
    let advice = match sentence::advice(case) {
        Advice::Open(r) => r.action.code(),
        Advice::NoCleanNeeded => "no_clean_needed",
        Advice::CannotAdvise => "cannot_advise",
    };
    StandingView {
        state: phase_code(case.now.map_or(Phase::Unknown, |n| n.phase)).to_owned(),
        since: PlantTime::optional(zone, case.now.map(|n| n.since)),
        loss: case.standing.and_then(|s| loss_view(units, case, s)),
        limits: LimitsView {
            permeability_loss_advisory: limit_view(units, case, LimitKind::LossAdvisory),
            permeability_loss_clean: limit_view(units, case, LimitKind::LossClean),
            tmp_advisory: limit_view(units, case, LimitKind::TmpAdvisory),
            tmp_clean: limit_view(units, case, LimitKind::TmpClean),
        },
        binding: binding.map(|(kind, _)| kind.code().to_owned()),
        advice: advice.to_owned(),
        distrusted: distrusted(case),
        unknown_state_codes: case.unknown_codes.to_vec(),
        data_age: case.age_us().map(duration_text),
        stale: case.is_stale(),
        as_of: PlantTime::optional(zone, case.newest()),
        sentence: sentence::sentence(units, case),
    }
}

fn loss_view(units: &Units, case: &TrainCase, standing: &Standing) -> Option<LossView> {
    let (loss, baseline) = (standing.loss?, standing.baseline?);
    Some(LossView {
        value: units.share.value(loss.share),
        unit: units.share.unit.to_owned(),
        unit_label: units.share.label.to_owned(),
        baseline: baseline.kind.code().to_owned(),
        interval: units.share.interval(loss.low, loss.high),
        at: PlantTime::new(&case.plant.zone, loss.hour),
    })
}

/// How a limit is shown.
pub(super) const fn shown(units: &Units, kind: LimitKind) -> &Shown {
    if kind.is_tmp() { &units.tmp } else { &units.share }
}

fn limit_view(units: &Units, case: &TrainCase, kind: LimitKind) -> Option<LimitView> {
    let limit = kind.value(&case.site.train.limits)?;
    let zone = &case.plant.zone;
    let standing = case.standing;
    let shown = shown(units, kind);
    let value = standing.and_then(|s| reading(s, kind));
    let hold = standing.map(|s| s.hold(kind)).unwrap_or_default();
    let dates = standing.and_then(|s| s.dates_of(kind)).unwrap_or_default();
    Some(LimitView {
        limit: shown.value(limit),
        unit: shown.unit.to_owned(),
        unit_label: shown.label.to_owned(),
        value: shown.optional(value),
        exceeded_since: PlantTime::optional(zone, hold.since),
        held_since: PlantTime::optional(zone, hold.held),
        p10: PlantTime::optional(zone, dates.p10),
        p50: PlantTime::optional(zone, dates.p50),
        p90: PlantTime::optional(zone, dates.p90),
    })
}

/// What is held against a limit now.
pub(super) fn reading(standing: &Standing, kind: LimitKind) -> Option<f64> {
    if kind.is_tmp() { standing.end_tmp_pa.map(|(p, _)| p) } else { standing.loss.map(|l| l.share) }
}

/// Instruments that the troubles of the last day point to. A reason that tells nothing of an
/// instrument points to none.
fn distrusted(case: &TrainCase) -> Vec<DistrustedView> {
    let Some(standing) = case.standing else { return Vec::new() };
    let mut out = Vec::new();
    for reason in &standing.troubles {
        for role in suspects(*reason) {
            let dated = case.site.train.signals_of(*role).filter(|s| s.from <= standing.as_of);
            if let Some(signal) = dated.last() {
                out.push(DistrustedView {
                    role: role_code(*role).to_owned(),
                    source: signal.source.to_string(),
                    tag: signal.tag.to_string(),
                    reason: reason.code().to_owned(),
                    detail: reason_words(*reason).to_owned(),
                });
            }
        }
    }
    out
}

const fn suspects(reason: Reason) -> &'static [Role] {
    match reason {
        Reason::NoFlow => &[Role::PermeateFlow],
        Reason::NoPressure | Reason::TmpUnderFloor => {
            &[Role::FeedPressure, Role::PermeatePressure, Role::TransmembranePressure]
        }
        Reason::Frozen => &[
            Role::PermeateFlow,
            Role::FeedPressure,
            Role::PermeatePressure,
            Role::TransmembranePressure,
        ],
        Reason::NoTemperature | Reason::TemperatureOutOfRange => &[Role::Temperature],
        Reason::UnknownState => &[Role::State],
        _ => &[],
    }
}

/// Where a train comes in a list ordered by when it must be clean: limits that have held first,
/// then by the early date of the limit that binds, trains without a date last.
pub fn clean_by_order(standing: Option<&Standing>) -> Instant {
    let far = Instant::from_micros(i64::MAX);
    let Some(s) = standing else { return far };
    let held = LimitKind::ALL.iter().any(|k| k.is_clean() && s.hold(*k).held.is_some());
    if held {
        return Instant::from_micros(i64::MIN);
    }
    s.binding().and_then(|(_, d)| d.p10).unwrap_or(far)
}

#[cfg(test)]
mod tests;
