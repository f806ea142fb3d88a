//! Stage 5: what is open, and what an hour changes of it. Never again for a past instant.

use std::collections::BTreeMap;

use serde::Serialize;

use crate::advice::{self, Action, Case, Change, Recommendation, Urgency};
use crate::alarms::{self, Alarm, AlarmKind, Look, Scope, Turn};
use crate::analysis::{self, DERIVATION_VERSION, Finding, Standing};
use crate::base::{DAY_US, Instant, TrainId};
use crate::orders::{self, OrderLook, OrderTurn, WorkOrder};
use crate::plant::{Phase, Plant};
use crate::store::{Changes, Entry, ItemFilter, ItemKind, Said, Store, StoreError, new_id};

use super::Cause;
use super::train::TrainWork;

/// Closed things of the last days are known, so that a declined recommendation stays declined.
const CLOSED_KNOWN_US: i64 = 8 * DAY_US;
/// More than this many are not open at once in any plant.
const MANY: u32 = 10_000;
/// Alarms that follow from what stands for a train; the others have their own looks.
const OF_STANDING: [AlarmKind; 2] = [AlarmKind::CleanLimit, AlarmKind::CleanDoubtful];

/// What is open, and where changes of it go.
pub struct Decisions<'a> {
    plant: &'a Plant,
    cause: Cause<'a>,
    recommendations: BTreeMap<TrainId, Vec<Recommendation>>,
    alarms: Vec<Alarm>,
    orders: BTreeMap<TrainId, Vec<WorkOrder>>,
    next_number: i64,
}

/// One look at a train.
pub struct Instance<'a> {
    /// The train.
    pub train: &'a TrainWork<'a>,
    /// What stands.
    pub standing: &'a Standing,
    /// Why a past instant is looked at again, if it is.
    pub reason: Option<&'a str>,
}

impl<'a> Decisions<'a> {
    /// Loads what is open.
    pub async fn load(
        store: &Store,
        plant: &'a Plant,
        cause: &Cause<'a>,
        changes: &mut Changes,
    ) -> Result<Self, StoreError> {
        let open = ItemFilter { open: Some(true), limit: MANY, ..Default::default() };
        let closed = ItemFilter {
            open: Some(false),
            changed_since: Some(cause.now.plus(-CLOSED_KNOWN_US)),
            limit: MANY,
            ..Default::default()
        };
        let mut recommendations: BTreeMap<TrainId, Vec<Recommendation>> = BTreeMap::new();
        for filter in [&open, &closed] {
            let kind = ItemKind::Recommendation;
            for (_, r) in store.items::<Recommendation>(&plant.id, kind, filter).await? {
                recommendations.entry(r.train.clone()).or_default().push(r);
            }
        }
        let alarms = store.items(&plant.id, ItemKind::Alarm, &open).await?;
        let mut orders: BTreeMap<TrainId, Vec<WorkOrder>> = BTreeMap::new();
        for (_, o) in store.items::<WorkOrder>(&plant.id, ItemKind::WorkOrder, &open).await? {
            orders.entry(o.train.clone()).or_default().push(o);
        }
        Ok(Self {
            plant,
            cause: *cause,
            recommendations,
            alarms: alarms.into_iter().map(|(_, a)| a).collect(),
            orders,
            next_number: changes.next_order_number().await?,
        })
    }

    /// Decides one train at one instant.
    pub async fn decide(
        &mut self,
        look: &Instance<'_>,
        changes: &mut Changes,
    ) -> Result<(), StoreError> {
        let findings = analysis::find(&look.train.site, look.standing);
        let mut advised = self.advise(look, &findings);
        let ordered = self.order(look);
        for (turn, order) in &ordered {
            if *turn == OrderTurn::Opened {
                self.link(order, &mut advised);
            }
        }
        for (word, r) in &advised {
            let entry = self.entry(look, ItemKind::Recommendation, &r.id, r.is_open(), word, r)?;
            changes.add_entry(&entry).await?;
        }
        for (turn, order) in &ordered {
            let (number, open) = (order.number.to_string(), is_live(order));
            let word = order_word(*turn);
            let entry = self.entry(look, ItemKind::WorkOrder, &number, open, word, order)?;
            changes.add_entry(&entry).await?;
        }
        for (turn, alarm) in self.sound(look, &findings) {
            let (open, word) = (!alarm.is_normal(), turn.code());
            let entry = self.entry(look, ItemKind::Alarm, &alarm.id, open, word, &alarm)?;
            changes.add_entry(&entry).await?;
        }
        Ok(())
    }

