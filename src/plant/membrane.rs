//! The membrane's own limits, which no procedure exceeds.

use super::model::{MembraneLimits, Step, StepClass};
use super::read::strength_mg_l;

/// What of a step lies beyond the membrane's limits, in words.
pub fn beyond(step: &Step, limits: &MembraneLimits) -> Vec<String> {
    let mut found = Vec::new();
    if let (Some(ph), Some((low, high))) = (step.ph, limits.ph)
        && (ph < low || ph > high)
    {
        found.push(format!("pH {ph} is outside the membrane's {low} to {high}"));
    }
    if let (Some(t), Some(max)) = (step.temperature_degc, limits.temperature_degc)
        && t > max + 1e-9
    {
        let (t, max) = ((t * 10.0).round() / 10.0, (max * 10.0).round() / 10.0);
        found.push(format!("{t} °C is above the membrane's {max} °C"));
    }
    let strength = step.concentration.as_deref().and_then(|c| strength_mg_l(c).ok());
    if let (Some(c), Some(max)) = (strength, limits.free_chlorine_mg_l)
        && step.class == StepClass::Hypochlorite
        && c > max * (1.0 + 1e-9)
    {
        let c = c.round();
        found.push(format!("{c} mg/L free chlorine is above the membrane's {max} mg/L"));
    }
    found
}

/// The step held to the membrane's limits, and whether that changed it.
pub fn within(step: &Step, limits: &MembraneLimits) -> (Step, bool) {
    let mut held = step.clone();
    if let (Some(ph), Some((low, high))) = (step.ph, limits.ph) {
        held.ph = Some(ph.clamp(low, high));
    }
    if let (Some(t), Some(max)) = (step.temperature_degc, limits.temperature_degc) {
        held.temperature_degc = Some(t.min(max));
    }
    let strength = step.concentration.as_deref().and_then(|c| strength_mg_l(c).ok());
    if let (Some(c), Some(max)) = (strength, limits.free_chlorine_mg_l)
        && step.class == StepClass::Hypochlorite
        && c > max
    {
        held.concentration = Some(format!("{max} mg/L"));
    }
    let changed = held != *step;
    (held, changed)
}
