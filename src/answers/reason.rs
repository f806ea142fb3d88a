//! Words for what lower floors only name: one sentence each, for an operator at night. Phrases
//! that are set into a sentence have neither capital nor stop.

use crate::advice::{Action, Caution, ClearsWhen, ClosedWhy, Urgency, Why};
use crate::analysis::{BaselineKind, FindingKind, NoDates, Reason, Verdict};
use crate::plant::{Phase, Role, StepClass};

/// Why a number is missing, widened or left out.
pub const fn reason_words(reason: Reason) -> &'static str {
    match reason {
        Reason::NoFlow => "There is no usable reading of permeate flow.",
        Reason::NoPressure => "There is no usable reading of a pressure.",
        Reason::NoTemperature => "There is no usable reading of temperature.",
        Reason::TemperatureOutOfRange => {
            "The temperature read is outside the range for which the viscosity of water is known."
        }
        Reason::TmpUnderFloor => "TMP is below the floor under which it is not believed.",
        Reason::Frozen => "A reading of flow or pressure did not move through a backwash.",
        Reason::UnsteadyFlow => "Flow wandered by more than 5 %.",
        Reason::JustStarted => "Filtration had only just started.",
        Reason::UnknownState => {
            "The state of the train reads a code that the plant file does not name, or nothing."
        }
        Reason::Gap => "Readings are missing for more than ten minutes.",
        Reason::StartNotSeen => "The start of the cycle was not seen.",
        Reason::NoBackwashBefore => "No backwash came before the cycle.",
        Reason::ShortCycle => "The cycle was shorter than eight minutes.",
        Reason::FewReadings => "Minutes 2 to 8 of the cycle hold fewer than three steady readings.",
        Reason::Coarse => {
            "No start of a cycle could be told; a plain median stands in, with a wider interval."
        }
        Reason::CutAtMidnight => {
            "Filtration ran on over midnight without a backwash; the cycle was cut there."
        }
        Reason::LowCoverage => "Less than half the readings of filtration could be used.",
    }
}

/// Several reasons, one sentence after the other.
pub fn reasons_words(reasons: &[Reason]) -> String {
    reasons.iter().map(|r| reason_words(*r)).collect::<Vec<_>>().join(" ")
}

/// What to mind with a recommendation.
pub const fn caution_words(caution: Caution) -> &'static str {
    match caution {
        Caution::SiteDecides => {
            "Local codes, the site's own procedure, its permits and licensed operators decide; this \
             is advice only."
        }
        Caution::ChlorineGas => {
            "Hypochlorite must never meet acid: together they give off chlorine gas. Rinse between \
             them and measure that the rinse is done."
        }
        Caution::SharedVessels => {
            "What is left in heels, dead legs, shared tanks and sumps counts as meeting."
        }
        Caution::Reductant => {
            "Use a reductant only in a controlled neutralisation, never as an answer to a spill \
             without the site's procedure."
        }
        Caution::ReturnToService => {
            "Prove isolation before the clean, neutralise before anything is drained, and send \
             filtrate to waste afterwards until pH and residual pass."
        }
        Caution::IntegrityBeforeReturn => {
            "This train makes drinking water: test its integrity before it returns to service."
        }
        Caution::NotIntegrity => {
            "Permeability never shows a breach, nor that there is none; only an integrity test does."
        }
        Caution::NoMembraneLimits => {
            "The plant file holds no membrane limits, so only classes of chemical are named: take \
             strength, pH and temperature from the membrane's data sheet."
        }
        Caution::StartsNothing => "Nothing here starts a pump or opens a valve.",
    }
}

/// Why a step of a clean is there.
pub const fn why_words(why: Why) -> &'static str {
    match why {
        Why::SiteProcedure => "It is a step of the site's own procedure.",
        Why::HeldToMembraneLimits => {
            "It is a step of the site's own procedure, held to the membrane's limits: the procedure \
             goes beyond them and has to be corrected."
        }
        Why::OrganicFouling => "Organic and biological fouling yields to it.",
        Why::MineralFouling => "Iron, manganese, aluminium and calcium yield to it.",
        Why::KeepsApart => "It keeps apart chemicals that must not meet.",
        Why::BeforeReturn => "Nothing of the chemicals may be left when the train returns.",
    }
}

/// What clears a recommendation.
pub const fn clears_when_words(clears: ClearsWhen) -> &'static str {
    match clears {
        ClearsWhen::CleanedOrLimitFar => {
            "A clean in place is seen or recorded, or the early date of the limit moves out well \
             past the planning horizon."
        }
        ClearsWhen::NextCleanRestored => "The next clean is judged restored.",
        ClearsWhen::ReadingsUsable => "Hours of filtration can be used again.",
        ClearsWhen::VerdictNoLongerDoubtful => "Permeability is back within what a clean can give.",
    }
}

