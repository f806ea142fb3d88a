//! Why a number is missing, widened or left out. Worded for people in `answers`.

use serde::{Deserialize, Serialize};

/// One reason. The order is the order in which reasons are told.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord, Hash, Serialize, Deserialize)]
#[serde(rename_all = "snake_case")]
pub enum Reason {
    /// No usable flow reading.
    NoFlow,
    /// No usable pressure reading.
    NoPressure,
    /// No usable temperature reading.
    NoTemperature,
    /// The viscosity law does not hold at the temperature read.
    TemperatureOutOfRange,
    /// TMP below the floor under which it is not believed.
    TmpUnderFloor,
    /// A reading of flow or pressure did not move through a backwash.
    Frozen,
    /// Flow wandered by more than 5 %.
    UnsteadyFlow,
    /// Too soon after the start of filtration.
    JustStarted,
    /// The state reads a code that the plant file does not name, or nothing.
    UnknownState,
    /// Readings are missing for more than ten minutes.
    Gap,
    /// The start of the cycle was not seen.
    StartNotSeen,
    /// No backwash came before the cycle.
    NoBackwashBefore,
    /// The cycle was shorter than eight minutes.
    ShortCycle,
    /// Fewer than three steady readings in minutes 2 to 8.
    FewReadings,
    /// No start of cycle could be told; a plain median stands in, with a wider interval.
    Coarse,
    /// Filtration ran on over midnight without a backwash; the cycle was cut there.
    CutAtMidnight,
    /// Less than half the readings of filtration could be used.
    LowCoverage,
}

impl Reason {
    /// The code used in the API.
    pub const fn code(self) -> &'static str {
        match self {
            Self::NoFlow => "no_flow",
            Self::NoPressure => "no_pressure",
            Self::NoTemperature => "no_temperature",
            Self::TemperatureOutOfRange => "temperature_out_of_range",
            Self::TmpUnderFloor => "tmp_under_floor",
            Self::Frozen => "frozen",
            Self::UnsteadyFlow => "unsteady_flow",
            Self::JustStarted => "just_started",
            Self::UnknownState => "unknown_state",
            Self::Gap => "gap",
            Self::StartNotSeen => "start_not_seen",
            Self::NoBackwashBefore => "no_backwash_before",
            Self::ShortCycle => "short_cycle",
            Self::FewReadings => "few_readings",
            Self::Coarse => "coarse",
            Self::CutAtMidnight => "cut_at_midnight",
            Self::LowCoverage => "low_coverage",
        }
    }

    /// All reasons.
    pub const ALL: [Self; 17] = [
        Self::NoFlow,
        Self::NoPressure,
        Self::NoTemperature,
        Self::TemperatureOutOfRange,
        Self::TmpUnderFloor,
        Self::Frozen,
        Self::UnsteadyFlow,
        Self::JustStarted,
        Self::UnknownState,
        Self::Gap,
        Self::StartNotSeen,
        Self::NoBackwashBefore,
        Self::ShortCycle,
        Self::FewReadings,
        Self::Coarse,
        Self::CutAtMidnight,
        Self::LowCoverage,
    ];

    /// The reason of a code.
    pub fn from_code(code: &str) -> Option<Self> {
        Self::ALL.into_iter().find(|r| r.code() == code)
    }
}

/// How far a number can be trusted.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord, Serialize, Deserialize)]
#[serde(rename_all = "snake_case")]
pub enum Quality {
    /// As good as its instruments.
    Good,
    /// To be read with its reasons.
    Uncertain,
    /// Not to be used.
    Bad,
}

impl Quality {
    /// The word used in the API.
    pub const fn code(self) -> &'static str {
        match self {
            Self::Good => "good",
            Self::Uncertain => "uncertain",
            Self::Bad => "bad",
        }
    }
    /// The quality of a word; `Bad` if it is none.
    pub fn from_code(code: &str) -> Self {
        match code {
            "good" => Self::Good,
            "uncertain" => Self::Uncertain,
            _ => Self::Bad,
        }
    }
}