    /// Recommendations of the train, with what became of each.
    fn advise(
        &mut self,
        look: &Instance<'_>,
        findings: &[Finding],
    ) -> Vec<(&'static str, Recommendation)> {
        let standing = look.standing;
        let known = self.recommendations.entry(standing.train.clone()).or_default();
        let open: Vec<(Action, Urgency)> =
            known.iter().filter(|r| r.is_open()).map(|r| (r.action, r.urgency)).collect();
        let site = &look.train.site;
        let case = Case { plant: self.plant, site, standing, findings, open: &open };
        let proposals = advice::propose(&case);
        let mut out = Vec::new();
        for change in advice::step(standing, &proposals, known, &mut new_id) {
            let word = advice_word(&change);
            let item = change.item().clone();
            match known.iter_mut().find(|r| r.id == item.id) {
                Some(slot) => *slot = item.clone(),
                None => known.push(item.clone()),
            }
            out.push((word, item));
        }
        out
    }

    /// Work orders of the train, with what became of each.
    fn order(&mut self, look: &Instance<'_>) -> Vec<(OrderTurn, WorkOrder)> {
        let standing = look.standing;
        let known = self.orders.entry(standing.train.clone()).or_default();
        let newest = self
            .recommendations
            .get(&standing.train)
            .into_iter()
            .flatten()
            .filter(|r| r.action == Action::CleanInPlace)
            .max_by_key(|r| (r.raised, r.is_open()));
        let assessed = standing.assessed.unwrap_or(Instant::from_micros(i64::MIN));
        let last_chemical = look.train.last_chemical(standing.as_of);
        let look = OrderLook {
            train: look.train.site.train,
            orders: known,
            recommendation: newest,
            cleans: &look.train.ended_cleans(standing.as_of),
            runs: &look.train.runs_known(assessed),
            named: &look.train.named(standing.as_of),
            last_chemical: last_chemical.as_ref(),
            as_of: standing.as_of,
        };
        let mut number = self.next_number;
        let mut next_number = || {
            number += 1;
            number - 1
        };
        let mut out = Vec::new();
        for change in orders::step(&look, &mut next_number) {
            out.push((change.turn, change.order));
        }
        self.next_number = number;
        for (_, order) in &out {
            match known.iter_mut().find(|o| o.number == order.number) {
                Some(slot) => *slot = order.clone(),
                None => known.push(order.clone()),
            }
        }
        known.retain(is_live);
        out
    }

    /// Notes a new order's number on its recommendation.
    fn link(&mut self, order: &WorkOrder, advised: &mut Vec<(&'static str, Recommendation)>) {
        let known = self.recommendations.get_mut(&order.train).into_iter().flatten();
        for r in known.filter(|r| order.recommendation.as_ref() == Some(&r.id)) {
            r.work_order = Some(order.number);
            match advised.iter_mut().find(|(_, a)| a.id == r.id) {
                Some((_, a)) => a.work_order = r.work_order,
                None => advised.push(("updated", r.clone())),
            }
        }
    }

    /// Alarms of the train, with what became of each.
    fn sound(&mut self, look: &Instance<'_>, findings: &[Finding]) -> Vec<(Turn, Alarm)> {
        let standing = look.standing;
        let phase = look.train.phase_before(standing.as_of).unwrap_or(Phase::Unknown);
        let conditions = alarms::conditions(standing, findings, phase);
        let scope = Scope { kinds: &OF_STANDING, train: Some(&standing.train), source: None };
        let look = Look { scope, as_of: standing.as_of, now: self.cause.now };
        let mut out = Vec::new();
        for change in alarms::step(&self.alarms, &conditions, &look, &mut new_id) {
            match self.alarms.iter_mut().find(|a| a.id == change.alarm.id) {
                Some(slot) => *slot = change.alarm.clone(),
                None => self.alarms.push(change.alarm.clone()),
            }
            out.push((change.turn, change.alarm));
        }
        self.alarms.retain(|a| !a.is_normal());
        out
    }

    fn entry<T: Serialize>(
        &self,
        look: &Instance<'_>,
        kind: ItemKind,
        item: &str,
        open: bool,
        word: &str,
        content: &T,
    ) -> Result<Entry, StoreError> {
        let said = Said {
            change: word.to_owned(),
            as_of: Some(look.standing.as_of),
            by: None,
            reason: look.reason.map(str::to_owned),
            receipt: self.cause.receipt.map(str::to_owned),
        };
        Entry::new(
            kind,
            item,
            Some(&look.standing.train),
            open,
            content,
            said,
            self.cause.now,
            &self.plant.revision,
            DERIVATION_VERSION,
        )
    }
}

/// Whether anything can still happen to an order: it is open, or done and not verified.
pub fn is_live(order: &WorkOrder) -> bool {
    order.state.is_open() || order.state == orders::OrderState::Done
}

const fn advice_word(change: &Change) -> &'static str {
    match change {
        Change::Raised(_) => "raised",
        Change::Updated(_) => "updated",
        Change::Closed(_) => "closed",
    }
}

const fn order_word(turn: OrderTurn) -> &'static str {
    match turn {
        OrderTurn::Annotated => "annotated",
        OrderTurn::Updated => "updated",
        OrderTurn::OutcomeKnown => "outcome_known",
        OrderTurn::Completed => "completed",
        OrderTurn::Cancelled => "cancelled",
        OrderTurn::Opened => "drafted",
    }
}
