//! What the computer does with the orders of a train at a look: it drafts, keeps drafts up to
//! date, takes in cleanings and verdicts, and cancels drafts that nobody needs any more. It
//! signs nothing, and never stops work that has begun.

use crate::advice::{Action, ClosedWhy, Recommendation};
use crate::analysis::{Clean, Origin, Run};
use crate::base::{DAY_US, Instant, Span};
use crate::plant::Train;

use super::chemistry::LastChemical;
use super::draft::draft;
use super::order::{ActKind, Actuals, CancelledWhy, Note, OrderState, WorkOrder};
use super::outcome::outcome;

/// A draft this old whose train was cleaned is cancelled; an approved order, this long after
/// the clean's end: people record a clean at the end of their shift.
const UNCONFIRMED_AFTER_US: i64 = DAY_US;

/// A recorded cleaning that names a work order.
#[derive(Clone, Debug, PartialEq)]
pub struct Named {
    /// The cleaning's id.
    pub cleaning: String,
    /// The order that it names.
    pub number: i64,
    /// What was done.
    pub actuals: Actuals,
}

/// What a look at a train's orders sees.
#[derive(Clone, Copy, Debug)]
pub struct OrderLook<'a> {
    /// The train.
    pub train: &'a Train,
    /// Its orders: those that are open, those done, and those that `named` names.
    pub orders: &'a [WorkOrder],
    /// Its newest recommendation to clean in place, open or closed.
    pub recommendation: Option<&'a Recommendation>,
    /// Its cleans.
    pub cleans: &'a [Clean],
    /// Its runs.
    pub runs: &'a [Run],
    /// Recorded cleanings that name an order.
    pub named: &'a [Named],
    /// What may still be in it.
    pub last_chemical: Option<&'a LastChemical>,
    /// Data time.
    pub as_of: Instant,
}

/// What happened to an order; where several things did, the last of this list.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord)]
pub enum OrderTurn {
    /// Something is to be known about it; what was agreed stays.
    Annotated,
    /// A draft follows its recommendation; an agreed order, its dates alone.
    Updated,
    /// The verdict is known, or is another before anybody verified.
    OutcomeKnown,
    /// A recorded cleaning completed it.
    Completed,
    /// Cancelled.
    Cancelled,
    /// Drafted. The caller notes its number on the recommendation.
    Opened,
}

/// A change of an order.
#[derive(Clone, Debug, PartialEq)]
pub struct OrderChange {
    /// What happened.
    pub turn: OrderTurn,
    /// The order as changed.
    pub order: WorkOrder,
}

type Rule = fn(&mut WorkOrder, &OrderLook) -> Option<OrderTurn>;

/// What is done with each order, in this order.
const RULES: [Rule; 4] = [take_cleaning, take_outcome, see_cleaned, follow];

/// Looks at the orders of a train.
pub fn step(look: &OrderLook, next_number: &mut dyn FnMut() -> i64) -> Vec<OrderChange> {
    let mut out = Vec::new();
    let mut open = false;
    for order in look.orders {
        let mut next = order.clone();
        let turn = RULES.iter().filter_map(|rule| rule(&mut next, look)).max();
        open |= next.state.is_open();
        out.extend(turn.map(|turn| OrderChange { turn, order: next }));
    }
    let wanted = look.recommendation.filter(|r| r.action == Action::CleanInPlace && r.is_open());
    if let Some(wanted) = wanted.filter(|r| !open && r.work_order.is_none()) {
        let order = draft(look.train, wanted, look.last_chemical, next_number(), look.as_of);
        out.push(OrderChange { turn: OrderTurn::Opened, order });
    }
    out
}

/// A cleaning that names the order completes it, whatever was agreed: it has happened.
fn take_cleaning(order: &mut WorkOrder, look: &OrderLook) -> Option<OrderTurn> {
    let mut turn = None;
    let number = order.number;
    for named in look.named.iter().filter(|n| n.number == number) {
        if order.cleaning.as_ref() == Some(&named.cleaning) {
            continue;
        }
        if !order.state.is_open() {
            let new = order.annotate(look.as_of, Note::NamedAfterwards(named.cleaning.clone()));
            turn = turn.max(new.then_some(OrderTurn::Annotated));
            continue;
        }
        if !order.sign_offs.iter().any(|s| s.act == ActKind::Approve) {
            order.annotate(look.as_of, Note::DoneWithoutApproval);
        }
        order.annotate(look.as_of, Note::CompletedByCleaning(named.cleaning.clone()));
        order.started = order.started.or(Some(named.actuals.start));
        order.actuals = Some(named.actuals.clone());
        order.cleaning = Some(named.cleaning.clone());
        order.state = OrderState::Done;
        turn = Some(OrderTurn::Completed);
    }
    turn
}

