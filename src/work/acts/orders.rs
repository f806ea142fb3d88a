//! Work orders: asked for by hand, agreed, done, verified.

use super::chemicals::last_chemical;
use super::cleanings::NewCleaning;
use super::{ActError, Desk, Done, Kept, Word, words};
use crate::base::{Instant, Span, TrainId};
use crate::orders::{
    self, ActKind, Actuals, ByHand, Deed, External, OrderAct, PlanContext, WorkOrder, spoken,
};
use crate::plant::Train;
use crate::store::{Changes, ItemKind};
use crate::work::decide::is_live;

impl Kept for WorkOrder {
    const KIND: ItemKind = ItemKind::WorkOrder;
    const NAME: &'static str = "work_order";
    fn key(&self) -> String {
        self.number.to_string()
    }
    fn train(&self) -> Option<&TrainId> {
        Some(&self.train)
    }
    fn is_live(&self) -> bool {
        is_live(self)
    }
    fn stands(&self) -> &'static str {
        self.state.code()
    }
}

/// The word of history for an act.
const fn word_of(act: ActKind) -> &'static str {
    match act {
        ActKind::Approve => "approved",
        ActKind::Schedule => "scheduled",
        ActKind::Start => "started",
        ActKind::Wait => "waits",
        ActKind::Complete => "completed",
        ActKind::Verify => "verified",
        ActKind::Reject => "rejected",
        ActKind::Cancel => "cancelled",
    }
}

impl Desk<'_> {
    /// A person does something to a work order. Completing it records the cleaning, so that the
    /// caller has to let the days be worked again.
    ///
    /// # Errors
    /// If there is none of that number, or the act is refused.
    pub async fn on_order(&self, number: i64, act: &OrderAct) -> Result<Done<WorkOrder>, ActError> {
        let mut changes = self.begin().await?;
        let before: WorkOrder = self.get(&mut changes, &number.to_string()).await?;
        let train = self.train_of(&before.train)?;
        let before_clean = match &act.deed {
            Deed::Complete { actuals } => actuals.start,
            _ => self.now,
        };
        let last = last_chemical(self, &train.id, before_clean).await?;
        let context = PlanContext { train, last_chemical: last.as_ref() };
        let mut after = orders::apply(&before, act, &context, self.now)?;
        if after == before {
            return Ok(Done::known(before));
        }
        if let Deed::Complete { actuals } = &act.deed {
            after.cleaning = Some(self.record_done(&mut changes, &before, actuals, act).await?);
        }
        let word = Word {
            what: word_of(act.deed.kind()),
            by: act.by.trim(),
            reason: words(act.reason.as_deref()),
        };
        self.keep_act(&mut changes, Some(&before), &after, &word).await?;
        changes.commit().await?;
        Ok(Done::new(after))
    }

    /// The cleaning that a completed order became.
    async fn record_done(
        &self,
        changes: &mut Changes,
        order: &WorkOrder,
        done: &Actuals,
        act: &OrderAct,
    ) -> Result<String, ActError> {
        let span = Span::new(done.start, done.end);
        let told = self.cleanings(&order.train, Some(span)).await?;
        // Told before, without its order: one clean is one record.
        let kind = order.task.phase();
        if let Some(own) = told.into_iter().find(|c| c.span == span && c.kind == kind) {
            return Ok(own.id);
        }
        let new = NewCleaning {
            train: order.train.clone(),
            span,
            kind,
            steps: done.steps.clone(),
            work_order: Some(spoken(order.number)),
            reference: None,
            by: Some(act.by.trim().to_owned()),
        };
        Ok(self.put_cleaning(changes, &new).await?.item.id)
    }

    /// A person asks for work by hand. Said again with the same words while the draft stands, it
    /// is the same draft.
    ///
    /// # Errors
    /// If nobody is named, the train has another open order, or the window is none.
    pub async fn order_by_hand(
        &self,
        train: &Train,
        asked: ByHand,
    ) -> Result<Done<WorkOrder>, ActError> {
        let mut changes = self.begin().await?;
        let last = last_chemical(self, &train.id, self.now).await?;
        let live: Vec<WorkOrder> = self.live(Some(&train.id)).await?;
        let open = live.iter().find(|o| o.state.is_open());
        let make = |open: Option<i64>, number: i64, at: Instant| {
            orders::by_hand(train, asked.clone(), open, last.as_ref(), number, at)
        };
        if let Some(open) = open
            && make(None, open.number, open.raised).is_ok_and(|same| same == *open)
        {
            return Ok(Done::known(open.clone()));
        }
        let number = changes.next_order_number().await?;
        let order = make(open.map(|o| o.number), number, self.now)?;
        let word =
            Word { what: "drafted", by: asked.by.trim(), reason: words(asked.reason.as_deref()) };
        self.keep_act(&mut changes, None, &order, &word).await?;
        changes.commit().await?;
        Ok(Done::new(order))
    }

    /// Notes what an order is called in the maintenance system. `by` is the person who said so;
    /// the system itself where none is named.
    ///
    /// # Errors
    /// If there is none of that number.
    pub async fn set_external(
        &self,
        number: i64,
        external: &External,
        by: Option<&str>,
    ) -> Result<Done<WorkOrder>, ActError> {
        let mut changes = self.begin().await?;
        let before: WorkOrder = self.get(&mut changes, &number.to_string()).await?;
        if before.external.as_ref() == Some(external) {
            return Ok(Done::known(before));
        }
        let mut after = before.clone();
        after.external = Some(external.clone());
        let by = words(by).unwrap_or(&external.system);
        let word = Word { what: "linked", by, reason: None };
        self.keep_act(&mut changes, Some(&before), &after, &word).await?;
        changes.commit().await?;
        Ok(Done::new(after))
    }
}
