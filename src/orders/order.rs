//! A work order and what is known of it.

use serde::{Deserialize, Serialize};

use crate::advice::Why;
use crate::analysis::{Baseline, Evidence, Level, Verdict};
use crate::base::{Instant, Span, TrainId};
use crate::plant::{Phase, Step};

use super::safety::Safety;

/// Where a work order stands.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord, Serialize, Deserialize)]
#[serde(rename_all = "snake_case")]
#[expect(missing_docs, reason = "the names are the trade's")]
pub enum OrderState {
    Draft,
    Approved,
    Scheduled,
    InProgress,
    Waiting,
    Done,
    Verified,
    Rejected,
    Cancelled,
}

impl OrderState {
    /// All states.
    pub const ALL: [Self; 9] = [
        Self::Draft,
        Self::Approved,
        Self::Scheduled,
        Self::InProgress,
        Self::Waiting,
        Self::Done,
        Self::Verified,
        Self::Rejected,
        Self::Cancelled,
    ];

    /// The code used in the API.
    pub const fn code(self) -> &'static str {
        match self {
            Self::Draft => "draft",
            Self::Approved => "approved",
            Self::Scheduled => "scheduled",
            Self::InProgress => "in_progress",
            Self::Waiting => "waiting",
            Self::Done => "done",
            Self::Verified => "verified",
            Self::Rejected => "rejected",
            Self::Cancelled => "cancelled",
        }
    }

    /// The state of a code.
    pub fn from_code(code: &str) -> Option<Self> {
        Self::ALL.into_iter().find(|s| s.code() == code)
    }

    /// Whether the work is still to be done: a train has at most one such order.
    pub const fn is_open(self) -> bool {
        matches!(
            self,
            Self::Draft | Self::Approved | Self::Scheduled | Self::InProgress | Self::Waiting
        )
    }

    /// Whether work has begun and is not done.
    pub const fn is_started(self) -> bool {
        matches!(self, Self::InProgress | Self::Waiting)
    }
}

/// What is to be done.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Serialize, Deserialize)]
#[serde(rename_all = "snake_case")]
pub enum Task {
    /// "Clean the train in place."
    CleanInPlace,
    /// "Give the train a maintenance clean."
    MaintenanceClean,
}

impl Task {
    /// The phase in which a train is meanwhile.
    pub const fn phase(self) -> Phase {
        match self {
            Self::CleanInPlace => Phase::CleanInPlace,
            Self::MaintenanceClean => Phase::MaintenanceClean,
        }
    }
    /// Whether it begins a run and so gets a verdict.
    pub const fn is_judged(self) -> bool {
        matches!(self, Self::CleanInPlace)
    }
}

/// A step of the plan.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize)]
pub struct PlannedStep {
    /// The step; a rinse holds its checks.
    pub step: Step,
    /// Why it is there; `None` where a person planned it.
    pub why: Option<Why>,
    /// Mass of active substance to make up the solution, kg, where strength and volume are
    /// stated. The product weighs more: its strength is on the site's label.
    pub active_kg: Option<f64>,
}

/// What the work is accepted by. Each says here what is meant.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Serialize, Deserialize)]
#[serde(rename_all = "snake_case")]
pub enum Criterion {
    /// At least 95 % of the best permeability after a clean, over 24 to 48 hours of filtration:
    /// the verdict `restored`.
    Restored,
    /// Every rinse that keeps chemicals apart, and the last, passes its checks.
    RinsesPass,
    /// An integrity test is passed before the train returns to service.
    IntegrityTest,
}

/// What was done, as people say.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize)]
pub struct Actuals {
    /// From.
    pub start: Instant,
    /// Up to.
    pub end: Instant,
    /// The steps as done; rinses hold their readings.
    pub steps: Vec<Step>,
    /// Spent solution and rinse water, m3.
    pub waste_m3: Option<f64>,
    /// Hours of work of all people together.
    pub staff_hours: Option<f64>,
    /// What else there is to say.
    pub notes: Option<String>,
}

