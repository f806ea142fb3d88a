//! A step of a clean, planned or done. Quantities are texts with their unit, as a clean is
//! posted, so that what was read can be posted again.

use serde::Serialize;
use utoipa::ToSchema;

use super::reason::step_class_code;
use super::time::duration_text;
use super::units::Units;
use crate::plant::{Step, VerifiedRinse};

/// A step of a clean. What was not stated is left out.
#[derive(Clone, Debug, Default, PartialEq, Serialize, ToSchema)]
pub struct StepView {
    /// Class of chemical.
    pub class: String,
    /// The chemical as the site calls it.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub chemical: Option<String>,
    /// Concentration with its unit, as stated.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub concentration: Option<String>,
    /// pH.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub ph: Option<f64>,
    /// Temperature with its unit.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub temperature: Option<String>,
    /// How long, ISO 8601.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub duration: Option<String>,
    /// Volume of solution with its unit.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub volume: Option<String>,
    /// The check at the end of a rinse.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub verified: Option<VerifiedView>,
    /// Why the step is there.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub why: Option<String>,
}

/// The check at the end of a rinse: a number that was read, or a range that passes.
#[derive(Clone, Debug, Default, PartialEq, Serialize, ToSchema)]
pub struct VerifiedView {
    /// pH read.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub ph: Option<f64>,
    /// Lowest and highest pH that pass.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub ph_range: Option<[f64; 2]>,
    /// Free chlorine read, with its unit.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub free_chlorine: Option<String>,
    /// Highest free chlorine that passes, with its unit.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub free_chlorine_max: Option<String>,
    /// Who read them.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub by: Option<String>,
}

/// A step as it is shown.
pub fn step_view(units: &Units, step: &Step) -> StepView {
    StepView {
        class: step_class_code(step.class).to_owned(),
        chemical: step.chemical.clone(),
        concentration: step.concentration.clone(),
        ph: step.ph,
        temperature: step.temperature_degc.map(|t| units.temperature.text(t)),
        duration: step.duration_us.map(duration_text),
        volume: step.volume_m3.map(|v| units.volume.text(v)),
        verified: step.verified.as_ref().map(verified),
        why: None,
    }
}

fn verified(v: &VerifiedRinse) -> VerifiedView {
    let chlorine = |mg_l: Option<f64>| mg_l.map(|c| format!("{c} mg/L"));
    VerifiedView {
        ph: v.ph,
        ph_range: v.ph_range.map(|(low, high)| [low, high]),
        free_chlorine: chlorine(v.free_chlorine_mg_l),
        free_chlorine_max: chlorine(v.free_chlorine_max_mg_l),
        by: v.by.clone(),
    }
}

#[cfg(test)]
mod tests {
    use serde_json::json;

    use super::super::units::UnitSystem;
    use super::*;
    use crate::base::{Dimension, HOUR_US, parse_quantity};
    use crate::plant::StepClass;

    #[test]
    fn steps_are_shown_as_they_can_be_posted() {
        let step = Step {
            class: StepClass::Rinse,
            chemical: None,
            concentration: None,
            ph: Some(11.5),
            temperature_degc: Some(35.0),
            duration_us: Some(4 * HOUR_US),
            volume_m3: Some(12.0),
            verified: Some(VerifiedRinse {
                ph_range: Some((6.0, 9.0)),
                free_chlorine_max_mg_l: Some(0.5),
                ph: None,
                free_chlorine_mg_l: None,
                by: None,
            }),
        };
        let view = step_view(&Units::new(UnitSystem::Si), &step);
        assert_eq!(
            serde_json::to_value(&view).unwrap(),
            json!({"class": "rinse", "ph": 11.5, "temperature": "35 °C", "duration": "PT4H",
                   "volume": "12 m³", "verified": {"ph_range": [6.0, 9.0], "free_chlorine_max": "0.5 mg/L"}})
        );
        let us = step_view(&Units::new(UnitSystem::Us), &step);
        assert_eq!(us.temperature.as_deref(), Some("95 °F"));
        let back = parse_quantity(&us.temperature.unwrap(), Dimension::Temperature).unwrap();
        assert!((back.value_si - 35.0).abs() < 1e-9);
        let volume = parse_quantity(&us.volume.unwrap(), Dimension::Volume).unwrap();
        assert!((volume.value_si - 12.0).abs() < 0.01);
    }
}
