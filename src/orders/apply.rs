//! What people may do to a work order, from where, and on what terms.

use crate::analysis::Verdict;
use crate::base::{Instant, Span, names_a_person};
use crate::plant::Train;

use super::chemistry::LastChemical;
use super::order::{ActKind, Actuals, CancelledWhy, IntegrityTest, OrderState, SignOff, WorkOrder};
use super::plan;
use super::refusal::{Refusal, RefusalWhy};
use super::rinses;

/// A person's act.
#[derive(Clone, Debug, PartialEq)]
pub struct OrderAct {
    /// Who.
    pub by: String,
    /// Why, or what there is to say to it; required to wait, reject and cancel.
    pub reason: Option<String>,
    /// What.
    pub deed: Deed,
}

/// What is done, with what it needs.
#[derive(Clone, Debug, PartialEq)]
#[expect(missing_docs, reason = "the names are the paths'")]
pub enum Deed {
    Approve,
    Schedule {
        /// When it is meant to be done.
        window: Span,
    },
    Start {
        /// When work began; `None` for now.
        at: Option<Instant>,
    },
    Wait,
    Complete {
        /// What was done.
        actuals: Actuals,
    },
    Verify {
        /// The test before return to service; required on drinking water.
        integrity_test: Option<IntegrityTest>,
    },
    Reject,
    Cancel,
}

impl Deed {
    /// Its kind.
    pub const fn kind(&self) -> ActKind {
        match self {
            Self::Approve => ActKind::Approve,
            Self::Schedule { .. } => ActKind::Schedule,
            Self::Start { .. } => ActKind::Start,
            Self::Wait => ActKind::Wait,
            Self::Complete { .. } => ActKind::Complete,
            Self::Verify { .. } => ActKind::Verify,
            Self::Reject => ActKind::Reject,
            Self::Cancel => ActKind::Cancel,
        }
    }
}

/// What a plan is checked against.
#[derive(Clone, Copy, Debug)]
pub struct PlanContext<'a> {
    /// The train.
    pub train: &'a Train,
    /// What may still be in it from before this clean.
    pub last_chemical: Option<&'a LastChemical>,
}

/// The acts that a state allows.
pub const fn transitions(state: OrderState) -> &'static [ActKind] {
    use ActKind::*;
    match state {
        OrderState::Draft => &[Approve, Reject, Cancel],
        OrderState::Approved => &[Schedule, Start, Cancel],
        OrderState::Scheduled => &[Start, Wait, Cancel],
        OrderState::InProgress => &[Wait, Complete],
        OrderState::Waiting => &[Start, Cancel],
        OrderState::Done => &[Verify],
        OrderState::Verified | OrderState::Rejected | OrderState::Cancelled => &[],
    }
}

/// Does a person's act. `at` is the wall clock. The same act said again by the same person
/// changes nothing.
///
/// # Errors
/// If nobody is named, the state does not allow it, or its terms are not met; says which field
/// and what can be done instead.
pub fn apply(
    order: &WorkOrder,
    act: &OrderAct,
    context: &PlanContext,
    at: Instant,
) -> Result<WorkOrder, Refusal> {
    if !names_a_person(&act.by) {
        return Err(Refusal::new("/by", RefusalWhy::NeedsPerson));
    }
    let kind = act.deed.kind();
    if repeats(order, act) {
        return Ok(order.clone());
    }
    if !transitions(order.state).contains(&kind) {
        return Err(Refusal::new("", RefusalWhy::NotFrom { state: order.state, act: kind }));
    }
    let mut next = order.clone();
    match &act.deed {
        Deed::Approve => plan::check(&order.plain_steps(), context.train, context.last_chemical)?,
        Deed::Schedule { window } => schedule(&mut next, *window, at)?,
        Deed::Start { at: began } => start(&mut next, *began, context, at)?,
        Deed::Wait => {
            reason(act)?;
        }
        Deed::Complete { actuals } => complete(&mut next, actuals, context, at)?,
        Deed::Verify { integrity_test } => verify(&mut next, integrity_test, context, at)?,
        Deed::Reject => next.rejected_why = Some(reason(act)?),
        Deed::Cancel => next.cancelled_why = Some(CancelledWhy::Person(reason(act)?)),
    }
    next.state = kind.leads_to();
    next.sign_offs.push(sign_off(act, at));
    Ok(next)
}

