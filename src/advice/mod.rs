//! Floor 5: what should be done, and why. Rules look at what stands for a train and propose;
//! [`step`] turns proposals into recommendations, one open one a train and action.

mod check_instrument;
mod clean_in_place;
mod inspect;
mod integrity_test;
mod recommendation;
mod steps;
mod urgency;

use crate::analysis::{Dates, Evidence, Finding, Site, Standing};
use crate::base::Instant;
use crate::plant::Plant;

pub use recommendation::{
    Act, ActRefused, Change, Closed, ClosedWhy, Decision, Recommendation, act, step,
};
pub use steps::{AdvisedStep, Caution, StepsFrom, Why, cautions};

use serde::{Deserialize, Serialize};

/// What is recommended.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord, Serialize, Deserialize)]
#[serde(rename_all = "snake_case")]
#[expect(missing_docs, reason = "the names are the trade's")]
pub enum Action {
    CleanInPlace,
    MaintenanceClean,
    BackwashMoreOften,
    ReduceFlux,
    RaiseCrossFlow,
    BleedMore,
    Inspect,
    CheckInstrument,
    IntegrityTest,
    TakeOutOfService,
    CapacityWarning,
}

impl Action {
    /// The code used in the API.
    pub const fn code(self) -> &'static str {
        match self {
            Self::CleanInPlace => "clean_in_place",
            Self::MaintenanceClean => "maintenance_clean",
            Self::BackwashMoreOften => "backwash_more_often",
            Self::ReduceFlux => "reduce_flux",
            Self::RaiseCrossFlow => "raise_cross_flow",
            Self::BleedMore => "bleed_more",
            Self::Inspect => "inspect",
            Self::CheckInstrument => "check_instrument",
            Self::IntegrityTest => "integrity_test",
            Self::TakeOutOfService => "take_out_of_service",
            Self::CapacityWarning => "capacity_warning",
        }
    }
}

/// How soon. Ordered: later is more urgent.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord, Serialize, Deserialize)]
#[serde(rename_all = "snake_case")]
pub enum Urgency {
    /// In the next slot that suits.
    NextSlot,
    /// Within seven days.
    ThisWeek,
    /// Before the next shift ends, or the limit has held already.
    ThisShift,
}

impl Urgency {
    /// The code used in the API.
    pub const fn code(self) -> &'static str {
        match self {
            Self::NextSlot => "next_slot",
            Self::ThisWeek => "this_week",
            Self::ThisShift => "this_shift",
        }
    }
}

/// What clears a recommendation. Worded for people in `answers`.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Serialize, Deserialize)]
#[serde(rename_all = "snake_case")]
pub enum ClearsWhen {
    /// A clean in place is seen or recorded, or the early date moves out well past the horizon.
    CleanedOrLimitFar,
    /// The next clean is judged restored.
    NextCleanRestored,
    /// Hours of filtration can be normalised again.
    ReadingsUsable,
    /// Permeability is back within what a clean can give.
    VerdictNoLongerDoubtful,
}

/// What a rule proposes for a train.
#[derive(Clone, Debug, PartialEq)]
pub struct Proposal {
    /// What to do.
    pub action: Action,
    /// How soon.
    pub urgency: Urgency,
    /// Dates of the limit that binds.
    pub clean_by: Option<Dates>,
    /// Latest start.
    pub start_by: Option<Instant>,
    /// On what evidence.
    pub evidence: Vec<Evidence>,
    /// What clears it.
    pub clears_when: ClearsWhen,
    /// What to clean with, in order.
    pub steps: Vec<AdvisedStep>,
    /// Where the steps come from.
    pub steps_from: StepsFrom,
}

/// What a rule looks at.
pub struct Case<'a> {
    /// The plant.
    pub plant: &'a Plant,
    /// The train.
    pub site: &'a Site<'a>,
    /// What stands.
    pub standing: &'a Standing,
    /// What was found.
    pub findings: &'a [Finding],
    /// What is open for the train, and how urgent: a rule may hold on to what it proposed.
    pub open: &'a [(Action, Urgency)],
}

type Rule = fn(&Case) -> Option<Proposal>;

/// The rules there are. A new rule is its file and a line here.
const RULES: [Rule; 4] =
    [clean_in_place::propose, inspect::propose, integrity_test::propose, check_instrument::propose];

/// Everything proposed for a train.
pub fn propose(case: &Case) -> Vec<Proposal> {
    RULES.iter().filter_map(|rule| rule(case)).collect()
}
