//! A clean: as a person recorded it or as the state of the train showed it, with the verdict and
//! the figures behind it.

use serde::Serialize;
use utoipa::ToSchema;

use super::reason::{phase_code, step_class_words, verdict_words};
use super::step_view::{StepView, step_view};
use super::time::{PlantTime, day_words};
use super::units::{UnitCodes, Units, unit_maps};
use crate::analysis::{Baseline, Level, Run, Site, Verdict, as_known};
use crate::base::{DAY_US, HOUR_US, Instant, TrainId, Zone};
use crate::orders::Outcome;
use crate::plant::{Phase, Step, classes_by_name};

/// A clean.
#[derive(Clone, Debug, PartialEq, Serialize, ToSchema)]
pub struct CleaningView {
    /// Its id.
    pub id: String,
    /// Whose.
    pub train: String,
    /// From.
    pub start: PlantTime,
    /// Up to.
    pub end: PlantTime,
    /// `clean_in_place`, `maintenance_clean` or `chemical_backwash`.
    pub kind: String,
    /// `recorded` by a person, or `inferred` from the state of the train.
    pub origin: String,
    /// What was done, in order.
    pub steps: Vec<StepView>,
    /// The work order it was done under.
    pub work_order: Option<String>,
    /// The client's own name for it.
    pub reference: Option<String>,
    /// When it was recorded.
    pub recorded: Option<PlantTime>,
    /// By whom.
    pub by: Option<String>,
    /// `restored`, `partly_restored`, `not_restored`, `doubtful` or `cannot_tell_yet`; null for
    /// a clean that is not judged.
    pub verdict: Option<String>,
    /// From when the verdict is known.
    pub known: Option<PlantTime>,
    /// When it can be told at the earliest, while it cannot.
    pub can_tell_from: Option<PlantTime>,
    /// The verdict in words, and what it stands on.
    pub detail: String,
    /// What does not fit in the record itself.
    #[serde(skip_serializing_if = "Vec::is_empty")]
    pub notes: Vec<String>,
    /// The figures behind it.
    pub figures: Option<CleaningFigures>,
}

/// The figures behind a verdict.
#[derive(Clone, Debug, PartialEq, Serialize, ToSchema)]
pub struct CleaningFigures {
    /// UCUM codes.
    pub units: UnitCodes,
    /// Their labels.
    pub unit_labels: UnitCodes,
    /// The last 24 hours of filtration before the clean.
    pub before: Option<LevelView>,
    /// 24 to 48 hours of filtration after it.
    pub after: Option<LevelView>,
    /// The permeability that "after" is held against.
    pub best: Option<f64>,
    /// Which that is.
    pub best_baseline: Option<String>,
    /// Permeability after over the best.
    pub restored: Option<f64>,
    /// Share of the added resistance that the clean took back.
    pub regained: Option<f64>,
    /// Whether before and after were read at like flux; where not, they compare poorly.
    pub like_flux: Option<bool>,
}

/// Start-of-cycle permeability over some hours of filtration.
#[derive(Clone, Debug, PartialEq, Serialize, ToSchema)]
pub struct LevelView {
    /// Median.
    pub permeability: Option<f64>,
    /// 95 % interval.
    pub interval: Option<[f64; 2]>,
    /// Median resistance.
    pub resistance: Option<f64>,
    /// Median flux.
    pub flux: Option<f64>,
    /// Median temperature.
    pub temperature: Option<f64>,
    /// Hours with a start of cycle.
    pub filtration_hours: u32,
    /// First hour used.
    pub from: PlantTime,
    /// End of the last hour used.
    pub to: PlantTime,
}

/// A clean as a person recorded it.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct RecordedCleaning<'a> {
    /// Its id.
    pub id: &'a str,
    /// Whose.
    pub train: &'a TrainId,
    /// From.
    pub start: Instant,
    /// Up to.
    pub end: Instant,
    /// `CleanInPlace`, `MaintenanceClean` or `ChemicalBackwash`.
    pub kind: Phase,
    /// What was done, in order.
    pub steps: &'a [Step],
    /// The work order it was done under.
    pub work_order: Option<&'a str>,
    /// The client's own name for it.
    pub reference: Option<&'a str>,
    /// When it was recorded.
    pub recorded: Instant,
    /// By whom.
    pub by: Option<&'a str>,
}

