//! The words of the plant file for the kinds of things in it.

use super::model::{Phase, PressureKind, Role, StepClass};
use crate::base::Dimension;

const ROLES: [(Role, &str, Option<Dimension>); 19] = [
    (Role::FeedPressure, "feed_pressure", Some(Dimension::Pressure)),
    (Role::PermeatePressure, "permeate_pressure", Some(Dimension::Pressure)),
    (Role::ConcentratePressure, "concentrate_pressure", Some(Dimension::Pressure)),
    (Role::TransmembranePressure, "transmembrane_pressure", Some(Dimension::Pressure)),
    (Role::PermeateFlow, "permeate_flow", Some(Dimension::Flow)),
    (Role::FeedFlow, "feed_flow", Some(Dimension::Flow)),
    (Role::FlowSetpoint, "flow_setpoint", Some(Dimension::Flow)),
    (Role::BackwashFlow, "backwash_flow", Some(Dimension::Flow)),
    (Role::RecirculationFlow, "recirculation_flow", Some(Dimension::Flow)),
    (Role::BleedFlow, "bleed_flow", Some(Dimension::Flow)),
    (Role::Temperature, "temperature", Some(Dimension::Temperature)),
    (Role::TankLevel, "tank_level", Some(Dimension::Length)),
    (Role::State, "state", None),
    (Role::FeedTurbidity, "feed_turbidity", Some(Dimension::Turbidity)),
    (Role::PermeateTurbidity, "permeate_turbidity", Some(Dimension::Turbidity)),
    (Role::FeedConcentration, "feed_concentration", Some(Dimension::Concentration)),
    (Role::PermeateConcentration, "permeate_concentration", Some(Dimension::Concentration)),
    (Role::RetentateConcentration, "retentate_concentration", Some(Dimension::Concentration)),
    (Role::IntegrityPressure, "integrity_pressure", Some(Dimension::Pressure)),
];

pub(super) const PHASES: [(&str, Phase); 11] = [
    ("filtration", Phase::Filtration),
    ("backwash", Phase::Backwash),
    ("chemical_backwash", Phase::ChemicalBackwash),
    ("maintenance_clean", Phase::MaintenanceClean),
    ("clean_in_place", Phase::CleanInPlace),
    ("integrity_test", Phase::IntegrityTest),
    ("standby", Phase::Standby),
    ("relaxation", Phase::Relaxation),
    ("flush", Phase::Flush),
    ("calibration", Phase::Calibration),
    ("out_of_service", Phase::OutOfService),
];

pub(super) const CLASSES: [(&str, StepClass); 8] = [
    ("hypochlorite", StepClass::Hypochlorite),
    ("alkali", StepClass::Alkali),
    ("acid", StepClass::Acid),
    ("peroxide", StepClass::Peroxide),
    ("reductant", StepClass::Reductant),
    ("detergent", StepClass::Detergent),
    ("rinse", StepClass::Rinse),
    ("other", StepClass::Other),
];

pub(super) const PRESSURES: [(&str, PressureKind); 3] = [
    ("gauge", PressureKind::Gauge),
    ("absolute", PressureKind::Absolute),
    ("vacuum", PressureKind::Vacuum),
];

impl Role {
    /// Every role, in the order in which a train's signals stand.
    pub fn all() -> impl Iterator<Item = Self> {
        ROLES.iter().map(|(role, _, _)| *role)
    }
    /// Its key under `[train.tags]`.
    pub fn word(self) -> &'static str {
        ROLES.iter().find(|(r, _, _)| *r == self).map_or("", |(_, word, _)| word)
    }
    /// Whether it is a pressure that has to be brought to gauge and to one elevation.
    pub fn is_referred_pressure(self) -> bool {
        matches!(
            self,
            Self::FeedPressure
                | Self::PermeatePressure
                | Self::ConcentratePressure
                | Self::IntegrityPressure
        )
    }
    /// What its tag measures; `None` for a state.
    pub fn dimension(self) -> Option<Dimension> {
        ROLES.iter().find(|(r, _, _)| *r == self).and_then(|(_, _, dimension)| *dimension)
    }
}

impl Phase {
    /// Its key in a state tag; `unknown` for what no key names.
    pub fn word(self) -> &'static str {
        PHASES.iter().find(|(_, p)| *p == self).map_or("unknown", |(word, _)| word)
    }
}

impl StepClass {
    /// Its word in a step.
    pub fn word(self) -> &'static str {
        CLASSES.iter().find(|(_, c)| *c == self).map_or("", |(word, _)| word)
    }
    /// The class of a word.
    pub fn parse(word: &str) -> Option<Self> {
        CLASSES.iter().find(|(w, _)| *w == word).map(|(_, class)| *class)
    }
}

impl PressureKind {
    /// Its word at a tag.
    pub fn word(self) -> &'static str {
        PRESSURES.iter().find(|(_, p)| *p == self).map_or("", |(word, _)| word)
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn words_are_those_that_answers_serialise() {
        for (role, word, _) in ROLES {
            assert_eq!(serde_json::to_string(&role).unwrap(), format!("\"{word}\""));
        }
        for (word, phase) in PHASES {
            assert_eq!(serde_json::to_string(&phase).unwrap(), format!("\"{word}\""));
        }
        for (word, class) in CLASSES {
            assert_eq!(serde_json::to_string(&class).unwrap(), format!("\"{word}\""));
            assert_eq!(StepClass::parse(word), Some(class));
        }
    }
}
