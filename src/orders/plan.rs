//! The plan of an order: rinses that it needs, quantities, and whether it may be approved.

use crate::advice::{AdvisedStep, Why};
use crate::plant::{Step, StepClass, Train, VerifiedRinse, rinse_separates, strength_mg_l};

use super::chemistry::{LastChemical, classes, left, planned};
use super::order::PlannedStep;
use super::refusal::{Refusal, RefusalWhy};

/// Checks of a rinse that the service adds itself (common practice, no source; inside what the
/// chemistry asks).
const RINSE_CHECK: VerifiedRinse = VerifiedRinse {
    ph_range: Some((6.0, 9.0)),
    free_chlorine_max_mg_l: Some(0.5),
    ph: None,
    free_chlorine_mg_l: None,
    by: None,
};

/// Mass of active substance in a step's solution, kg; `None` unless strength and volume are
/// both stated.
pub fn active_kg(step: &Step) -> Option<f64> {
    if step.class == StepClass::Rinse {
        return None;
    }
    Some(strength_mg_l(step.concentration.as_deref()?).ok()? * step.volume_m3? / 1e3)
}

/// Adds what an advised list needs: checks to rinses that have none, a rinse in front where the
/// train's last chemical must not meet the plan, one at the end where something would be left.
/// Checks that a site's procedure leaves out are the site's to add, not ours.
pub(super) fn with_rinses(
    advised: &[AdvisedStep],
    last: Option<&LastChemical>,
) -> Vec<PlannedStep> {
    let mut steps: Vec<AdvisedStep> = advised.to_vec();
    for s in &mut steps {
        if s.step.class == StepClass::Rinse && s.why != Why::SiteProcedure {
            s.step.verified.get_or_insert(RINSE_CHECK);
        }
    }
    let plain =
        |steps: &[AdvisedStep]| -> Vec<Step> { steps.iter().map(|s| s.step.clone()).collect() };
    if planned(&plain(&steps), last).iter().any(|c| c.from_step.is_none()) {
        steps.insert(0, AdvisedStep { step: rinse(), why: Why::KeepsApart });
    }
    if !left_behind(&plain(&steps)).is_empty() {
        steps.push(AdvisedStep { step: rinse(), why: Why::BeforeReturn });
    }
    steps.into_iter().map(|s| planned_step(s.step, Some(s.why))).collect()
}

/// A step with its quantity.
pub(super) fn planned_step(step: Step, why: Option<Why>) -> PlannedStep {
    PlannedStep { active_kg: active_kg(&step), step, why }
}

fn rinse() -> Step {
    Step {
        class: StepClass::Rinse,
        chemical: None,
        concentration: None,
        ph: None,
        temperature_degc: None,
        duration_us: None,
        volume_m3: None,
        verified: Some(RINSE_CHECK),
    }
}

/// Classes that the plan itself leaves in the train.
fn left_behind(steps: &[Step]) -> Vec<StepClass> {
    left(steps, None, &|k, a, b| steps.get(k).is_some_and(|s| rinse_separates(s, a, b)))
}

/// Whether a plan may be approved: it names a chemical, what must not meet is kept apart by
/// rinses with checks, the train's last chemical included, nothing is left at the end, and no
/// step goes beyond the membrane's limits.
///
/// # Errors
/// The first thing that is wrong, with the step that it is about.
pub fn check(steps: &[Step], train: &Train, last: Option<&LastChemical>) -> Result<(), Refusal> {
    if steps.iter().flat_map(classes).all(|c| c == StepClass::Rinse) {
        return Err(Refusal::new("/steps", RefusalWhy::NothingPlanned));
    }
    if let Some(conflict) = planned(steps, last).into_iter().next() {
        let pointer = format!("/steps/{}", conflict.at_step);
        return Err(Refusal::new(pointer, RefusalWhy::Conflict(conflict)));
    }
    if let Some(class) = left_behind(steps).first() {
        let pointer = format!("/steps/{}", steps.len() - 1);
        return Err(Refusal::new(pointer, RefusalWhy::NotRinsed(*class)));
    }
    for (k, step) in steps.iter().enumerate() {
        if let Some((field, why)) = beyond_membrane(step, train) {
            return Err(Refusal::new(format!("/steps/{k}/{field}"), why));
        }
    }
    Ok(())
}

fn beyond_membrane(step: &Step, train: &Train) -> Option<(&'static str, RefusalWhy)> {
    let limits = train.membrane_limits?;
    if let (Some(value), Some((low, high))) = (step.ph, limits.ph)
        && !(low..=high).contains(&value)
    {
        return Some(("ph", RefusalWhy::PhBeyondMembrane { value, low, high }));
    }
    if let (Some(value), Some(limit)) = (step.temperature_degc, limits.temperature_degc)
        && value > limit
    {
        return Some(("temperature", RefusalWhy::TemperatureBeyondMembrane { value, limit }));
    }
    let limit = limits.free_chlorine_mg_l?;
    let text = step.concentration.as_deref()?;
    if !classes(step).contains(&StepClass::Hypochlorite) {
        return None;
    }
    match strength_mg_l(text) {
        Err(_) => Some(("concentration", RefusalWhy::StrengthUnreadable)),
        Ok(value) if value > limit => {
            Some(("concentration", RefusalWhy::ChlorineBeyondMembrane { value, limit }))
        }
        Ok(_) => None,
    }
}
