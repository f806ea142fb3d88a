//! A recommendation: what to do, by when, on what evidence.

use serde::Serialize;
use utoipa::ToSchema;

use super::reason::{
    baseline_words, caution_words, clears_when_words, closed_why_code, closed_why_words,
    finding_words, reasons_words, verdict_words, why_words,
};
use super::step_view::{StepView, step_view};
use super::time::{PlantTime, dates_words, moment_words};
use super::units::{Shown, Units};
use crate::advice::{Act, Recommendation, StepsFrom, cautions};
use crate::analysis::{Dates, Evidence, FindingKind, LimitKind, Measure};
use crate::base::Zone;
use crate::orders::spoken;
use crate::plant::{Plant, Train};

/// A recommendation.
#[derive(Clone, Debug, PartialEq, Serialize, ToSchema)]
pub struct RecommendationView {
    /// Its id.
    pub id: String,
    /// Whose.
    pub train: String,
    /// What to do: `clean_in_place`, `maintenance_clean`, `backwash_more_often`, `reduce_flux`,
    /// `raise_cross_flow`, `bleed_more`, `inspect`, `check_instrument`, `integrity_test`,
    /// `take_out_of_service` or `capacity_warning`.
    pub action: String,
    /// `open` or `closed`.
    pub state: String,
    /// `this_shift`, `this_week` or `next_slot`.
    pub urgency: String,
    /// Data time at which it was raised.
    pub raised: PlantTime,
    /// Data time of the last look.
    pub as_of: PlantTime,
    /// Dates of the limit that binds; null where it is not about one.
    pub clean_by: Option<DatesView>,
    /// Latest start: P10 less the hours of a clean and its notice.
    pub start_by: Option<PlantTime>,
    /// On what evidence.
    pub evidence: Vec<EvidenceView>,
    /// What clears it.
    pub clears_when: String,
    /// What to clean with, in order.
    pub steps: Vec<StepView>,
    /// Where the steps come from: `site_procedure`, `general_practice` (classes only) or `none`.
    pub steps_from: String,
    /// What to mind.
    pub cautions: Vec<String>,
    /// Its work order, speakable.
    pub work_order: Option<String>,
    /// What people said to it, in order.
    pub decisions: Vec<DecisionView>,
    /// Silent until then.
    pub silent_until: Option<PlantTime>,
    /// When and why it was closed; null while open.
    pub closed: Option<ClosedView>,
}

/// Dates of a limit; null where it is not reached within 180 days at that likelihood.
#[derive(Clone, Debug, PartialEq, Serialize, ToSchema)]
pub struct DatesView {
    /// One chance in ten that it is reached before.
    pub p10: Option<PlantTime>,
    /// As likely before as after.
    pub p50: Option<PlantTime>,
    /// Nine chances in ten that it is reached before.
    pub p90: Option<PlantTime>,
}

impl DatesView {
    /// Dates at a plant.
    pub fn new(zone: &Zone, dates: &Dates) -> Self {
        Self {
            p10: PlantTime::optional(zone, dates.p10),
            p50: PlantTime::optional(zone, dates.p50),
            p90: PlantTime::optional(zone, dates.p90),
        }
    }
}

/// What a recommendation stands on.
#[derive(Clone, Debug, PartialEq, Serialize, ToSchema)]
pub struct EvidenceView {
    /// Kind of finding: `permeability_loss`, `tmp_high`, `permeability_limit_ahead`,
    /// `tmp_limit_ahead`, `clean_verdict` or `cannot_normalise`.
    pub finding: String,
    /// What was read.
    pub value: Option<f64>,
    /// UCUM code.
    pub unit: String,
    /// For people.
    pub unit_label: String,
    /// The limit, in the same unit.
    pub limit: Option<f64>,
    /// The baseline it is held against.
    pub baseline: Option<String>,
    /// First moment of the data it stands on.
    pub from: PlantTime,
    /// End of them.
    pub to: PlantTime,
    /// In words.
    pub detail: String,
}

/// What a person said to a recommendation.
#[derive(Clone, Debug, PartialEq, Serialize, ToSchema)]
pub struct DecisionView {
    /// `accept`, `defer` or `decline`.
    pub act: String,
    /// Who.
    pub by: String,
    /// When, by the wall clock.
    pub at: PlantTime,
    /// Why.
    pub reason: String,
    /// Until when, for a deferral.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub until: Option<PlantTime>,
}

/// When and why a recommendation was closed.
#[derive(Clone, Debug, PartialEq, Serialize, ToSchema)]
pub struct ClosedView {
    /// When.
    pub at: PlantTime,
    /// `cleaned`, `no_longer_holds` or `declined`.
    pub why: String,
    /// In words.
    pub detail: String,
}