fn take_outcome(order: &mut WorkOrder, look: &OrderLook) -> Option<OrderTurn> {
    if !matches!(order.state, OrderState::Done | OrderState::Verified) {
        return None;
    }
    let told = look.runs.iter().rev().find(|r| is_of(order, r))?;
    let now = outcome(told, look.as_of)?;
    let verdict = now.verdict;
    match &order.outcome {
        Some(known) if known.verdict == verdict => None,
        // What a person acknowledged stays as they saw it.
        Some(_) if order.state == OrderState::Verified => order
            .annotate(look.as_of, Note::VerdictWouldBe(verdict))
            .then_some(OrderTurn::Annotated),
        _ => {
            order.outcome = Some(now);
            Some(OrderTurn::OutcomeKnown)
        }
    }
}

/// Whether a run began with the order's clean.
fn is_of(order: &WorkOrder, run: &Run) -> bool {
    if let (Origin::Recorded(id), Some(own)) = (&run.origin, &order.cleaning) {
        return id == own;
    }
    let clean = Span::new(run.clean_start, run.start);
    order.actuals.as_ref().is_some_and(|a| clean.overlaps(Span::new(a.start, a.end)))
}

fn see_cleaned(order: &mut WorkOrder, look: &OrderLook) -> Option<OrderTurn> {
    if !order.state.is_open() || !order.task.is_judged() {
        return None;
    }
    let seen = look.cleans.iter().rev().find(|c| c.end > order.raised && c.end <= look.as_of)?;
    if order.state.is_started() {
        let span = Span::new(seen.start, seen.end);
        let new = order.annotate(look.as_of, Note::SeenCleaned(span));
        return new.then_some(OrderTurn::Annotated);
    }
    let since =
        if order.state == OrderState::Draft { order.raised } else { seen.end.max(order.raised) };
    if look.as_of.since(since) <= UNCONFIRMED_AFTER_US {
        return None;
    }
    order.state = OrderState::Cancelled;
    order.cancelled_why = Some(CancelledWhy::CleanedUnconfirmed);
    Some(OrderTurn::Cancelled)
}

/// An open order follows the recommendation that it serves.
fn follow(order: &mut WorkOrder, look: &OrderLook) -> Option<OrderTurn> {
    let r = look.recommendation.filter(|r| r.action == Action::CleanInPlace)?;
    if !order.state.is_open() || !order.task.is_judged() {
        return None;
    }
    match r.closed {
        Some(closed) if order.recommendation.as_ref() == Some(&r.id) => {
            given_up(order, closed.why, look)
        }
        Some(_) => None,
        None => kept_up(order, r, look),
    }
}

/// The recommendation was closed: a draft of ours goes with it, what people took up does not.
fn given_up(order: &mut WorkOrder, why: ClosedWhy, look: &OrderLook) -> Option<OrderTurn> {
    let (note, cancelled) = match why {
        ClosedWhy::Cleaned => return None,
        ClosedWhy::NoLongerHolds => (Note::NoLongerHolds, CancelledWhy::NoLongerHolds),
        ClosedWhy::Declined => (Note::Declined, CancelledWhy::Declined),
    };
    if order.state == OrderState::Draft && order.requested_by.is_none() {
        order.state = OrderState::Cancelled;
        order.cancelled_why = Some(cancelled);
        return Some(OrderTurn::Cancelled);
    }
    order.annotate(look.as_of, note).then_some(OrderTurn::Annotated)
}

/// One order a train: a new recommendation takes up the one that is open. A draft of ours is
/// worked again; an agreed order moves its dates, never its plan; begun work stays as it is.
fn kept_up(order: &mut WorkOrder, r: &Recommendation, look: &OrderLook) -> Option<OrderTurn> {
    if order.state.is_started() {
        return None;
    }
    let before = order.clone();
    let fresh = draft(look.train, r, look.last_chemical, order.number, order.raised);
    order.recommendation = fresh.recommendation;
    if order.requested_by.is_none() {
        order.needed_by = fresh.needed_by;
        order.start_by = fresh.start_by;
        if order.state == OrderState::Draft {
            order.evidence = fresh.evidence;
            order.hours_out = fresh.hours_out;
            order.steps = fresh.steps;
            order.safety = fresh.safety;
            order.procedure_revision = fresh.procedure_revision;
        }
    }
    (*order != before).then_some(OrderTurn::Updated)
}
