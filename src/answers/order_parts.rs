//! Parts of a work order as they are shown.

use serde::Serialize;
use utoipa::ToSchema;

use super::order_words::{note_words, sign_off_role_code};
use super::reason::why_words;
use super::step_view::{StepView, step_view};
use super::time::PlantTime;
use super::units::Units;
use crate::base::{Instant, Span, Zone};
use crate::orders::{Actuals, Annotation, PlannedStep, SignOff};
use crate::plant::{StepClass, VerifiedRinse};

/// When work is meant to be done.
#[derive(Clone, Debug, PartialEq, Serialize, ToSchema)]
pub struct WindowView {
    /// From.
    pub from: PlantTime,
    /// Up to.
    pub to: PlantTime,
}

impl WindowView {
    /// A window at a plant.
    pub(super) fn new(zone: &Zone, window: Span) -> Self {
        Self { from: PlantTime::new(zone, window.from), to: PlantTime::new(zone, window.to) }
    }
}

/// A step of a work order.
#[derive(Clone, Debug, PartialEq, Serialize, ToSchema)]
pub struct OrderStepView {
    /// The step.
    #[serde(flatten)]
    pub step: StepView,
    /// Active substance to make up the solution, where strength and volume are stated. The
    /// product weighs more: its strength is on its label.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub active: Option<String>,
    /// When a rinse is done, in words.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub check: Option<String>,
}

/// What was done, as people say.
#[derive(Clone, Debug, PartialEq, Serialize, ToSchema)]
pub struct ActualsView {
    /// From.
    pub start: PlantTime,
    /// Up to.
    pub end: PlantTime,
    /// The steps as done, rinses with their readings.
    pub steps: Vec<StepView>,
    /// Spent solution and rinse water.
    pub waste: Option<String>,
    /// Hours of work of all people together.
    pub staff_hours: Option<f64>,
    /// What else there is to say.
    pub notes: Option<String>,
}

/// An integrity test that somebody named when verifying.
#[derive(Clone, Debug, PartialEq, Serialize, ToSchema)]
pub struct IntegrityTestView {
    /// Whether the train passed.
    pub passed: bool,
    /// When it was tested.
    pub at: PlantTime,
    /// Who tested.
    pub by: String,
}

/// A person's word.
#[derive(Clone, Debug, PartialEq, Serialize, ToSchema)]
pub struct SignOffView {
    /// `operator`, `shift_engineer` or `process`.
    pub role: String,
    /// To what: `approve`, `start`, …
    pub act: String,
    /// Who.
    pub by: String,
    /// When, by the wall clock.
    pub at: PlantTime,
    /// What they said to it.
    pub note: Option<String>,
}

/// What happened around an order.
#[derive(Clone, Debug, PartialEq, Serialize, ToSchema)]
pub struct AnnotationView {
    /// When.
    pub at: PlantTime,
    /// What.
    pub detail: String,
}

/// Why an order was cancelled.
#[derive(Clone, Debug, PartialEq, Serialize, ToSchema)]
pub struct CancelledView {
    /// `person`, `no_longer_holds`, `declined` or `cleaned_unconfirmed`.
    pub why: String,
    /// In words; a person's own where one cancelled it.
    pub detail: String,
}

/// The order in the maintenance system.
#[derive(Clone, Debug, PartialEq, Serialize, ToSchema)]
pub struct ExternalView {
    /// Which system.
    pub system: String,
    /// Its number there.
    pub number: String,
    /// Where to see it.
    pub url: Option<String>,
}

pub(super) fn order_step(units: &Units, planned: &PlannedStep) -> OrderStepView {
    let step = &planned.step;
    OrderStepView {
        step: StepView {
            why: planned.why.map(|w| why_words(w).to_owned()),
            ..step_view(units, step)
        },
        active: planned.active_kg.map(|kg| units.mass.text(kg)),
        check: step
            .verified
            .as_ref()
            .filter(|_| step.class == StepClass::Rinse)
            .and_then(check_words),
    }
}

/// When a rinse is done: what it is measured by, and that somebody signs the readings.
fn check_words(check: &VerifiedRinse) -> Option<String> {
    let ph = check.ph_range.map(|(low, high)| format!("pH reads {low} to {high}"));
    let chlorine =
        check.free_chlorine_max_mg_l.map(|max| format!("free chlorine at most {max} mg/L"));
    let until = ph.into_iter().chain(chlorine).reduce(|a, b| format!("{a} and {b}"))?;
    Some(format!("Rinse until {until}; write down what was read and who read it."))
}

pub(super) fn actuals_view(zone: &Zone, units: &Units, done: &Actuals) -> ActualsView {
    ActualsView {
        start: PlantTime::new(zone, done.start),
        end: PlantTime::new(zone, done.end),
        steps: done.steps.iter().map(|s| step_view(units, s)).collect(),
        waste: done.waste_m3.map(|v| units.volume.text(v)),
        staff_hours: done.staff_hours,
        notes: done.notes.clone(),
    }
}

pub(super) fn sign_off_view(zone: &Zone, s: &SignOff) -> SignOffView {
    SignOffView {
        role: sign_off_role_code(s.role).to_owned(),
        act: s.act.code().to_owned(),
        by: s.by.clone(),
        at: PlantTime::new(zone, s.at),
        note: s.note.clone(),
    }
}

pub(super) fn annotation_view(zone: &Zone, a: &Annotation, near: Instant) -> AnnotationView {
    AnnotationView { at: PlantTime::new(zone, a.at), detail: note_words(zone, &a.note, near) }
}
