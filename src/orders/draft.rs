//! New orders: with a recommendation, or by hand.

use crate::advice::{AdvisedStep, Recommendation, Why};
use crate::base::{HOUR_US, Instant, Span, names_a_person};
use crate::plant::{Procedure, Step, Train};

use super::chemistry::LastChemical;
use super::order::{Criterion, OrderState, PlannedStep, Task, WorkOrder};
use super::plan::{planned_step, with_rinses};
use super::refusal::{Refusal, RefusalWhy};
use super::safety::safety;

/// What a person asks for.
#[derive(Clone, Debug, PartialEq)]
pub struct ByHand {
    /// What is to be done.
    pub task: Task,
    /// Who asks.
    pub by: String,
    /// Why.
    pub reason: Option<String>,
    /// The plan; `None` for the site's procedure.
    pub steps: Option<Vec<Step>>,
    /// By when.
    pub needed_by: Option<Instant>,
    /// When it suits.
    pub window: Option<Span>,
}

/// The draft that comes with a recommendation to clean in place. `last` is what may still be in
/// the train.
pub fn draft(
    train: &Train,
    recommendation: &Recommendation,
    last: Option<&LastChemical>,
    number: i64,
    at: Instant,
) -> WorkOrder {
    let steps = with_rinses(&recommendation.steps, last);
    let mut order = blank(train, Task::CleanInPlace, steps, number, at);
    order.evidence = recommendation.evidence.clone();
    order.needed_by = recommendation.clean_by.and_then(|d| d.p10);
    order.start_by = recommendation.start_by;
    order.recommendation = Some(recommendation.id.clone());
    order
}

/// A draft by hand. `open` is the number of the train's open order, if it has one. The plan is
/// taken as given: approving it checks it.
///
/// # Errors
/// If nobody is named, the train has an open order, or the window ends before it begins.
pub fn by_hand(
    train: &Train,
    asked: ByHand,
    open: Option<i64>,
    last: Option<&LastChemical>,
    number: i64,
    at: Instant,
) -> Result<WorkOrder, Refusal> {
    if !names_a_person(&asked.by) {
        return Err(Refusal::new("/by", RefusalWhy::NeedsPerson));
    }
    if let Some(open) = open {
        return Err(Refusal::new("/train", RefusalWhy::AnotherOpen(open)));
    }
    if asked.window.is_some_and(|w| w.from >= w.to || w.to <= at) {
        return Err(Refusal::new("/window", RefusalWhy::BadWindow));
    }
    let steps = match asked.steps {
        Some(steps) => steps.into_iter().map(|s| planned_step(s, None)).collect(),
        None => site_steps(train, asked.task, last),
    };
    let mut order = blank(train, asked.task, steps, number, at);
    order.requested_by = Some(asked.by.trim().to_owned());
    order.request = asked.reason.filter(|r| !r.trim().is_empty());
    order.needed_by = asked.needed_by;
    let ahead = train.clean_duration_us + train.clean_notice_us;
    order.start_by = asked.needed_by.map(|t| t.plus(-ahead));
    order.window = asked.window;
    Ok(order)
}

fn procedure(train: &Train, task: Task) -> Option<&Procedure> {
    train.procedures.iter().find(|p| p.kind == task.phase())
}

fn site_steps(train: &Train, task: Task, last: Option<&LastChemical>) -> Vec<PlannedStep> {
    let Some(own) = procedure(train, task) else { return Vec::new() };
    let advised: Vec<AdvisedStep> = own
        .steps
        .iter()
        .map(|s| AdvisedStep { step: s.clone(), why: Why::SiteProcedure })
        .collect();
    with_rinses(&advised, last)
}

fn blank(
    train: &Train,
    task: Task,
    steps: Vec<PlannedStep>,
    number: i64,
    at: Instant,
) -> WorkOrder {
    let plain: Vec<Step> = steps.iter().map(|s| s.step.clone()).collect();
    let mut acceptance = vec![Criterion::RinsesPass];
    if task.is_judged() {
        acceptance.push(Criterion::Restored);
    }
    if train.drinking_water {
        acceptance.push(Criterion::IntegrityTest);
    }
    WorkOrder {
        number,
        train: train.id.clone(),
        state: OrderState::Draft,
        asset: train.asset.clone(),
        location: train.name.clone(),
        task,
        requested_by: None,
        request: None,
        raised: at,
        evidence: Vec::new(),
        needed_by: None,
        start_by: None,
        window: None,
        hours_out: train.clean_duration_us as f64 / HOUR_US as f64,
        safety: safety(train, &plain),
        procedure_revision: procedure(train, task).and_then(|p| p.revision.clone()),
        steps,
        acceptance,
        started: None,
        actuals: None,
        outcome: None,
        integrity_test: None,
        sign_offs: Vec::new(),
        rejected_why: None,
        cancelled_why: None,
        recommendation: None,
        cleaning: None,
        annotations: Vec::new(),
        external: None,
    }
}
