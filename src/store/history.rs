//! What was said and done: recommendations, alarms and work orders, with every change. Each
//! entry holds the thing whole as it then was.

use serde::Serialize;
use serde::de::DeserializeOwned;
use sqlx::SqliteConnection;

use super::{Store, StoreError};
use crate::base::{Instant, TrainId};

pub(super) const ADD: &str = "
    INSERT INTO history (plant, seq, kind, item, train, change, as_of_us, at_us, actor, reason,
        receipt, revision, derivation, content)
    SELECT ?1, coalesce(max(seq), 0) + 1, ?2, ?3, ?4, ?5, ?6, ?7, ?8, ?9, ?10, ?11, ?12, ?13
    FROM history WHERE plant = ?1
    RETURNING seq";
pub(super) const SET_ITEM: &str = "
    INSERT INTO item (plant, kind, item, train, open, first, seq, at_us, content)
    VALUES (?1, ?2, ?3, ?4, ?5, ?6, ?6, ?7, ?8)
    ON CONFLICT (plant, kind, item) DO UPDATE SET open = excluded.open, seq = excluded.seq,
        at_us = excluded.at_us, content = excluded.content";
// A range of `open` is what item_open can be searched by: of all there ever was, few are open.
pub(super) const LIST: &str = "
    SELECT content, first, at_us FROM item
    WHERE plant = ?1 AND kind = ?2 AND open BETWEEN coalesce(?3, 0) AND coalesce(?3, 1)
        AND (?4 IS NULL OR train = ?4)
        AND (?5 IS NULL OR at_us >= ?5) AND (?6 IS NULL OR first < ?6)
    ORDER BY first DESC LIMIT ?7";
pub(super) const ONE: &str =
    "SELECT content, first, at_us FROM item WHERE plant = ?1 AND kind = ?2 AND item = ?3";
pub(super) const ENTRIES: &str = "
    SELECT seq, change, as_of_us, at_us, actor, reason, receipt, revision, derivation, content
    FROM history WHERE plant = ?1 AND kind = ?2 AND item = ?3 AND seq > ?4 ORDER BY seq LIMIT ?5";
pub(super) const NEXT_NUMBER: &str = "
    SELECT coalesce(max(cast(item AS INTEGER)), 0) + 1 FROM item
    WHERE plant = ?1 AND kind = 'work_order'";

/// The kinds of thing that have a history.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum ItemKind {
    /// A recommendation.
    Recommendation,
    /// An alarm.
    Alarm,
    /// A work order.
    WorkOrder,
}

impl ItemKind {
    const fn code(self) -> &'static str {
        match self {
            Self::Recommendation => "recommendation",
            Self::Alarm => "alarm",
            Self::WorkOrder => "work_order",
        }
    }
}

/// What brought a change about.
#[derive(Clone, Debug, Default, PartialEq)]
pub struct Said {
    /// The change in a word: raised, updated, closed, accepted, ...
    pub change: String,
    /// Data time it stands on.
    pub as_of: Option<Instant>,
    /// The person, where a person did it.
    pub by: Option<String>,
    /// Why: `late_data`, `plant_file_changed`, or a person's words.
    pub reason: Option<String>,
    /// Delivery that brought it about.
    pub receipt: Option<String>,
}

/// An entry to be added.
#[derive(Clone, Debug, PartialEq)]
pub struct Entry {
    kind: ItemKind,
    item: String,
    train: Option<TrainId>,
    open: bool,
    said: Said,
    at: Instant,
    revision: String,
    derivation: i64,
    content: String,
}

impl Entry {
    /// An entry that holds `content` whole. `at` is service time; `revision` and `derivation`
    /// say by which plant file and version it was worked out.
    ///
    /// # Errors
    /// If the content cannot be written as JSON: a number that is none.
    #[expect(clippy::too_many_arguments, reason = "an entry is what all of this says of a change")]
    pub fn new<T: Serialize>(
        kind: ItemKind,
        item: &str,
        train: Option<&TrainId>,
        open: bool,
        content: &T,
        said: Said,
        at: Instant,
        revision: &str,
        derivation: i64,
    ) -> Result<Self, StoreError> {
        Ok(Self {
            kind,
            item: item.to_owned(),
            train: train.cloned(),
            open,
            said,
            at,
            revision: revision.to_owned(),
            derivation,
            content: serde_json::to_string(content)
                .map_err(|e| StoreError::unreadable("history", e))?,
        })
    }
}

/// A stored entry.
#[derive(Clone, Debug, PartialEq)]
pub struct HistoryEntry<T> {
    /// Its place in the plant's history.
    pub seq: i64,
    /// What brought it about.
    pub said: Said,
    /// Service time.
    pub at: Instant,
    /// Plant file it was worked out by.
    pub revision: String,
    /// Version of the derivation.
    pub derivation: i64,
    /// The thing as it then was.
    pub content: T,
}