/// What the clean was worth: the computer's word, with its figures.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize)]
pub struct Outcome {
    /// The verdict.
    pub verdict: Verdict,
    /// From when it is known.
    pub known: Instant,
    /// Permeability after over the best after a clean, share.
    pub restored_share: Option<f64>,
    /// Share of the loss taken back, in resistance.
    pub regained_share: Option<f64>,
    /// Whether before and after were read at like flux.
    pub like_flux: Option<bool>,
    /// Before the clean.
    pub before: Option<Level>,
    /// After it.
    pub after: Option<Level>,
    /// What "after" is held against.
    pub best: Option<Baseline>,
}

/// An integrity test that somebody names when verifying.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize)]
pub struct IntegrityTest {
    /// Whether the train passed.
    pub passed: bool,
    /// When it was tested.
    pub at: Instant,
    /// Who tested.
    pub by: String,
}

/// In which role a person signs.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Serialize, Deserialize)]
#[serde(rename_all = "snake_case")]
pub enum Role {
    /// Does the work.
    Operator,
    /// Lets it happen, and when.
    ShiftEngineer,
    /// Says that it is in order.
    Process,
}

/// What a person can do to a work order.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord, Serialize, Deserialize)]
#[serde(rename_all = "snake_case")]
#[expect(missing_docs, reason = "the names are the paths'")]
pub enum ActKind {
    Approve,
    Schedule,
    Start,
    Wait,
    Complete,
    Verify,
    Reject,
    Cancel,
}

impl ActKind {
    /// All acts.
    pub const ALL: [Self; 8] = [
        Self::Approve,
        Self::Schedule,
        Self::Start,
        Self::Wait,
        Self::Complete,
        Self::Verify,
        Self::Reject,
        Self::Cancel,
    ];

    /// The last part of its path.
    pub const fn code(self) -> &'static str {
        match self {
            Self::Approve => "approve",
            Self::Schedule => "schedule",
            Self::Start => "start",
            Self::Wait => "wait",
            Self::Complete => "complete",
            Self::Verify => "verify",
            Self::Reject => "reject",
            Self::Cancel => "cancel",
        }
    }

    /// Where it leads.
    pub const fn leads_to(self) -> OrderState {
        match self {
            Self::Approve => OrderState::Approved,
            Self::Schedule => OrderState::Scheduled,
            Self::Start => OrderState::InProgress,
            Self::Wait => OrderState::Waiting,
            Self::Complete => OrderState::Done,
            Self::Verify => OrderState::Verified,
            Self::Reject => OrderState::Rejected,
            Self::Cancel => OrderState::Cancelled,
        }
    }

    /// In which role it is signed.
    pub const fn role(self) -> Role {
        match self {
            Self::Start | Self::Wait | Self::Complete => Role::Operator,
            Self::Approve | Self::Schedule | Self::Reject | Self::Cancel => Role::ShiftEngineer,
            Self::Verify => Role::Process,
        }
    }
}

/// A person's word.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize)]
pub struct SignOff {
    /// As what.
    pub role: Role,
    /// To what.
    pub act: ActKind,
    /// Who.
    pub by: String,
    /// When, by the wall clock.
    pub at: Instant,
    /// What they said to it.
    pub note: Option<String>,
}

/// Why an order was cancelled.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize)]
#[serde(rename_all = "snake_case")]
pub enum CancelledWhy {
    /// A person did, and said why.
    Person(String),
    /// What the draft stood on no longer holds.
    NoLongerHolds,
    /// The recommendation was declined before anybody approved the draft.
    Declined,
    /// The train was seen cleaned, and nobody completed the order.
    CleanedUnconfirmed,
}

/// What happened around an order without changing what was agreed.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize)]
pub struct Annotation {
    /// Data time of the look, or the wall clock for a record.
    pub at: Instant,
    /// What.
    pub note: Note,
}

