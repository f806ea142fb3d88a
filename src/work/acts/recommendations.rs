//! Recommendations: accepted, deferred, declined.

use super::{ActError, Desk, Done, Kept, Word, happened, person, words};
use crate::advice::{self, Act, Decision, Recommendation};
use crate::base::{Instant, TrainId};
use crate::orders::{self, OrderLook, OrderTurn, WorkOrder};
use crate::store::{Changes, ItemKind};

impl Kept for Recommendation {
    const KIND: ItemKind = ItemKind::Recommendation;
    const NAME: &'static str = "recommendation";
    fn key(&self) -> String {
        self.id.clone()
    }
    fn train(&self) -> Option<&TrainId> {
        Some(&self.train)
    }
    fn is_live(&self) -> bool {
        self.is_open()
    }
    fn stands(&self) -> &'static str {
        match (self.is_open(), self.silent_until) {
            (false, _) => "closed",
            (true, Some(_)) => "silent",
            (true, None) => "open",
        }
    }
}

impl Desk<'_> {
    /// A person accepts, defers or declines a recommendation. To defer and to decline want a
    /// reason. Declining cancels the draft that came with it.
    ///
    /// # Errors
    /// If there is none of that id, nobody or no reason is named, it is closed, or a deferral
    /// has no end in the future.
    pub async fn decide(
        &self,
        id: &str,
        act: Act,
        by: &str,
        reason: Option<&str>,
        until: Option<Instant>,
    ) -> Result<Done<Recommendation>, ActError> {
        let (by, reason) = (person(by)?, words(reason));
        if reason.is_none() && act != Act::Accept {
            return Err(ActError::NeedsReason);
        }
        let mut changes = self.begin().await?;
        let before: Recommendation = self.get(&mut changes, id).await?;
        let until = until.filter(|_| act == Act::Defer);
        let said = Decision {
            act,
            by: by.to_owned(),
            at: self.now,
            reason: reason.unwrap_or_default().to_owned(),
            until,
        };
        if before.decisions.last().is_some_and(|d| Decision { at: self.now, ..d.clone() } == said) {
            return Ok(Done::known(before));
        }
        let after = advice::act(&before, act, by, &said.reason, until, self.now)?;
        let what = match act {
            Act::Accept => "accept",
            Act::Defer => "defer",
            Act::Decline => "decline",
        };
        let word = Word { what, by, reason };
        self.keep_act(&mut changes, Some(&before), &after, &word).await?;
        if act == Act::Decline {
            self.give_up_order(&mut changes, &after).await?;
        }
        changes.commit().await?;
        Ok(Done::new(after))
    }

    /// The order of a recommendation that was declined: a draft goes with it.
    async fn give_up_order(
        &self,
        changes: &mut Changes,
        declined: &Recommendation,
    ) -> Result<(), ActError> {
        let (Some(number), Some(train)) = (declined.work_order, self.plant.train(&declined.train))
        else {
            return Ok(());
        };
        let order: Option<WorkOrder> =
            changes.item(ItemKind::WorkOrder, &number.to_string()).await?;
        let known: Vec<WorkOrder> = order.into_iter().collect();
        let look = OrderLook {
            train,
            orders: &known,
            recommendation: Some(declined),
            cleans: &[],
            runs: &[],
            named: &[],
            last_chemical: None,
            as_of: self.now,
        };
        // A closed recommendation drafts nothing, so no number is asked for.
        for change in orders::step(&look, &mut || number) {
            let said = match change.turn {
                OrderTurn::Cancelled => happened("cancelled", self.now),
                _ => happened("annotated", self.now),
            };
            self.keep(changes, &change.order, said).await?;
        }
        Ok(())
    }
}
