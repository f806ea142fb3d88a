//! Alarms: acknowledged, shelved.

use super::{ActError, Desk, Done, Kept, Word, words};
use crate::alarms::{self, Alarm, AlarmRefused};
use crate::base::{Instant, TrainId};
use crate::store::ItemKind;

impl Kept for Alarm {
    const KIND: ItemKind = ItemKind::Alarm;
    const NAME: &'static str = "alarm";
    fn key(&self) -> String {
        self.id.clone()
    }
    fn train(&self) -> Option<&TrainId> {
        self.train.as_ref()
    }
    fn is_live(&self) -> bool {
        !self.is_normal()
    }
    fn stands(&self) -> &'static str {
        self.state.code()
    }
}

impl Desk<'_> {
    /// A person says that they know of an alarm.
    ///
    /// # Errors
    /// If there is none of that id, nobody is named, or the alarm is silent or over.
    pub async fn acknowledge(
        &self,
        id: &str,
        by: &str,
        reason: Option<&str>,
    ) -> Result<Done<Alarm>, ActError> {
        let word = Word { what: "acknowledge", by: by.trim(), reason: words(reason) };
        self.on_alarm(id, &word, |alarm| alarms::acknowledge(alarm, by, self.now)).await
    }

    /// A person silences an alarm until a moment, with a reason.
    ///
    /// # Errors
    /// If there is none of that id, nobody or no reason is named, the moment is out of reach,
    /// the kind is never shelved, or the alarm does not stand.
    pub async fn shelve(
        &self,
        id: &str,
        by: &str,
        until: Instant,
        reason: &str,
    ) -> Result<Done<Alarm>, ActError> {
        let word = Word { what: "shelve", by: by.trim(), reason: words(Some(reason)) };
        self.on_alarm(id, &word, |alarm| alarms::shelve(alarm, by, until, reason, self.now)).await
    }

    async fn on_alarm(
        &self,
        id: &str,
        word: &Word<'_>,
        act: impl FnOnce(&Alarm) -> Result<Alarm, AlarmRefused>,
    ) -> Result<Done<Alarm>, ActError> {
        let mut changes = self.begin().await?;
        let before: Alarm = self.get(&mut changes, id).await?;
        let after = act(&before)?;
        if after == before {
            return Ok(Done::known(before));
        }
        self.keep_act(&mut changes, Some(&before), &after, word).await?;
        changes.commit().await?;
        Ok(Done::new(after))
    }
}