/// Kinds of annotation. Worded for people in `answers`; each says here what is meant.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize)]
#[serde(rename_all = "snake_case")]
pub enum Note {
    /// By data that came or were corrected since, the reason for this order no longer holds. It
    /// goes on: whether to stop is for people to say.
    NoLongerHolds,
    /// The recommendation was declined; the approved order goes on until somebody cancels it.
    Declined,
    /// The train was cleaned in this span while the order was open.
    SeenCleaned(Span),
    /// Completed by the recorded cleaning of this id, which names the order.
    CompletedByCleaning(String),
    /// The work was recorded as done before anybody had approved it.
    DoneWithoutApproval,
    /// A recorded cleaning, by its id, names this order, which is closed.
    NamedAfterwards(String),
    /// By data that came or were corrected since, the verdict would now be this.
    VerdictWouldBe(Verdict),
}

/// The order in the maintenance system.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize)]
pub struct External {
    /// Which system.
    pub system: String,
    /// Its number there.
    pub number: String,
    /// Where to see it.
    pub url: Option<String>,
}

/// A work order. The store keeps it as it is here, whole, at every change.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize)]
pub struct WorkOrder {
    /// Spoken as `WO 41`.
    pub number: i64,
    /// Whose.
    pub train: TrainId,
    /// Where it stands.
    pub state: OrderState,
    /// The maintenance system's number of the train.
    pub asset: Option<String>,
    /// Where to find it: the train's name for people.
    pub location: String,
    /// What is to be done.
    pub task: Task,
    /// Who asked for it by hand; `None` for one drafted by the service.
    pub requested_by: Option<String>,
    /// Why it was asked for by hand.
    pub request: Option<String>,
    /// Data time at which it was raised; the wall clock for one by hand.
    pub raised: Instant,
    /// Why now.
    pub evidence: Vec<Evidence>,
    /// By when it is needed: the early date (P10) of the limit.
    pub needed_by: Option<Instant>,
    /// Latest start.
    pub start_by: Option<Instant>,
    /// When it is meant to be done.
    pub window: Option<Span>,
    /// Hours for which the train is out of service.
    pub hours_out: f64,
    /// The plan.
    pub steps: Vec<PlannedStep>,
    /// Isolation, preconditions, hazards, permits and protection.
    pub safety: Safety,
    /// Revision of the site's procedure, if it has one.
    pub procedure_revision: Option<String>,
    /// What it is accepted by.
    pub acceptance: Vec<Criterion>,
    /// When work began.
    pub started: Option<Instant>,
    /// What was done.
    pub actuals: Option<Actuals>,
    /// What it was worth.
    pub outcome: Option<Outcome>,
    /// The test before return to service.
    pub integrity_test: Option<IntegrityTest>,
    /// What people said, in order.
    pub sign_offs: Vec<SignOff>,
    /// Why it was rejected.
    pub rejected_why: Option<String>,
    /// Why it was cancelled.
    pub cancelled_why: Option<CancelledWhy>,
    /// The recommendation it serves.
    pub recommendation: Option<String>,
    /// The cleaning that it became. The caller of `complete` sets it to what it writes.
    pub cleaning: Option<String>,
    /// What happened around it.
    pub annotations: Vec<Annotation>,
    /// The order in the maintenance system.
    pub external: Option<External>,
}

impl WorkOrder {
    /// Adds an annotation unless the same was made before; tells whether it did.
    pub fn annotate(&mut self, at: Instant, note: Note) -> bool {
        let new = self.annotations.iter().all(|a| a.note != note);
        if new {
            self.annotations.push(Annotation { at, note });
        }
        new
    }
    /// The steps without their reasons.
    pub fn plain_steps(&self) -> Vec<Step> {
        self.steps.iter().map(|s| s.step.clone()).collect()
    }
}
