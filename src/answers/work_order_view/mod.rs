//! A work order: what a crew can work from, and what became of it.

use serde::Serialize;
use utoipa::ToSchema;

use super::cleaning_view::{CleaningFigures, Worth, figures, told};
use super::order_parts::{
    ActualsView, AnnotationView, CancelledView, ExternalView, IntegrityTestView, OrderStepView,
    SignOffView, WindowView, actuals_view, annotation_view, order_step, sign_off_view,
};
use super::order_words::{
    cancelled_why_code, cancelled_why_words, criterion_words, hazard_words, isolation_words,
    permit_words, ppe_words, precondition_words, task_words,
};
use super::reason::{caution_words, phase_code};
use super::recommendation_view::{EvidenceView, evidence_view};
use super::time::{PlantTime, moment_words};
use super::units::Units;
use crate::advice::{AdvisedStep, Why, cautions};
use crate::analysis::Site;
use crate::base::Zone;
use crate::orders::{Outcome, PlannedStep, WorkOrder, spoken, transitions};

/// A work order.
#[derive(Clone, Debug, PartialEq, Serialize, ToSchema)]
pub struct WorkOrderView {
    /// Its number, speakable: `WO 41`.
    #[schema(example = "WO 41")]
    pub number: String,
    /// Whose.
    pub train: String,
    /// `draft`, `approved`, `scheduled`, `in_progress`, `waiting`, `done`, `verified`,
    /// `rejected` or `cancelled`.
    pub state: String,
    /// The maintenance system's number of the train.
    pub asset: Option<String>,
    /// Where to find it.
    pub location: String,
    /// `clean_in_place` or `maintenance_clean`.
    pub kind: String,
    /// What is to be done, and why now.
    pub task: String,
    /// Who asked for it by hand; null for one drafted by the service.
    pub requested_by: Option<String>,
    /// Why it was asked for by hand.
    pub request: Option<String>,
    /// When it was raised.
    pub raised: PlantTime,
    /// On what evidence.
    pub evidence: Vec<EvidenceView>,
    /// By when it is needed: the early date of the limit.
    pub needed_by: Option<PlantTime>,
    /// Latest start.
    pub start_by: Option<PlantTime>,
    /// When it is meant to be done.
    pub window: Option<WindowView>,
    /// Hours for which the train is out of service.
    pub hours_out: f64,
    /// What to do, in order, with quantities and the checks of rinses.
    pub steps: Vec<OrderStepView>,
    /// How the train is set apart before the first chemical.
    pub isolation: Vec<String>,
    /// What must be so before work starts.
    pub preconditions: Vec<String>,
    /// What can hurt.
    pub hazards: Vec<String>,
    /// What must be signed elsewhere.
    pub permits: Vec<String>,
    /// What protects people.
    pub ppe: Vec<String>,
    /// What to mind.
    pub cautions: Vec<String>,
    /// Revision of the site's procedure.
    pub procedure_revision: Option<String>,
    /// What it is accepted by.
    pub acceptance: Vec<String>,
    /// When work began.
    pub started: Option<PlantTime>,
    /// What was done.
    pub actuals: Option<ActualsView>,
    /// What it was worth: the computer's word. Null until it is known.
    pub result: Option<OrderResultView>,
    /// The test before return to service.
    pub integrity_test: Option<IntegrityTestView>,
    /// What people said, in order.
    pub sign_offs: Vec<SignOffView>,
    /// What happened around it.
    pub annotations: Vec<AnnotationView>,
    /// Why it was rejected.
    pub rejected_why: Option<String>,
    /// Why it was cancelled.
    pub cancelled: Option<CancelledView>,
    /// The recommendation it serves.
    pub recommendation: Option<String>,
    /// The cleaning that it became.
    pub cleaning: Option<String>,
    /// The order in the maintenance system.
    pub external: Option<ExternalView>,
    /// What can be done to it now: the last parts of paths, as `approve`.
    pub actions: Vec<String>,
}

/// What a clean was worth.
#[derive(Clone, Debug, PartialEq, Serialize, ToSchema)]
pub struct OrderResultView {
    /// `restored`, `partly_restored`, `not_restored`, `doubtful` or `cannot_tell_yet`.
    pub verdict: String,
    /// From when it is known.
    pub known: PlantTime,
    /// In words.
    pub detail: String,
    /// The figures behind it.
    pub figures: CleaningFigures,
}