/// A recorded clean with the run that it began, if the analysis has met it.
pub fn recorded_cleaning(
    zone: &Zone,
    site: &Site,
    units: &Units,
    clean: &RecordedCleaning,
    run: Option<&Run>,
    as_of: Instant,
) -> CleaningView {
    let judged = match run {
        Some(run) => judged(zone, site, units, run, as_of),
        None if clean.kind == Phase::CleanInPlace => Judged::not_met(),
        None => Judged::never(),
    };
    CleaningView {
        id: clean.id.to_owned(),
        train: clean.train.to_string(),
        start: PlantTime::new(zone, clean.start),
        end: PlantTime::new(zone, clean.end),
        kind: phase_code(clean.kind).to_owned(),
        origin: "recorded".to_owned(),
        steps: clean.steps.iter().map(|s| step_view(units, s)).collect(),
        work_order: clean.work_order.map(str::to_owned),
        reference: clean.reference.map(str::to_owned),
        recorded: Some(PlantTime::new(zone, clean.recorded)),
        by: clean.by.map(str::to_owned),
        verdict: judged.verdict.map(|v| v.code().to_owned()),
        known: judged.known,
        can_tell_from: judged.can_tell_from,
        detail: judged.detail,
        notes: notes(clean.steps),
        figures: judged.figures,
    }
}

/// Chemicals whose names say another class than their steps do.
fn notes(steps: &[Step]) -> Vec<String> {
    let mut out = Vec::new();
    for (i, step) in steps.iter().enumerate() {
        let Some(name) = &step.chemical else { continue };
        let named = classes_by_name(name);
        if named.is_empty() || named.contains(&step.class) {
            continue;
        }
        let says: Vec<&str> = named.iter().map(|c| step_class_words(*c)).collect();
        out.push(format!(
            "Step {} is recorded as {}, and the name {name} says {}: both count.",
            i + 1,
            step_class_words(step.class),
            says.join(" and ")
        ));
    }
    out
}

/// The id of a clean that the state of the train showed: the train, and the start in UTC.
pub fn inferred_id(run: &Run) -> String {
    let start: String =
        run.clean_start.to_utc_text().chars().filter(|c| !matches!(c, '-' | ':')).collect();
    format!("{}-{start}", run.train)
}

/// A clean that the state of the train showed.
pub fn inferred_cleaning(
    zone: &Zone,
    site: &Site,
    units: &Units,
    run: &Run,
    as_of: Instant,
) -> CleaningView {
    let judged = judged(zone, site, units, run, as_of);
    CleaningView {
        id: inferred_id(run),
        train: run.train.to_string(),
        start: PlantTime::new(zone, run.clean_start),
        end: PlantTime::new(zone, run.start),
        kind: phase_code(Phase::CleanInPlace).to_owned(),
        origin: "inferred".to_owned(),
        steps: Vec::new(),
        work_order: None,
        reference: None,
        recorded: None,
        by: None,
        verdict: judged.verdict.map(|v| v.code().to_owned()),
        known: judged.known,
        can_tell_from: judged.can_tell_from,
        detail: format!(
            "{} The state of the train showed this clean; record what was done, if you know it.",
            judged.detail
        ),
        notes: Vec::new(),
        figures: judged.figures,
    }
}

/// A verdict with what goes with it.
struct Judged {
    verdict: Option<Verdict>,
    known: Option<PlantTime>,
    can_tell_from: Option<PlantTime>,
    detail: String,
    figures: Option<CleaningFigures>,
}

impl Judged {
    fn bare(verdict: Option<Verdict>, detail: &str) -> Self {
        let detail = detail.to_owned();
        Self { verdict, known: None, can_tell_from: None, detail, figures: None }
    }
    fn not_met() -> Self {
        Self::bare(
            Some(Verdict::CannotTellYet),
            "It cannot be told yet what the clean was worth: no readings after it have been worked.",
        )
    }
    fn never() -> Self {
        Self::bare(None, "Only cleans in place are judged.")
    }
}

