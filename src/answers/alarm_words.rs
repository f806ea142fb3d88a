//! Words for what alarms only name.

use super::reason::step_class_words;
use crate::alarms::{AlarmActKind, AlarmKind, AlarmState, Response};
use crate::analysis::LimitKind;
use crate::orders::ConflictKind;
use crate::plant::StepClass;

/// What an alarm asks an operator to do.
pub const fn response_words(response: Response) -> &'static str {
    match response {
        Response::PlanClean => {
            "Look at the train's recommendation and its work order, and plan the clean. Lowering \
             the flux until there is a window is for the licensed operator to weigh: the other \
             trains carry more, and clear-water level, demand and disinfection contact time \
             have to hold."
        }
        Response::RestoreExports => {
            "Check the historian's export and the connection, and post what is missing; until then \
             run by the plant's own displays, for nothing is advised on old data."
        }
        Response::CheckInstrument => {
            "Check the instrument against a second one or a hand reading; do not act on its numbers \
             until then."
        }
        Response::TestAndCheck => {
            "Run an integrity test, and check flow and pressure against a second instrument, before \
             relying on this train."
        }
        Response::TakeOutUntilTested => {
            "Keep the train out of service, or its filtrate to waste, until a test has passed; \
             follow the permit, and tell who must be told."
        }
        Response::MakeSafe => {
            "Stop dosing, keep people away, ventilate, and follow the site's emergency procedure; \
             then prove by pH and free chlorine that the train, its tank and its sump are rinsed. If \
             only the record is wrong, acknowledge this and note the correction in the shift log: a record cannot be changed."
        }
    }
}

/// Where an alarm stands.
pub const fn alarm_state_words(state: AlarmState) -> &'static str {
    match state {
        AlarmState::Unacknowledged => "It stands, and nobody has said that they know.",
        AlarmState::Acknowledged => "It stands, and somebody knows.",
        AlarmState::ReturnedUnacknowledged => {
            "It no longer stands, and nobody has said that they knew."
        }
        AlarmState::Shelved => "It is silent for a time, by a person's act.",
        AlarmState::SuppressedByDesign => "It is silent while the train is cleaned.",
        AlarmState::OutOfService => "It is silent while the train is out of service.",
        AlarmState::Normal => "It is over.",
    }
}

/// What an alarm is about, where nothing more is known.
pub(super) const fn alarm_kind_words(kind: AlarmKind) -> &'static str {
    match kind {
        AlarmKind::CleanLimit => "A limit that asks for a clean has held.",
        AlarmKind::DataStale => {
            "A source has delivered nothing for more than three times its usual spacing."
        }
        AlarmKind::Instrument => "An instrument is not to be believed.",
        AlarmKind::CleanDoubtful => {
            "After the last clean the train passes more water than a clean can explain."
        }
        AlarmKind::Integrity => "An integrity test failed.",
        AlarmKind::ChemicalConflict => {
            "A recorded cleaning brought chemicals together that must not meet."
        }
    }
}

/// A limit, set after "the".
pub(super) const fn limit_words(kind: LimitKind) -> &'static str {
    match kind {
        LimitKind::LossAdvisory => "advisory limit of permeability",
        LimitKind::LossClean => "clean limit of permeability",
        LimitKind::TmpAdvisory => "advisory limit of TMP",
        LimitKind::TmpClean => "clean limit of TMP",
    }
}

/// What comes of two classes that meet, set after "together they".
pub const fn conflict_words(kind: ConflictKind) -> &'static str {
    match kind {
        ConflictKind::ChlorineGas => "give off chlorine gas",
        ConflictKind::SulphurDioxide => "give off sulphur dioxide",
        ConflictKind::Violent => "react violently, with heat and gas",
        ConflictKind::Chlorination => "give heat, foam and chlorinated products",
        ConflictKind::Neutralisation => "give heat, and neither cleans",
        ConflictKind::Unknown => "may do anything: one of them is of unknown class",
    }
}

/// Two classes that met, or may have, and what comes of it.
pub(super) fn met_words(first: StepClass, second: StepClass) -> String {
    let (a, b) = (step_class_words(first), step_class_words(second));
    let met = format!(
        "By the record of a cleaning, {b} came to {a}, and no rinse between them shows by its \
         readings that it kept them apart"
    );
    match ConflictKind::of(first, second) {
        Some(kind) => format!("{met}: together they {}.", conflict_words(kind)),
        None => format!("{met}."),
    }
}

/// The last part of the path of a person's act.
pub const fn alarm_act_code(act: AlarmActKind) -> &'static str {
    match act {
        AlarmActKind::Acknowledge => "acknowledge",
        AlarmActKind::Shelve => "shelve",
    }
}
