//! An alarm and what is known of it.

use serde::{Deserialize, Serialize};

use crate::analysis::{Evidence, LimitKind};
use crate::base::{Instant, SourceId, TrainId};
use crate::plant::StepClass;

/// The kinds of alarm. An advisory limit raises none.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord, Serialize, Deserialize)]
#[serde(rename_all = "snake_case")]
pub enum AlarmKind {
    /// A limit that asks for a clean has held.
    CleanLimit,
    /// A source has delivered nothing for three times its usual spacing.
    DataStale,
    /// An instrument is not to be believed.
    Instrument,
    /// After a clean a train passes more water than a clean can explain.
    CleanDoubtful,
    /// An integrity test failed.
    Integrity,
    /// A recorded cleaning brought chemicals together that must not meet.
    ChemicalConflict,
}

impl AlarmKind {
    /// All kinds.
    pub const ALL: [Self; 6] = [
        Self::CleanLimit,
        Self::DataStale,
        Self::Instrument,
        Self::CleanDoubtful,
        Self::Integrity,
        Self::ChemicalConflict,
    ];

    /// The code used in the API.
    pub const fn code(self) -> &'static str {
        match self {
            Self::CleanLimit => "clean_limit",
            Self::DataStale => "data_stale",
            Self::Instrument => "instrument",
            Self::CleanDoubtful => "clean_doubtful",
            Self::Integrity => "integrity",
            Self::ChemicalConflict => "chemical_conflict",
        }
    }

    /// The kind of a code.
    pub fn from_code(code: &str) -> Option<Self> {
        Self::ALL.into_iter().find(|k| k.code() == code)
    }

    /// The response it asks for.
    pub const fn response(self) -> Response {
        match self {
            Self::CleanLimit => Response::PlanClean,
            Self::DataStale => Response::RestoreExports,
            Self::Instrument => Response::CheckInstrument,
            Self::CleanDoubtful => Response::TestAndCheck,
            Self::Integrity => Response::TakeOutUntilTested,
            Self::ChemicalConflict => Response::MakeSafe,
        }
    }

    /// Whether a person may silence it for a time. A breach may let pathogens through, so its
    /// alarm stays in sight.
    pub const fn can_be_shelved(self) -> bool {
        !matches!(self, Self::Integrity)
    }

    /// Whether it keeps quiet while its train is cleaned or out of service: only what a clean
    /// or a standstill explains does.
    pub const fn can_be_withheld(self) -> bool {
        matches!(self, Self::CleanLimit | Self::Instrument)
    }
}

/// States after ISA-18.2 (names from memory).
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord, Serialize, Deserialize)]
#[serde(rename_all = "snake_case")]
pub enum AlarmState {
    /// Stands, and nobody has said that they know.
    Unacknowledged,
    /// Stands, and somebody knows.
    Acknowledged,
    /// No longer stands, and nobody has said that they knew.
    ReturnedUnacknowledged,
    /// Silent until a moment, by a person's act.
    Shelved,
    /// Silent because the train is being cleaned.
    SuppressedByDesign,
    /// Silent because the train is out of service.
    OutOfService,
    /// Over.
    Normal,
}

impl AlarmState {
    /// All states.
    pub const ALL: [Self; 7] = [
        Self::Unacknowledged,
        Self::Acknowledged,
        Self::ReturnedUnacknowledged,
        Self::Shelved,
        Self::SuppressedByDesign,
        Self::OutOfService,
        Self::Normal,
    ];

    /// The code used in the API.
    pub const fn code(self) -> &'static str {
        match self {
            Self::Unacknowledged => "unacknowledged",
            Self::Acknowledged => "acknowledged",
            Self::ReturnedUnacknowledged => "returned_unacknowledged",
            Self::Shelved => "shelved",
            Self::SuppressedByDesign => "suppressed_by_design",
            Self::OutOfService => "out_of_service",
            Self::Normal => "normal",
        }
    }

    /// The state of a code.
    pub fn from_code(code: &str) -> Option<Self> {
        Self::ALL.into_iter().find(|s| s.code() == code)
    }
}

/// What an alarm asks an operator to do. Worded for people in `answers`; each says here what
/// is meant.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord, Serialize, Deserialize)]
#[serde(rename_all = "snake_case")]
pub enum Response {
    /// Look at the train's recommendation and its work order; plan the clean, or lower the flux
    /// until there is a window.
    PlanClean,
    /// Check the historian's export and the connection, post what is missing; until then run by
    /// the plant's own displays: nothing is advised on old data.
    RestoreExports,
    /// Check the instrument against a second one or a hand reading; do not act on its numbers.
    CheckInstrument,
    /// Run an integrity test and check flow and pressure against a second instrument before
    /// relying on this train.
    TestAndCheck,
    /// Keep the train out of service, or its filtrate to waste, until a test has passed; follow
    /// the permit and tell who must be told.
    TakeOutUntilTested,
    /// Stop dosing, keep people away, ventilate, follow the site's emergency procedure; then
    /// prove by pH and free chlorine that the train, its tank and its sump are rinsed. If only
    /// the record is wrong, correct it.
    MakeSafe,
}

/// What the evidence does not say.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize)]
#[serde(rename_all = "snake_case")]
pub enum Detail {
    /// The limit that held first.
    Limit(LimitKind),
    /// The newest reading of a source.
    NewestReading(Instant),
    /// Classes of chemical that met, or may have.
    Met {
        /// What was there first.
        first: StepClass,
        /// What came to it.
        second: StepClass,
    },
    /// Nothing more.
    None,
}

/// What a person did to an alarm.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Serialize, Deserialize)]
#[serde(rename_all = "snake_case")]
pub enum AlarmActKind {
    /// Said that they know.
    Acknowledge,
    /// Silenced it for a time.
    Shelve,
}

/// A person's act.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize)]
pub struct AlarmAct {
    /// What.
    pub what: AlarmActKind,
    /// Who.
    pub by: String,
    /// When, by the wall clock.
    pub at: Instant,
    /// Until when, for shelving.
    pub until: Option<Instant>,
    /// Why.
    pub reason: Option<String>,
}

/// An alarm. The store keeps it as it is here, whole, at every change.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize)]
pub struct Alarm {
    /// Its id.
    pub id: String,
    /// What it is about.
    pub kind: AlarmKind,
    /// Whose.
    pub train: Option<TrainId>,
    /// Which source's, for data that are stale.
    pub source: Option<SourceId>,
    /// What tells two of one kind and train apart, for example a cleaning's id; else empty.
    pub subject: String,
    /// Where it stands.
    pub state: AlarmState,
    /// Data time at which it was raised.
    pub raised: Instant,
    /// Data time of the last look that changed it.
    pub as_of: Instant,
    /// Data time at which its condition no longer stood; `None` while it stands.
    pub returned: Option<Instant>,
    /// On what evidence.
    pub evidence: Vec<Evidence>,
    /// What the evidence does not say.
    pub detail: Detail,
    /// The response it asks for.
    pub response: Response,
    /// What people did to it, in order.
    pub acts: Vec<AlarmAct>,
    /// Until when it is silent, by the wall clock; only while shelved.
    pub shelved_until: Option<Instant>,
}

impl Alarm {
    /// Whether it is over.
    pub fn is_normal(&self) -> bool {
        self.state == AlarmState::Normal
    }
}