fn said(act: &OrderAct) -> Option<String> {
    act.reason.as_deref().map(str::trim).filter(|r| !r.is_empty()).map(str::to_owned)
}

fn reason(act: &OrderAct) -> Result<String, Refusal> {
    said(act).ok_or_else(|| Refusal::new("/reason", RefusalWhy::NeedsReason))
}

fn sign_off(act: &OrderAct, at: Instant) -> SignOff {
    let kind = act.deed.kind();
    SignOff { role: kind.role(), act: kind, by: act.by.trim().to_owned(), at, note: said(act) }
}

/// Whether the act was the last one already.
fn repeats(order: &WorkOrder, act: &OrderAct) -> bool {
    let Some(last) = order.sign_offs.last() else { return false };
    if *last != sign_off(act, last.at) || order.state != last.act.leads_to() {
        return false;
    }
    match &act.deed {
        Deed::Schedule { window } => order.window == Some(*window),
        Deed::Start { at: Some(began) } => order.started == Some(*began),
        Deed::Complete { actuals } => order.actuals.as_ref() == Some(actuals),
        Deed::Verify { integrity_test: Some(test) } => order.integrity_test.as_ref() == Some(test),
        _ => true,
    }
}

fn schedule(next: &mut WorkOrder, window: Span, at: Instant) -> Result<(), Refusal> {
    if window.from >= window.to || window.to <= at {
        return Err(Refusal::new("/window", RefusalWhy::BadWindow));
    }
    next.window = Some(window);
    Ok(())
}

fn start(
    next: &mut WorkOrder,
    began: Option<Instant>,
    context: &PlanContext,
    at: Instant,
) -> Result<(), Refusal> {
    let began = began.unwrap_or(at);
    if began > at {
        return Err(Refusal::new("/at", RefusalWhy::BadTimes));
    }
    // Between approval and start, or while work waited, the train may have seen another chemical.
    plan::check(&next.plain_steps(), context.train, context.last_chemical)?;
    next.started = next.started.or(Some(began));
    Ok(())
}

fn complete(
    next: &mut WorkOrder,
    actuals: &Actuals,
    context: &PlanContext,
    at: Instant,
) -> Result<(), Refusal> {
    if actuals.end <= actuals.start || actuals.end > at {
        return Err(Refusal::new("/actuals/end", RefusalWhy::BadTimes));
    }
    rinses::check_done(&next.plain_steps(), actuals, context.last_chemical)?;
    next.actuals = Some(actuals.clone());
    Ok(())
}

fn verify(
    next: &mut WorkOrder,
    test: &Option<IntegrityTest>,
    context: &PlanContext,
    at: Instant,
) -> Result<(), Refusal> {
    if next.outcome.is_none() && next.task.is_judged() {
        return Err(Refusal::new("", RefusalWhy::VerdictNotKnown));
    }
    if let Some(test) = test {
        integrity(next, test, at)?;
        next.integrity_test = Some(test.clone());
    }
    let doubtful = next.outcome.as_ref().is_some_and(|o| o.verdict == Verdict::Doubtful);
    if (context.train.drinking_water || doubtful) && next.integrity_test.is_none() {
        return Err(Refusal::new("/integrity_test", RefusalWhy::IntegrityTestMissing));
    }
    Ok(())
}

/// A test that was not passed verifies nothing, whatever the water is for.
fn integrity(order: &WorkOrder, test: &IntegrityTest, at: Instant) -> Result<(), Refusal> {
    let pointer = |field: &str| format!("/integrity_test/{field}");
    if !names_a_person(&test.by) {
        return Err(Refusal::new(pointer("by"), RefusalWhy::NeedsPerson));
    }
    if test.at > at || order.actuals.as_ref().is_some_and(|a| test.at < a.end) {
        return Err(Refusal::new(pointer("at"), RefusalWhy::IntegrityTestMissing));
    }
    if !test.passed {
        return Err(Refusal::new(pointer("passed"), RefusalWhy::IntegrityTestFailed));
    }
    Ok(())
}