/// Why there are no dates, set after "because".
pub const fn no_dates_words(why: NoDates) -> &'static str {
    match why {
        NoDates::InClean => "the train is being cleaned",
        NoDates::YoungRun => {
            "five whole days of filtration are needed for a trend and have not passed"
        }
        NoDates::NothingToHoldAgainst => {
            "there is neither a baseline for the permeability nor a limit of TMP; state \
             after_clean_permeability or as_new_permeability in the plant file"
        }
        NoDates::NoDays => "no whole day of filtration with usable readings has been worked yet",
    }
}

/// What a clean was worth.
pub const fn verdict_words(verdict: Verdict) -> &'static str {
    match verdict {
        Verdict::Restored => "Restored: at least 95 % of the best permeability after a clean.",
        Verdict::PartlyRestored => {
            "Partly restored: 85 to 95 % of the best permeability after a clean."
        }
        Verdict::NotRestored => {
            "Not restored: less than 85 % of the best permeability after a clean."
        }
        Verdict::Doubtful => {
            "Doubtful: more permeability than a clean can give. Check the instruments and test \
             integrity before believing it."
        }
        Verdict::CannotTellYet => "It cannot be told yet what the clean was worth.",
    }
}

/// A baseline, set after "against".
pub const fn baseline_words(kind: BaselineKind) -> &'static str {
    match kind {
        BaselineKind::AfterClean => "the last clean that restored it",
        BaselineKind::AfterCleanStated => "the last good clean as the plant file states it",
        BaselineKind::BestAfterClean => "the best after a clean in twelve months",
        BaselineKind::AsNew => "the new membrane as the plant file states it",
    }
}

/// What to do.
pub const fn action_words(action: Action) -> &'static str {
    match action {
        Action::CleanInPlace => "Clean the train in place.",
        Action::MaintenanceClean => "Give the train a maintenance clean.",
        Action::BackwashMoreOften => "Backwash more often.",
        Action::ReduceFlux => "Reduce the flux.",
        Action::RaiseCrossFlow => "Raise the cross-flow.",
        Action::BleedMore => "Bleed more.",
        Action::Inspect => {
            "Inspect before cleaning again: two cleans running gave too little, so look for \
             clogging or a wrong instrument."
        }
        Action::CheckInstrument => {
            "Check the instruments: hours of filtration could not be used because of their readings."
        }
        Action::IntegrityTest => {
            "Test the integrity: after the clean the train passes more water than it should."
        }
        Action::TakeOutOfService => "Take the train out of service.",
        Action::CapacityWarning => "The plant may not make its flow with the trains as they are.",
    }
}

/// The name of an action, for headings: `clean in place`.
pub fn action_code_words(action: Action) -> String {
    action.code().replace('_', " ")
}

/// How soon.
pub const fn urgency_words(urgency: Urgency) -> &'static str {
    match urgency {
        Urgency::NextSlot => "In the next slot that suits.",
        Urgency::ThisWeek => "Within seven days.",
        Urgency::ThisShift => "Before the next shift ends.",
    }
}

/// Why a recommendation was closed.
pub const fn closed_why_words(why: ClosedWhy) -> &'static str {
    match why {
        ClosedWhy::Cleaned => "The train was cleaned.",
        ClosedWhy::NoLongerHolds => "What it stood on no longer holds.",
        ClosedWhy::Declined => "A person declined it.",
    }
}

/// The code of why a recommendation was closed.
pub(super) const fn closed_why_code(why: ClosedWhy) -> &'static str {
    match why {
        ClosedWhy::Cleaned => "cleaned",
        ClosedWhy::NoLongerHolds => "no_longer_holds",
        ClosedWhy::Declined => "declined",
    }
}

/// A kind of finding.
pub const fn finding_words(kind: FindingKind) -> &'static str {
    match kind {
        FindingKind::PermeabilityLoss => "Loss of permeability has held past a limit.",
        FindingKind::TmpHigh => "TMP at the end of a cycle has held past a limit.",
        FindingKind::PermeabilityLimitAhead => "The clean limit of permeability is coming.",
        FindingKind::TmpLimitAhead => "The clean limit of TMP is coming.",
        FindingKind::CleanVerdict => "The last clean was judged.",
        FindingKind::CannotNormalise => "Hours of filtration could not be used.",
    }
}

