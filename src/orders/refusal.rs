//! Why an act is refused, and what can be done instead.

use crate::plant::StepClass;

use super::apply::transitions;
use super::chemistry::Conflict;
use super::order::{ActKind, OrderState};

/// A refused act.
#[derive(Clone, Debug, PartialEq, thiserror::Error)]
#[error("{why}")]
pub struct Refusal {
    /// The field that it is about, as a JSON pointer: into the order for its plan (`/steps/2`),
    /// else into the request (`/actuals/steps/1/verified/ph`); empty for the whole.
    pub pointer: String,
    /// Why.
    pub why: RefusalWhy,
}

impl Refusal {
    pub(super) fn new(pointer: impl Into<String>, why: RefusalWhy) -> Self {
        Self { pointer: pointer.into(), why }
    }
}

/// A reading that shows a rinse done.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Reading {
    /// pH.
    Ph,
    /// Free chlorine, mg/L.
    FreeChlorine,
    /// Who read.
    By,
}

impl Reading {
    /// Its field.
    pub const fn field(self) -> &'static str {
        match self {
            Self::Ph => "ph",
            Self::FreeChlorine => "free_chlorine",
            Self::By => "by",
        }
    }
    const fn words(self) -> &'static str {
        match self {
            Self::Ph => "the pH read",
            Self::FreeChlorine => "the free chlorine read",
            Self::By => "who read it",
        }
    }
}

/// Why an act is refused. The text tells what to do.
#[derive(Clone, Debug, PartialEq, thiserror::Error)]
pub enum RefusalWhy {
    /// The state does not lead there.
    #[error("{}", not_from(*.state, *.act))]
    NotFrom {
        /// Where the order stands.
        state: OrderState,
        /// What was asked.
        act: ActKind,
    },
    /// Nobody is named, or the service.
    #[error("`by` must name the person who does it: the service signs nothing")]
    NeedsPerson,
    /// No reason is named.
    #[error("`reason` must say why: the next shift reads it")]
    NeedsReason,
    /// The train has an open order.
    #[error("WO {0} is open for this train, and a train has one at a time: use it, or cancel it")]
    AnotherOpen(i64),
    /// The window ends before it begins, or has passed.
    #[error("`window` must begin before it ends, and end in the future")]
    BadWindow,
    /// A time that has not come yet, or an end before its start.
    #[error("times of work must not lie in the future, and the end must follow the start")]
    BadTimes,
    /// The plan names no chemical.
    #[error(
        "the plan has no chemical step; cancel this order and raise one with its steps, or put the site's procedure into the plant file"
    )]
    NothingPlanned,
    /// Classes meet that must not.
    #[error("{}", conflict(.0))]
    Conflict(Conflict),
    /// A chemical is left when the train returns.
    #[error(
        "{} is left in the train at the end: the last step must be a rinse with its checks, pH between 5 and 10 and, after hypochlorite or an unknown chemical, free chlorine of at most 4 mg/L",
        class(*.0)
    )]
    NotRinsed(StepClass),
    /// A pH outside the membrane's limits.
    #[error("pH {value} is outside the membrane's limits of {low} to {high}")]
    PhBeyondMembrane {
        /// Planned.
        value: f64,
        /// Lowest.
        low: f64,
        /// Highest.
        high: f64,
    },
    /// A temperature over the membrane's limit.
    #[error("{value} degC is over the membrane's limit of {limit} degC")]
    TemperatureBeyondMembrane {
        /// Planned, degrees Celsius.
        value: f64,
        /// Highest, degrees Celsius.
        limit: f64,
    },
    /// Free chlorine over the membrane's limit.
    #[error("{value} mg/L of free chlorine is over the membrane's limit of {limit} mg/L")]
    ChlorineBeyondMembrane {
        /// Planned, mg/L.
        value: f64,
        /// Highest, mg/L.
        limit: f64,
    },
    /// A strength that cannot be read, where a limit must be held against it.
    #[error(
        "the membrane has a limit of free chlorine and this strength cannot be read; write it like `500 mg/L` or `0.05 %`"
    )]
    StrengthUnreadable,
    /// What was done holds no steps.
    #[error("`actuals.steps` must hold the steps as done, rinses with their readings")]
    NoStepsDone,
    /// Other chemicals than planned, with no word on it.
    #[error(
        "the chemicals done are not those planned; say in `actuals.notes` what was done otherwise and why"
    )]
    DoneOtherwise,
    /// A rinse lacks a reading.
    #[error(
        "this rinse keeps chemicals apart or ends the clean: give {} under `verified`",
        .0.words()
    )]
    ReadingMissing(Reading),
    /// A rinse's reading does not pass.
    #[error(
        "{} is {value}, which does not pass the plan's check of {low} to {high}; rinse on and give the reading that passed",
        .reading.words()
    )]
    ReadingOutside {
        /// Which.
        reading: Reading,
        /// Read.
        value: f64,
        /// Lowest that passes.
        low: f64,
        /// Highest that passes.
        high: f64,
    },
    /// The verdict is not known.
    #[error(
        "the verdict on the clean is not known yet: it needs the train in filtration for 24 hours after its return"
    )]
    VerdictNotKnown,
    /// Drinking water wants the integrity test.
    #[error(
        "the train makes drinking water: give `integrity_test` with `passed`, `at` and `by`, of a test after the clean began"
    )]
    IntegrityTestMissing,
    /// The integrity test was not passed.
    #[error(
        "the integrity test was not passed: keep the train out of service, find the cause, and verify with a test that was"
    )]
    IntegrityTestFailed,
}

fn not_from(state: OrderState, act: ActKind) -> String {
    let allowed: Vec<&str> = transitions(state).iter().map(|a| a.code()).collect();
    let can = match allowed.as_slice() {
        [] => "nothing more can be done to it".to_owned(),
        [one] => format!("only {one} can follow"),
        [rest @ .., last] => format!("{} or {last} can follow", rest.join(", ")),
    };
    format!("{} does not follow {}: {can}", act.code(), state.code().replace('_', " "))
}

/// The name of a class.
fn class(class: StepClass) -> &'static str {
    match class {
        StepClass::Hypochlorite => "hypochlorite",
        StepClass::Alkali => "alkali",
        StepClass::Acid => "acid",
        StepClass::Peroxide => "peroxide",
        StepClass::Reductant => "reductant",
        StepClass::Detergent => "detergent",
        StepClass::Rinse => "rinse water",
        StepClass::Other => "a chemical of unknown class",
    }
}

fn conflict(c: &Conflict) -> String {
    let (first, second) = (class(c.first), class(c.second));
    if c.from_step == Some(c.at_step) {
        return format!("this step mixes {first} and {second}, which must never meet");
    }
    let whence = match c.from_step {
        Some(i) => format!("{first} of step {}", i + 1),
        None => format!("{first}, which the train saw last,"),
    };
    let why = if c.unproven_rinse {
        "the rinse between them does not show that it keeps them apart"
    } else {
        "there is no rinse between them"
    };
    format!(
        "{second} of step {} must not meet {whence} and {why}; it needs a rinse with checks of pH and free chlorine",
        c.at_step + 1
    )
}
