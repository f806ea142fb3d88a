//! One delivery going in: its readings, what they replaced, the days to work again and, last,
//! the receipt. All of it or nothing.

use std::collections::BTreeMap;

use sqlx::{Row as _, Sqlite, SqliteConnection, Transaction};

use super::chunk::{CODEC_JSON, encode};
use super::merge::merge;
use super::readings::{newest_of_source, read_chunk, utc_day};
use super::{Store, StoreError, dirty, receipts, revisions};
use crate::base::{Column, Counts, Instant, Receipt, SourceId, Span, Tag, TrainId};

// The second half says whether anything is stored later, so that an import in time order asks
// once a tag and not once a day.
pub(super) const STORED_DAYS: &str = "
    SELECT day, content FROM reading_chunk
    WHERE plant = ?1 AND source = ?2 AND tag = ?3 AND day BETWEEN ?4 AND ?5
    UNION ALL
    SELECT max(day), NULL FROM reading_chunk
    WHERE plant = ?1 AND source = ?2 AND tag = ?3 AND day > ?5";
pub(super) const PUT_DAY: &str = "
    INSERT INTO reading_chunk (plant, source, tag, day, codec, first_us, last_us, n, content)
    VALUES (?1, ?2, ?3, ?4, ?5, ?6, ?7, ?8, ?9)
    ON CONFLICT (plant, source, tag, day) DO UPDATE SET codec = excluded.codec,
        first_us = excluded.first_us, last_us = excluded.last_us, n = excluded.n,
        content = excluded.content";

/// A delivery going in. It holds the one writing connection; dropping it undoes everything.
#[derive(Debug)]
pub struct Intake {
    tx: Transaction<'static, Sqlite>,
    plant: String,
    /// No day after this one is stored, by tag.
    ends: BTreeMap<(SourceId, Tag), i64>,
}

/// What became of one tag's readings.
#[derive(Clone, Debug, Default, PartialEq)]
pub struct MergeOutcome {
    /// Accepted, repeated and revised values.
    pub counts: Counts,
    /// Where stored readings are new or another: at most one span a UTC day, ascending.
    pub changed: Vec<Span>,
}

impl Store {
    /// Begins to take in a delivery, once the one before it is done.
    pub async fn begin_intake(&self, plant: &str) -> Result<Intake, StoreError> {
        let tx = self.write().await?;
        Ok(Intake { tx, plant: plant.to_owned(), ends: BTreeMap::new() })
    }
}

impl Intake {
    /// Merges readings of one tag, in the order of the delivery, into what is stored.
    ///
    /// # Errors
    /// If a stored day cannot be read, a value is not finite, or the database refuses.
    pub async fn merge(
        &mut self,
        source: &SourceId,
        tag: &Tag,
        delivered: &Column,
        receipt: &str,
    ) -> Result<MergeOutcome, StoreError> {
        let mut outcome = MergeOutcome::default();
        let days = by_day(delivered);
        let (Some(first), Some(last)) = (days.keys().next(), days.keys().next_back()) else {
            return Ok(outcome);
        };
        let mut stored = self.stored_days(source, tag, *first, *last).await?;
        for (day, delivered) in &days {
            let before = match stored.remove(day) {
                Some(text) => Some(read_chunk(&text, tag, *day)?),
                None => None,
            };
            let merged = merge(before.as_ref(), delivered);
            outcome.counts.add(&merged.counts);
            let Some(span) = merged.changed else { continue };
            outcome.changed.push(span);
            put_day(&mut self.tx, &self.plant, (source, tag), *day, &merged.column).await?;
            revisions::insert(&mut self.tx, &self.plant, (source, tag), &merged, receipt).await?;
        }
        Ok(outcome)
    }

    /// Time of the source's newest reading, this delivery's included.
    pub async fn newest(&mut self, source: &SourceId) -> Result<Option<Instant>, StoreError> {
        newest_of_source(&mut self.tx, &self.plant, source).await
    }

    /// Marks plant days to be worked again.
    pub async fn mark_dirty(&mut self, days: &[(TrainId, Instant)]) -> Result<(), StoreError> {
        dirty::mark(&mut self.tx, &self.plant, days).await
    }

    /// Writes the receipt and makes all of it durable.
    ///
    /// # Errors
    /// [`StoreError::Exists`] if the same file was taken under the same mapping meanwhile.
    pub async fn commit(mut self, receipt: &Receipt, mapping: &str) -> Result<(), StoreError> {
        receipts::insert(&mut self.tx, &self.plant, receipt, mapping).await?;
        Ok(self.tx.commit().await?)
    }

    async fn stored_days(
        &mut self,
        source: &SourceId,
        tag: &Tag,
        first: i64,
        last: i64,
    ) -> Result<BTreeMap<i64, String>, StoreError> {
        let key = (source.clone(), tag.clone());
        if let Some(end) = self.ends.get_mut(&key)
            && first > *end
        {
            *end = last;
            return Ok(BTreeMap::new());
        }
        let rows = sqlx::query(STORED_DAYS)
            .bind(self.plant.as_str())
            .bind(source.as_str())
            .bind(tag.as_str())
            .bind(first)
            .bind(last)
            .fetch_all(&mut *self.tx)
            .await?;
        let (mut stored, mut end) = (BTreeMap::new(), last);
        for row in rows {
            let day: Option<i64> = row.try_get(0)?;
            match (day, row.try_get::<Option<String>, _>(1)?) {
                (Some(day), Some(text)) => {
                    stored.insert(day, text);
                }
                (Some(later), None) => end = end.max(later),
                (None, _) => {}
            }
        }
        self.ends.insert(key, end);
        Ok(stored)
    }
}

/// The delivery cut into UTC days, each in the order of the delivery.
fn by_day(delivered: &Column) -> BTreeMap<i64, Column> {
    let mut days: BTreeMap<i64, Column> = BTreeMap::new();
    let (mut from, n) = (0, delivered.times.len().min(delivered.values.len()));
    while let Some(first) = delivered.times.get(from).filter(|_| from < n) {
        let day = utc_day(*first);
        let rest = delivered.times.get(from..n).unwrap_or(&[]);
        let to = from + rest.iter().take_while(|t| utc_day(**t) == day).count();
        let column = days
            .entry(day)
            .or_insert_with(|| Column { words: delivered.words.clone(), ..Column::default() });
        column.times.extend_from_slice(delivered.times.get(from..to).unwrap_or(&[]));
        column.values.extend_from_slice(delivered.values.get(from..to).unwrap_or(&[]));
        from = to;
    }
    days
}

async fn put_day(
    conn: &mut SqliteConnection,
    plant: &str,
    (source, tag): (&SourceId, &Tag),
    day: i64,
    column: &Column,
) -> Result<(), StoreError> {
    let text =
        encode(column).map_err(|source| StoreError::Chunk { tag: tag.to_string(), day, source })?;
    sqlx::query(PUT_DAY)
        .bind(plant)
        .bind(source.as_str())
        .bind(tag.as_str())
        .bind(day)
        .bind(CODEC_JSON)
        .bind(column.times.first().map(|t| t.micros()))
        .bind(column.times.last().map(|t| t.micros()))
        .bind(column.len() as i64)
        .bind(text)
        .execute(conn)
        .await?;
    Ok(())
}