/// A recommendation as it is shown. `train` is its train, for the cautions.
pub fn recommendation_view(
    plant: &Plant,
    train: &Train,
    units: &Units,
    r: &Recommendation,
) -> RecommendationView {
    let zone = &plant.zone;
    let steps = r
        .steps
        .iter()
        .map(|s| StepView { why: Some(why_words(s.why).to_owned()), ..step_view(units, &s.step) });
    RecommendationView {
        id: r.id.clone(),
        train: r.train.to_string(),
        action: r.action.code().to_owned(),
        state: if r.is_open() { "open" } else { "closed" }.to_owned(),
        urgency: r.urgency.code().to_owned(),
        raised: PlantTime::new(zone, r.raised),
        as_of: PlantTime::new(zone, r.as_of),
        clean_by: r.clean_by.as_ref().map(|d| DatesView::new(zone, d)),
        start_by: PlantTime::optional(zone, r.start_by),
        evidence: r.evidence.iter().map(|e| evidence_view(zone, units, e)).collect(),
        clears_when: clears_when_words(r.clears_when).to_owned(),
        steps: steps.collect(),
        steps_from: match r.steps_from {
            StepsFrom::SiteProcedure => "site_procedure",
            StepsFrom::GeneralPractice => "general_practice",
            StepsFrom::None => "none",
        }
        .to_owned(),
        cautions: cautions(train, &r.steps).iter().map(|c| caution_words(*c).to_owned()).collect(),
        work_order: r.work_order.map(spoken),
        decisions: r
            .decisions
            .iter()
            .map(|d| DecisionView {
                act: act_code(d.act).to_owned(),
                by: d.by.clone(),
                at: PlantTime::new(zone, d.at),
                reason: d.reason.clone(),
                until: PlantTime::optional(zone, d.until),
            })
            .collect(),
        silent_until: PlantTime::optional(zone, r.silent_until),
        closed: r.closed.map(|c| ClosedView {
            at: PlantTime::new(zone, c.at),
            why: closed_why_code(c.why).to_owned(),
            detail: closed_why_words(c.why).to_owned(),
        }),
    }
}

const fn act_code(act: Act) -> &'static str {
    match act {
        Act::Accept => "accept",
        Act::Defer => "defer",
        Act::Decline => "decline",
    }
}

/// Evidence as it is shown.
pub fn evidence_view(zone: &Zone, units: &Units, e: &Evidence) -> EvidenceView {
    let (value, limit, unit, label) = match shown(units, e.measure) {
        Some(s) => (s.value(e.value), s.optional(e.limit), s.unit, s.label),
        None => (Some(e.value), e.limit, "1", ""),
    };
    EvidenceView {
        finding: e.finding.code().to_owned(),
        value,
        unit: unit.to_owned(),
        unit_label: label.to_owned(),
        limit,
        baseline: e.baseline.map(|b| b.code().to_owned()),
        from: PlantTime::new(zone, e.from),
        to: PlantTime::new(zone, e.to),
        detail: detail(zone, units, e),
    }
}

const fn shown(units: &Units, measure: Measure) -> Option<&Shown> {
    match measure {
        Measure::Share => Some(&units.share),
        Measure::Pressure => Some(&units.tmp),
        Measure::Count => None,
    }
}

fn coming(zone: &Zone, e: &Evidence) -> String {
    e.dates.map_or_else(|| "no date".to_owned(), |d| dates_words(zone, &d, e.to, e.to))
}

/// Evidence in words.
fn detail(zone: &Zone, units: &Units, e: &Evidence) -> String {
    let text = |v: f64| shown(units, e.measure).map_or_else(|| v.to_string(), |s| s.text(v));
    let value = text(e.value);
    let limit = e.limit.map_or_else(|| "not set".to_owned(), text);
    let name = if e.limit_kind.is_some_and(LimitKind::is_clean) { "clean" } else { "advisory" };
    let against = e.baseline.map_or("its baseline", baseline_words);
    match e.finding {
        FindingKind::PermeabilityLoss => format!(
            "Permeability at the start of a cycle has lost {value} against {against}; it has been \
             past the {name} limit of {limit} since {}.",
            moment_words(zone, e.from, e.to)
        ),
        FindingKind::TmpHigh => format!(
            "TMP at the end of a cycle is {value}; it has been past the {name} limit of {limit} \
             since {}.",
            moment_words(zone, e.from, e.to)
        ),
        FindingKind::PermeabilityLimitAhead => format!(
            "Permeability at the start of a cycle has lost {value} against {against}; the {name} \
             limit of {limit}: {}.",
            coming(zone, e)
        ),
        FindingKind::TmpLimitAhead => format!(
            "TMP at the end of a cycle is {value}; the {name} limit of {limit}: {}.",
            coming(zone, e)
        ),
        FindingKind::CleanVerdict => format!(
            "After the last clean, permeability reached {value} of {against}. {}",
            e.verdict.map_or("", verdict_words)
        ),
        FindingKind::CannotNormalise => {
            let words = finding_words(e.finding).trim_end_matches('.');
            format!("{words} in the last day: {}", reasons_words(&e.reasons))
        }
    }
}

#[cfg(test)]
mod tests;
