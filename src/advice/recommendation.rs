//! A recommendation and its life: raised, updated, accepted, deferred, declined, closed.

use serde::{Deserialize, Serialize};

use crate::analysis::{Dates, Evidence, Measure, Standing};
use crate::base::{DAY_US, Instant, TrainId};

use super::{Action, AdvisedStep, ClearsWhen, Proposal, StepsFrom, Urgency};

/// A declined recommendation is not raised again for this long unless its urgency rises.
const DECLINED_FOR_US: i64 = 7 * DAY_US;

/// A recommendation. The store keeps it as it is here, whole, at every change.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize)]
pub struct Recommendation {
    /// Its id.
    pub id: String,
    /// Whose.
    pub train: TrainId,
    /// What to do.
    pub action: Action,
    /// How soon.
    pub urgency: Urgency,
    /// Data time at which it was raised.
    pub raised: Instant,
    /// Data time of the last look.
    pub as_of: Instant,
    /// Dates of the limit that binds.
    pub clean_by: Option<Dates>,
    /// Latest start.
    pub start_by: Option<Instant>,
    /// On what evidence.
    pub evidence: Vec<Evidence>,
    /// What clears it.
    pub clears_when: ClearsWhen,
    /// What to clean with.
    pub steps: Vec<AdvisedStep>,
    /// Where the steps come from.
    pub steps_from: StepsFrom,
    /// What people said to it, in order.
    pub decisions: Vec<Decision>,
    /// Silent until then, by the wall clock.
    pub silent_until: Option<Instant>,
    /// Its work order.
    pub work_order: Option<i64>,
    /// When and why it was closed; `None` while open.
    pub closed: Option<Closed>,
}

impl Recommendation {
    /// Whether it is open.
    pub fn is_open(&self) -> bool {
        self.closed.is_none()
    }
}

/// What a person said to a recommendation.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize)]
pub struct Decision {
    /// What.
    pub act: Act,
    /// Who.
    pub by: String,
    /// When, by the wall clock.
    pub at: Instant,
    /// Why.
    pub reason: String,
    /// Until when, for a deferral.
    pub until: Option<Instant>,
}

/// What a person can say to a recommendation.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Serialize, Deserialize)]
#[serde(rename_all = "snake_case")]
pub enum Act {
    /// Taken note of and meant to be done; approves nothing.
    Accept,
    /// Not now.
    Defer,
    /// Not at all.
    Decline,
}

/// When and why a recommendation was closed.
#[derive(Clone, Copy, Debug, PartialEq, Serialize, Deserialize)]
pub struct Closed {
    /// Data time, or the wall clock where a person closed it.
    pub at: Instant,
    /// Why.
    pub why: ClosedWhy,
}

/// Why a recommendation was closed.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Serialize, Deserialize)]
#[serde(rename_all = "snake_case")]
pub enum ClosedWhy {
    /// The train was cleaned.
    Cleaned,
    /// What it stood on no longer holds.
    NoLongerHolds,
    /// A person declined it.
    Declined,
}

/// A change of a recommendation.
#[derive(Clone, Debug, PartialEq)]
pub enum Change {
    /// Raised.
    Raised(Recommendation),
    /// Something that matters changed.
    Updated(Recommendation),
    /// Closed.
    Closed(Recommendation),
}

impl Change {
    /// The recommendation as changed.
    pub fn item(&self) -> &Recommendation {
        match self {
            Self::Raised(r) | Self::Updated(r) | Self::Closed(r) => r,
        }
    }
}