fn judged(zone: &Zone, site: &Site, units: &Units, run: &Run, as_of: Instant) -> Judged {
    let run = &as_known(run, as_of);
    let known = PlantTime::optional(zone, run.verdict_known);
    let worth = Worth::from(run);
    let figures = Some(figures(zone, site, units, &worth));
    let verdict = Some(run.verdict);
    if run.verdict != Verdict::CannotTellYet {
        let detail = told(units, &worth);
        return Judged { verdict, known, can_tell_from: None, detail, figures };
    }
    if run.verdict_known.is_some() {
        let detail = "It cannot be told what the clean was worth: there is no earlier clean and no \
                      stated permeability to hold it against.";
        return Judged { known, figures, ..Judged::bare(verdict, detail) };
    }
    let from = earliest_verdict(zone, run, as_of);
    let detail = format!(
        "It cannot be told yet what the clean was worth: that needs 24 hours of filtration after \
         the return, at the earliest by the end of {}.",
        day_words(zone, from.plus(-1), as_of)
    );
    let can_tell_from = Some(PlantTime::new(zone, from));
    Judged { verdict, known: None, can_tell_from, detail, figures }
}

/// A verdict falls at the end of a plant day, after an hour of settling and 24 of filtration.
fn earliest_verdict(zone: &Zone, run: &Run, as_of: Instant) -> Instant {
    let enough = run.start.plus(HOUR_US + DAY_US).max(as_of);
    zone.day(enough.plus(-1)).to
}

/// What a clean was worth, by the run that it began or as an order keeps it.
pub(super) struct Worth {
    verdict: Verdict,
    before: Option<Level>,
    after: Option<Level>,
    best: Option<Baseline>,
    restored_share: Option<f64>,
    regained_share: Option<f64>,
    like_flux: Option<bool>,
}

impl From<&Run> for Worth {
    fn from(run: &Run) -> Self {
        Self {
            verdict: run.verdict,
            before: run.before,
            after: run.after,
            best: run.best,
            restored_share: run.restored_share(),
            regained_share: run.regained_share(),
            like_flux: run.like_flux(),
        }
    }
}

impl From<&Outcome> for Worth {
    fn from(o: &Outcome) -> Self {
        Self {
            verdict: o.verdict,
            before: o.before,
            after: o.after,
            best: o.best,
            restored_share: o.restored_share,
            regained_share: o.regained_share,
            like_flux: o.like_flux,
        }
    }
}

/// The verdict in words with its numbers.
pub(super) fn told(units: &Units, worth: &Worth) -> String {
    let mut detail = verdict_words(worth.verdict).to_owned();
    let share = worth.restored_share.map(|s| units.share.text(s));
    let regained = worth.regained_share.map(|s| units.share.text(s));
    match (share, regained) {
        (Some(s), Some(r)) => {
            detail
                .push_str(&format!(" It reached {s}, and took back {r} of the added resistance."));
        }
        (Some(s), None) => detail.push_str(&format!(" It reached {s}.")),
        _ => {}
    }
    if worth.like_flux == Some(false) {
        detail
            .push_str(" Flux before and after differs by more than 15 %, so they compare poorly.");
    }
    detail
}

/// The figures behind a verdict.
pub(super) fn figures(zone: &Zone, site: &Site, units: &Units, worth: &Worth) -> CleaningFigures {
    let (codes, labels) = unit_maps(&[
        ("permeability", &units.permeability),
        ("best", &units.permeability),
        ("resistance", &units.resistance),
        ("flux", &units.flux),
        ("temperature", &units.temperature),
        ("restored", &units.share),
        ("regained", &units.share),
    ]);
    let view = |l: Level| level(zone, site, units, &l);
    let best = worth.best.map(|b| site.permeability(b.resistance_1_m));
    CleaningFigures {
        units: codes,
        unit_labels: labels,
        before: worth.before.map(view),
        after: worth.after.map(view),
        best: units.permeability.optional(best),
        best_baseline: worth.best.map(|b| b.kind.code().to_owned()),
        restored: units.share.optional(worth.restored_share),
        regained: units.share.optional(worth.regained_share),
        like_flux: worth.like_flux,
    }
}

fn level(zone: &Zone, site: &Site, units: &Units, l: &Level) -> LevelView {
    let at = |r: f64| site.permeability(r);
    let (r, half) = (l.resistance_1_m, l.half_width_1_m);
    LevelView {
        permeability: units.permeability.value(at(r)),
        interval: units.permeability.interval(at(r + half), at(r - half)),
        resistance: units.resistance.value(r),
        flux: units.flux.value(l.flux_m_s),
        temperature: units.temperature.value(l.temperature_degc),
        filtration_hours: l.hours,
        from: PlantTime::new(zone, l.from),
        to: PlantTime::new(zone, l.to),
    }
}

#[cfg(test)]
mod tests;