/// A work order as it is shown. `site` is its train's.
pub fn work_order_view(zone: &Zone, site: &Site, units: &Units, o: &WorkOrder) -> WorkOrderView {
    fn words<T: Copy>(list: &[T], word: fn(T) -> &'static str) -> Vec<String> {
        list.iter().map(|item| word(*item).to_owned()).collect()
    }
    let near = o.raised;
    WorkOrderView {
        number: spoken(o.number),
        train: o.train.to_string(),
        state: o.state.code().to_owned(),
        asset: o.asset.clone(),
        location: o.location.clone(),
        kind: phase_code(o.task.phase()).to_owned(),
        task: task(zone, units, o),
        requested_by: o.requested_by.clone(),
        request: o.request.clone(),
        raised: PlantTime::new(zone, o.raised),
        evidence: o.evidence.iter().map(|e| evidence_view(zone, units, e)).collect(),
        needed_by: PlantTime::optional(zone, o.needed_by),
        start_by: PlantTime::optional(zone, o.start_by),
        window: o.window.map(|w| WindowView::new(zone, w)),
        hours_out: o.hours_out,
        steps: o.steps.iter().map(|s| order_step(units, s)).collect(),
        isolation: words(&o.safety.isolation, isolation_words),
        preconditions: words(&o.safety.preconditions, precondition_words),
        hazards: words(&o.safety.hazards, hazard_words),
        permits: words(&o.safety.permits, permit_words),
        ppe: words(&o.safety.ppe, ppe_words),
        cautions: words(&cautions(site.train, &advised(&o.steps)), caution_words),
        procedure_revision: o.procedure_revision.clone(),
        acceptance: words(&o.acceptance, criterion_words),
        started: PlantTime::optional(zone, o.started),
        actuals: o.actuals.as_ref().map(|a| actuals_view(zone, units, a)),
        result: o.outcome.as_ref().map(|r| result(zone, site, units, r)),
        integrity_test: o.integrity_test.as_ref().map(|t| IntegrityTestView {
            passed: t.passed,
            at: PlantTime::new(zone, t.at),
            by: t.by.clone(),
        }),
        sign_offs: o.sign_offs.iter().map(|s| sign_off_view(zone, s)).collect(),
        annotations: o.annotations.iter().map(|a| annotation_view(zone, a, near)).collect(),
        rejected_why: o.rejected_why.clone(),
        cancelled: o.cancelled_why.as_ref().map(|why| CancelledView {
            why: cancelled_why_code(why).to_owned(),
            detail: cancelled_why_words(why).to_owned(),
        }),
        recommendation: o.recommendation.clone(),
        cleaning: o.cleaning.clone(),
        external: o.external.as_ref().map(|e| ExternalView {
            system: e.system.clone(),
            number: e.number.clone(),
            url: e.url.clone(),
        }),
        actions: transitions(o.state).iter().map(|a| a.code().to_owned()).collect(),
    }
}

/// What is to be done, and why now.
fn task(zone: &Zone, units: &Units, o: &WorkOrder) -> String {
    let mut said = vec![task_words(o.task).to_owned()];
    if let Some(by) = &o.requested_by {
        match &o.request {
            Some(why) => said.push(format!("{by} asks for it: {why}")),
            None => said.push(format!("{by} asks for it.")),
        }
    }
    said.extend(o.evidence.iter().map(|e| evidence_view(zone, units, e).detail));
    match (o.needed_by, o.start_by) {
        (Some(by), Some(start)) => said.push(format!(
            "Needed by {}: start by {}.",
            moment_words(zone, by, o.raised),
            moment_words(zone, start, o.raised)
        )),
        (Some(by), None) => said.push(format!("Needed by {}.", moment_words(zone, by, o.raised))),
        _ => {}
    }
    said.join(" ")
}

fn advised(steps: &[PlannedStep]) -> Vec<AdvisedStep> {
    // The cautions look at the steps alone.
    let advised = |s: &PlannedStep| AdvisedStep {
        step: s.step.clone(),
        why: s.why.unwrap_or(Why::SiteProcedure),
    };
    steps.iter().map(advised).collect()
}

fn result(zone: &Zone, site: &Site, units: &Units, outcome: &Outcome) -> OrderResultView {
    let worth = Worth::from(outcome);
    OrderResultView {
        verdict: outcome.verdict.code().to_owned(),
        known: PlantTime::new(zone, outcome.known),
        detail: told(units, &worth),
        figures: figures(zone, site, units, &worth),
    }
}

#[cfg(test)]
mod tests;
