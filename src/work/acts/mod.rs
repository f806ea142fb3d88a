//! What people do: each act is one transaction that reads what stands, decides by the dry
//! floors' rules, and writes the thing as it then is, the journal of acts and whatever follows.
//! While it is under way nobody else writes, so no act is lost under another.
//!
//! The same act said again by the same person changes nothing. Times are the wall clock's.

mod alarms;
mod chemicals;
mod cleanings;
mod orders;
mod recommendations;

use serde::Serialize;
use serde::de::DeserializeOwned;

use crate::advice::ActRefused;
use crate::alarms::AlarmRefused;
use crate::analysis::DERIVATION_VERSION;
use crate::base::{Instant, TrainId, names_a_person};
use crate::orders::Refusal;
use crate::plant::{Plant, Train};
use crate::store::{Act, Changes, Entry, ItemFilter, ItemKind, Said, Store, StoreError, new_id};

pub use cleanings::{CleaningRefused, NewCleaning};

/// What is open at once in any plant is less than this.
const MANY: u32 = 10_000;

/// Where people's acts are done: the store, the plant as it is now, the wall clock.
#[derive(Clone, Copy, Debug)]
pub struct Desk<'a> {
    /// The store.
    pub store: &'a Store,
    /// The plant.
    pub plant: &'a Plant,
    /// The wall clock.
    pub now: Instant,
}

/// What became of an act.
#[derive(Clone, Debug, PartialEq)]
pub struct Done<T> {
    /// The thing as it now is.
    pub item: T,
    /// Whether the act changed it; `false` where it was said before.
    pub changed: bool,
}

impl<T> Done<T> {
    const fn new(item: T) -> Self {
        Self { item, changed: true }
    }
    const fn known(item: T) -> Self {
        Self { item, changed: false }
    }
}

/// Why an act was not done. Nothing was written.
#[derive(Debug, thiserror::Error)]
pub enum ActError {
    /// There is nothing of that id or number.
    #[error("there is no such thing")]
    NotThere,
    /// Nobody is named.
    #[error("`by` must name the person who does it")]
    NeedsPerson,
    /// No reason is named.
    #[error("`reason` must say why: the next shift reads it")]
    NeedsReason,
    /// Refused on a recommendation.
    #[error("refused on the recommendation")]
    Recommendation(ActRefused),
    /// Refused on an alarm.
    #[error("{0}")]
    Alarm(AlarmRefused),
    /// Refused on a work order.
    #[error("{0}")]
    Order(Refusal),
    /// A cleaning that cannot be recorded.
    #[error("{0}")]
    Cleaning(#[from] CleaningRefused),
    /// The store refused.
    #[error("the store refused")]
    Store(#[from] StoreError),
}

impl From<ActRefused> for ActError {
    fn from(why: ActRefused) -> Self {
        Self::Recommendation(why)
    }
}

impl From<AlarmRefused> for ActError {
    fn from(why: AlarmRefused) -> Self {
        Self::Alarm(why)
    }
}

impl From<Refusal> for ActError {
    fn from(why: Refusal) -> Self {
        Self::Order(why)
    }
}

/// A thing with a history, as entries and journal name it.
trait Kept: Serialize + DeserializeOwned {
    const KIND: ItemKind;
    /// Kind of thing in the journal of acts.
    const NAME: &'static str;
    fn key(&self) -> String;
    fn train(&self) -> Option<&TrainId>;
    /// Whether anything can still happen to it by itself.
    fn is_live(&self) -> bool;
    /// How it stands, in a word.
    fn stands(&self) -> &'static str;
}

/// Who did what, and why.
struct Word<'a> {
    what: &'a str,
    by: &'a str,
    reason: Option<&'a str>,
}

impl Desk<'_> {
    async fn begin(&self) -> Result<Changes, StoreError> {
        self.store.begin_changes(&self.plant.id).await
    }

    async fn get<T: Kept>(&self, changes: &mut Changes, key: &str) -> Result<T, ActError> {
        changes.item(T::KIND, key).await?.ok_or(ActError::NotThere)
    }

    /// What is live of a kind. Nothing changes while a transaction is under way.
    async fn live<T: Kept>(&self, train: Option<&TrainId>) -> Result<Vec<T>, StoreError> {
        let filter = ItemFilter {
            open: Some(true),
            train: train.cloned(),
            limit: MANY,
            ..Default::default()
        };
        let items = self.store.items(&self.plant.id, T::KIND, &filter).await?;
        Ok(items.into_iter().map(|(_, item)| item).collect())
    }

    /// The train of a thing; a train that the plant file no longer holds is not there.
    fn train_of(&self, id: &TrainId) -> Result<&Train, ActError> {
        self.plant.train(id).ok_or(ActError::NotThere)
    }

    /// Keeps a thing as it now is.
    async fn keep<T: Kept>(
        &self,
        changes: &mut Changes,
        item: &T,
        said: Said,
    ) -> Result<(), StoreError> {
        let entry = Entry::new(
            T::KIND,
            &item.key(),
            item.train(),
            item.is_live(),
            item,
            said,
            self.now,
            &self.plant.revision,
            DERIVATION_VERSION,
        )?;
        changes.add_entry(&entry).await
    }

    /// Keeps a thing that a person changed, with the act.
    async fn keep_act<T: Kept>(
        &self,
        changes: &mut Changes,
        before: Option<&T>,
        after: &T,
        word: &Word<'_>,
    ) -> Result<(), StoreError> {
        let said = Said {
            change: word.what.to_owned(),
            as_of: None,
            by: Some(word.by.to_owned()),
            reason: word.reason.map(str::to_owned),
            receipt: None,
        };
        self.keep(changes, after, said).await?;
        let (before, after_text) = (before.map(T::stands), Some(after.stands()));
        self.note(changes, (T::NAME, &after.key()), word, (before, after_text)).await
    }

    /// Writes an act into the journal; `states` are how its subject stood before and after.
    async fn note(
        &self,
        changes: &mut Changes,
        (subject_kind, subject): (&str, &str),
        word: &Word<'_>,
        states: (Option<&str>, Option<&str>),
    ) -> Result<(), StoreError> {
        let act = Act {
            id: new_id(),
            at: self.now,
            by: word.by.to_owned(),
            what: word.what.to_owned(),
            subject_kind: subject_kind.to_owned(),
            subject: subject.to_owned(),
            reason: word.reason.map(str::to_owned),
            before: states.0.map(str::to_owned),
            after: states.1.map(str::to_owned),
        };
        changes.add_act(&act).await
    }
}

/// Something that happened by itself.
fn happened(change: &str, as_of: Instant) -> Said {
    Said { change: change.to_owned(), as_of: Some(as_of), ..Said::default() }
}

/// The name of a person, as given.
fn person(by: &str) -> Result<&str, ActError> {
    if names_a_person(by) { Ok(by.trim()) } else { Err(ActError::NeedsPerson) }
}

/// What a person said, if anything.
fn words(text: Option<&str>) -> Option<&str> {
    text.map(str::trim).filter(|t| !t.is_empty())
}