/// Which things to list.
#[derive(Clone, Debug, Default, PartialEq)]
pub struct ItemFilter {
    /// Only open or only closed ones.
    pub open: Option<bool>,
    /// Only of this train.
    pub train: Option<TrainId>,
    /// Only changed at or after, by service time.
    pub changed_since: Option<Instant>,
    /// Only after this one in the list: the place of the last of the page before.
    pub after: Option<i64>,
    /// At most so many.
    pub limit: u32,
}

/// Adds an entry, and makes it the newest of its thing.
pub(super) async fn add(
    conn: &mut SqliteConnection,
    plant: &str,
    entry: &Entry,
) -> Result<(), StoreError> {
    let seq: i64 = sqlx::query_scalar(ADD)
        .bind(plant)
        .bind(entry.kind.code())
        .bind(entry.item.as_str())
        .bind(entry.train.as_ref().map(TrainId::as_str))
        .bind(entry.said.change.as_str())
        .bind(entry.said.as_of.unwrap_or(entry.at).micros())
        .bind(entry.at.micros())
        .bind(entry.said.by.as_deref())
        .bind(entry.said.reason.as_deref())
        .bind(entry.said.receipt.as_deref())
        .bind(entry.revision.as_str())
        .bind(entry.derivation)
        .bind(entry.content.as_str())
        .fetch_one(&mut *conn)
        .await?;
    sqlx::query(SET_ITEM)
        .bind(plant)
        .bind(entry.kind.code())
        .bind(entry.item.as_str())
        .bind(entry.train.as_ref().map(TrainId::as_str))
        .bind(entry.open)
        .bind(seq)
        .bind(entry.at.micros())
        .bind(entry.content.as_str())
        .execute(conn)
        .await?;
    Ok(())
}

/// One thing as it is now, with what the transaction under way has made of it.
pub(super) async fn item<T: DeserializeOwned>(
    conn: &mut SqliteConnection,
    plant: &str,
    kind: ItemKind,
    item: &str,
) -> Result<Option<T>, StoreError> {
    let row: Option<(String, i64, i64)> =
        sqlx::query_as(ONE).bind(plant).bind(kind.code()).bind(item).fetch_optional(conn).await?;
    row.map(|(text, _, _)| read(&text)).transpose()
}

/// The next number of a work order.
pub(super) async fn next_order_number(
    conn: &mut SqliteConnection,
    plant: &str,
) -> Result<i64, StoreError> {
    Ok(sqlx::query_scalar(NEXT_NUMBER).bind(plant).fetch_one(conn).await?)
}

fn read<T: DeserializeOwned>(text: &str) -> Result<T, StoreError> {
    serde_json::from_str(text).map_err(|e| StoreError::unreadable("history", e))
}

type EntryRow =
    (i64, String, i64, i64, Option<String>, Option<String>, Option<String>, String, i64, String);

impl Store {
    /// Things of a kind, newest first, each with its place in the list.
    pub async fn items<T: DeserializeOwned>(
        &self,
        plant: &str,
        kind: ItemKind,
        filter: &ItemFilter,
    ) -> Result<Vec<(i64, T)>, StoreError> {
        let rows: Vec<(String, i64, i64)> = sqlx::query_as(LIST)
            .bind(plant)
            .bind(kind.code())
            .bind(filter.open)
            .bind(filter.train.as_ref().map(TrainId::as_str))
            .bind(filter.changed_since.map(Instant::micros))
            .bind(filter.after)
            .bind(filter.limit)
            .fetch_all(&self.readers)
            .await?;
        rows.into_iter().map(|(text, first, _)| Ok((first, read(&text)?))).collect()
    }

    /// One thing as it is now.
    pub async fn item<T: DeserializeOwned>(
        &self,
        plant: &str,
        kind: ItemKind,
        item: &str,
    ) -> Result<Option<T>, StoreError> {
        self::item(&mut *self.readers.acquire().await?, plant, kind, item).await
    }

    /// The history of one thing after a place, oldest first.
    pub async fn history<T: DeserializeOwned>(
        &self,
        plant: &str,
        kind: ItemKind,
        item: &str,
        after: i64,
        limit: u32,
    ) -> Result<Vec<HistoryEntry<T>>, StoreError> {
        let rows: Vec<EntryRow> = sqlx::query_as(ENTRIES)
            .bind(plant)
            .bind(kind.code())
            .bind(item)
            .bind(after)
            .bind(limit)
            .fetch_all(&self.readers)
            .await?;
        rows.into_iter()
            .map(|(seq, change, as_of, at, by, reason, receipt, revision, derivation, text)| {
                let said =
                    Said { change, as_of: Some(Instant::from_micros(as_of)), by, reason, receipt };
                Ok(HistoryEntry {
                    seq,
                    said,
                    at: Instant::from_micros(at),
                    revision,
                    derivation,
                    content: read(&text)?,
                })
            })
            .collect()
    }
}