/// Holds proposals for a train against its recommendations. `known` are the open ones and those
/// declined in the last seven days.
pub fn step(
    standing: &Standing,
    proposals: &[Proposal],
    known: &[Recommendation],
    new_id: &mut dyn FnMut() -> String,
) -> Vec<Change> {
    let now = standing.as_of;
    let mut out = Vec::new();
    for proposal in proposals {
        match known.iter().find(|r| r.is_open() && r.action == proposal.action) {
            Some(open) => {
                let next = updated(open, proposal, now);
                if matters(open, &next) {
                    out.push(Change::Updated(next));
                }
            }
            None if declined(known, proposal, now) => {}
            None => out.push(Change::Raised(raised(standing, proposal, new_id()))),
        }
    }
    for open in known.iter().filter(|r| r.is_open()) {
        let still = proposals.iter().any(|p| p.action == open.action);
        if still || standing.in_clean.is_some() {
            continue;
        }
        let cleaned = standing.run_start.is_some_and(|s| s > open.raised);
        let why = if cleaned { ClosedWhy::Cleaned } else { ClosedWhy::NoLongerHolds };
        let mut next = open.clone();
        next.as_of = now;
        next.closed = Some(Closed { at: now, why });
        out.push(Change::Closed(next));
    }
    out
}

fn raised(standing: &Standing, p: &Proposal, id: String) -> Recommendation {
    Recommendation {
        id,
        train: standing.train.clone(),
        action: p.action,
        urgency: p.urgency,
        raised: standing.as_of,
        as_of: standing.as_of,
        clean_by: p.clean_by,
        start_by: p.start_by,
        evidence: p.evidence.clone(),
        clears_when: p.clears_when,
        steps: p.steps.clone(),
        steps_from: p.steps_from,
        decisions: Vec::new(),
        silent_until: None,
        work_order: None,
        closed: None,
    }
}

fn updated(open: &Recommendation, p: &Proposal, now: Instant) -> Recommendation {
    let mut next = open.clone();
    next.as_of = now;
    next.urgency = p.urgency;
    next.clean_by = p.clean_by;
    next.start_by = p.start_by;
    next.evidence = p.evidence.clone();
    next.steps = p.steps.clone();
    next.steps_from = p.steps_from;
    // A person's "not now" was said to another urgency.
    if next.urgency > open.urgency {
        next.silent_until = None;
    }
    next
}

/// Whether a change is worth an entry: the dates move once a day, the evidence's value every
/// hour; by a point of loss, or a fiftieth of a TMP, it has moved.
fn matters(open: &Recommendation, next: &Recommendation) -> bool {
    let kinds = |r: &Recommendation| -> Vec<_> {
        r.evidence.iter().map(|e| (e.finding, e.limit_kind)).collect()
    };
    open.urgency != next.urgency
        || open.clean_by != next.clean_by
        || open.start_by != next.start_by
        || open.steps != next.steps
        || kinds(open) != kinds(next)
        || open.evidence.iter().zip(&next.evidence).any(|(a, b)| moved(a, b))
}

fn moved(old: &Evidence, new: &Evidence) -> bool {
    let step = match new.measure {
        Measure::Share => 0.01,
        Measure::Pressure => 0.02 * old.value.abs(),
        Measure::Count => 0.5,
    };
    (new.value - old.value).abs() > step
}

fn declined(known: &[Recommendation], p: &Proposal, now: Instant) -> bool {
    known.iter().any(|r| {
        r.action == p.action
            && p.urgency <= r.urgency
            && r.closed
                .is_some_and(|c| c.why == ClosedWhy::Declined && now.since(c.at) < DECLINED_FOR_US)
    })
}

/// Why a person's act on a recommendation is refused.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum ActRefused {
    /// It is closed.
    NotOpen,
    /// A deferral needs a moment in the future.
    NeedsUntil,
}

/// A person's act. `at` is the wall clock.
///
/// # Errors
/// If the recommendation is closed, or a deferral has no moment after now.
pub fn act(
    recommendation: &Recommendation,
    act: Act,
    by: &str,
    reason: &str,
    until: Option<Instant>,
    at: Instant,
) -> Result<Recommendation, ActRefused> {
    if !recommendation.is_open() {
        return Err(ActRefused::NotOpen);
    }
    if act == Act::Defer && until.is_none_or(|u| u <= at) {
        return Err(ActRefused::NeedsUntil);
    }
    let mut next = recommendation.clone();
    let until = until.filter(|_| act == Act::Defer);
    next.decisions.push(Decision { act, by: by.to_owned(), at, reason: reason.to_owned(), until });
    next.silent_until = until;
    if act == Act::Decline {
        next.closed = Some(Closed { at, why: ClosedWhy::Declined });
    }
    Ok(next)
}