/// The code of a phase, as in the plant file.
pub const fn phase_code(phase: Phase) -> &'static str {
    match phase {
        Phase::Filtration => "filtration",
        Phase::Backwash => "backwash",
        Phase::ChemicalBackwash => "chemical_backwash",
        Phase::MaintenanceClean => "maintenance_clean",
        Phase::CleanInPlace => "clean_in_place",
        Phase::IntegrityTest => "integrity_test",
        Phase::Standby => "standby",
        Phase::Relaxation => "relaxation",
        Phase::Flush => "flush",
        Phase::Calibration => "calibration",
        Phase::OutOfService => "out_of_service",
        Phase::Unknown => "unknown",
    }
}

/// What a train is doing, set after "is".
pub const fn phase_words(phase: Phase) -> &'static str {
    match phase {
        Phase::Filtration => "filtering",
        Phase::Backwash => "in backwash",
        Phase::ChemicalBackwash => "in a chemical backwash",
        Phase::MaintenanceClean => "in a maintenance clean",
        Phase::CleanInPlace => "in a clean in place",
        Phase::IntegrityTest => "in an integrity test",
        Phase::Standby => "on standby",
        Phase::Relaxation => "relaxing",
        Phase::Flush => "being flushed",
        Phase::Calibration => "in calibration",
        Phase::OutOfService => "out of service",
        Phase::Unknown => "in a state that cannot be told",
    }
}

/// The code of a role, as in the plant file.
pub const fn role_code(role: Role) -> &'static str {
    match role {
        Role::FeedPressure => "feed_pressure",
        Role::PermeatePressure => "permeate_pressure",
        Role::ConcentratePressure => "concentrate_pressure",
        Role::TransmembranePressure => "transmembrane_pressure",
        Role::PermeateFlow => "permeate_flow",
        Role::FeedFlow => "feed_flow",
        Role::FlowSetpoint => "flow_setpoint",
        Role::BackwashFlow => "backwash_flow",
        Role::RecirculationFlow => "recirculation_flow",
        Role::BleedFlow => "bleed_flow",
        Role::Temperature => "temperature",
        Role::TankLevel => "tank_level",
        Role::State => "state",
        Role::FeedTurbidity => "feed_turbidity",
        Role::PermeateTurbidity => "permeate_turbidity",
        Role::FeedConcentration => "feed_concentration",
        Role::PermeateConcentration => "permeate_concentration",
        Role::RetentateConcentration => "retentate_concentration",
        Role::IntegrityPressure => "integrity_pressure",
    }
}

/// What a tag measures, in words: `feed pressure`.
pub fn role_words(role: Role) -> String {
    role_code(role).replace('_', " ")
}

/// The code of a class of chemical.
pub const fn step_class_code(class: StepClass) -> &'static str {
    match class {
        StepClass::Hypochlorite => "hypochlorite",
        StepClass::Alkali => "alkali",
        StepClass::Acid => "acid",
        StepClass::Peroxide => "peroxide",
        StepClass::Reductant => "reductant",
        StepClass::Detergent => "detergent",
        StepClass::Rinse => "rinse",
        StepClass::Other => "other",
    }
}

/// A class of chemical, inside a sentence.
pub const fn step_class_words(class: StepClass) -> &'static str {
    match class {
        StepClass::Rinse => "rinse water",
        StepClass::Other => "a chemical of unknown class",
        _ => step_class_code(class),
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn every_reason_is_one_sentence() {
        for reason in Reason::ALL {
            let words = reason_words(reason);
            assert!(words.ends_with('.') && words.matches(". ").count() == 0, "{words}");
            assert!(words.starts_with(char::is_uppercase), "{words}");
        }
        assert_eq!(
            reasons_words(&[Reason::NoFlow, Reason::Gap]),
            "There is no usable reading of permeate flow. Readings are missing for more than ten \
             minutes."
        );
    }

    #[test]
    fn codes_are_those_that_the_model_writes() {
        let code = |v: serde_json::Value| v.as_str().map(str::to_owned).unwrap_or_default();
        for phase in [
            Phase::Filtration,
            Phase::ChemicalBackwash,
            Phase::MaintenanceClean,
            Phase::CleanInPlace,
            Phase::IntegrityTest,
            Phase::OutOfService,
            Phase::Unknown,
        ] {
            assert_eq!(code(serde_json::to_value(phase).unwrap()), phase_code(phase));
        }
        for role in [Role::FeedPressure, Role::TransmembranePressure, Role::PermeateFlow] {
            assert_eq!(code(serde_json::to_value(role).unwrap()), role_code(role));
        }
        for class in [StepClass::Hypochlorite, StepClass::Alkali, StepClass::Rinse] {
            assert_eq!(code(serde_json::to_value(class).unwrap()), step_class_code(class));
        }
        for why in [ClosedWhy::Cleaned, ClosedWhy::NoLongerHolds, ClosedWhy::Declined] {
            assert_eq!(code(serde_json::to_value(why).unwrap()), closed_why_code(why));
        }
    }
}
