//! One delivery going in: its readings, what they replaced, the days to work again and, last,
//! the receipt. All of it or nothing.

use std::borrow::Cow;
use std::collections::{BTreeMap, BTreeSet};

use sqlx::{Row as _, Sqlite, Transaction};

use super::chunk::{CODEC_JSON, encode};
use super::dirty::to_json;
use super::merge::{Merged, merge};
use super::readings::{newest_of_source, read_chunk, utc_day};
use super::{Store, StoreError, dirty, receipts, revisions};
use crate::base::{Column, Counts, Instant, Receipt, SourceId, Span, Tag, TrainId};

// One statement for all tags of a delivery. The second half says whether anything is stored
// later, so that an import in time order asks once a tag and not once a day.
pub(super) const STORED_DAYS: &str = "
    SELECT k.key, c.day, c.content FROM json_each(?2) AS k CROSS JOIN reading_chunk AS c
    WHERE c.plant = ?1 AND c.source = k.value ->> 0 AND c.tag = k.value ->> 1
        AND c.day BETWEEN k.value ->> 2 AND k.value ->> 3
    UNION ALL
    SELECT k.key, (
        SELECT max(day) FROM reading_chunk AS c
        WHERE c.plant = ?1 AND c.source = k.value ->> 0 AND c.tag = k.value ->> 1
            AND c.day > k.value ->> 3
    ), NULL FROM json_each(?2) AS k";
pub(super) const PUT_DAY: &str = "
    INSERT INTO reading_chunk (plant, source, tag, day, codec, first_us, last_us, n, content)
    VALUES (?, ?, ?, ?, ?, ?, ?, ?, ?)
    ON CONFLICT (plant, source, tag, day) DO UPDATE SET codec = excluded.codec,
        first_us = excluded.first_us, last_us = excluded.last_us, n = excluded.n,
        content = excluded.content";
/// The same for [`BATCH`] days: a statement costs more than the row it writes.
pub(super) const PUT_DAYS: &str = "
    INSERT INTO reading_chunk (plant, source, tag, day, codec, first_us, last_us, n, content)
    VALUES (?, ?, ?, ?, ?, ?, ?, ?, ?), (?, ?, ?, ?, ?, ?, ?, ?, ?), (?, ?, ?, ?, ?, ?, ?, ?, ?),
        (?, ?, ?, ?, ?, ?, ?, ?, ?), (?, ?, ?, ?, ?, ?, ?, ?, ?), (?, ?, ?, ?, ?, ?, ?, ?, ?),
        (?, ?, ?, ?, ?, ?, ?, ?, ?), (?, ?, ?, ?, ?, ?, ?, ?, ?), (?, ?, ?, ?, ?, ?, ?, ?, ?),
        (?, ?, ?, ?, ?, ?, ?, ?, ?), (?, ?, ?, ?, ?, ?, ?, ?, ?), (?, ?, ?, ?, ?, ?, ?, ?, ?),
        (?, ?, ?, ?, ?, ?, ?, ?, ?), (?, ?, ?, ?, ?, ?, ?, ?, ?), (?, ?, ?, ?, ?, ?, ?, ?, ?),
        (?, ?, ?, ?, ?, ?, ?, ?, ?)
    ON CONFLICT (plant, source, tag, day) DO UPDATE SET codec = excluded.codec,
        first_us = excluded.first_us, last_us = excluded.last_us, n = excluded.n,
        content = excluded.content";
const BATCH: usize = 16;

/// A delivery going in. It holds the one writing connection; dropping it undoes everything.
#[derive(Debug)]
pub struct Intake {
    tx: Transaction<'static, Sqlite>,
    plant: String,
    /// No day after this one is stored or waiting, by tag.
    ends: BTreeMap<(SourceId, Tag), i64>,
    /// Days that are merged and wait to be written together.
    waiting: Vec<Day>,
}

/// One tag's day as it will be stored.
#[derive(Debug)]
struct Day {
    source: SourceId,
    tag: Tag,
    day: i64,
    first_us: i64,
    last_us: i64,
    n: usize,
    text: String,
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
        Ok(Intake { tx, plant: plant.to_owned(), ends: BTreeMap::new(), waiting: Vec::new() })
    }
}

impl Intake {
    /// Merges readings, in the order of the delivery, into what is stored: one outcome for each
    /// column. Hand over all tags of a block of rows at once; it saves statements.
    ///
    /// # Errors
    /// If a stored day cannot be read, a value is not finite, or the database refuses. Drop the
    /// intake then.
    pub async fn merge(
        &mut self,
        delivered: &[(SourceId, Tag, Column)],
        receipt: &str,
    ) -> Result<Vec<MergeOutcome>, StoreError> {
        let mut outcomes = Vec::with_capacity(delivered.len());
        let (mut rest, mut seen) = (delivered, BTreeSet::new());
        while !rest.is_empty() {
            // A tag that comes again has to see what its first column left.
            seen.clear();
            let fresh = rest.iter().take_while(|(source, tag, _)| seen.insert((source, tag)));
            let (now, later) = rest.split_at(fresh.count());
            outcomes.extend(self.merge_distinct(now, receipt).await?);
            rest = later;
        }
        Ok(outcomes)
    }

    async fn merge_distinct(
        &mut self,
        delivered: &[(SourceId, Tag, Column)],
        receipt: &str,
    ) -> Result<Vec<MergeOutcome>, StoreError> {
        let cut: Vec<_> = delivered.iter().map(|(_, _, column)| by_day(column)).collect();
        let mut stored = self.stored_days(delivered, &cut).await?;
        let mut outcomes = vec![MergeOutcome::default(); delivered.len()];
        for (place, ((source, tag, _), days)) in delivered.iter().zip(&cut).enumerate() {
            for (day, column) in days {
                let before = match stored.remove(&(place, *day)) {
                    Some(text) => Some(read_chunk(&text, tag, *day)?),
                    None => None,
                };
                let merged = merge(before.as_ref(), column);
                if let Some(outcome) = outcomes.get_mut(place) {
                    outcome.counts.add(&merged.counts);
                    outcome.changed.extend(merged.changed);
                }
                if merged.changed.is_some() {
                    self.put(source, tag, *day, &merged, receipt).await?;
                }
            }
        }
        Ok(outcomes)
    }

    /// Time of the source's newest reading, this delivery's included.
    pub async fn newest(&mut self, source: &SourceId) -> Result<Option<Instant>, StoreError> {
        self.flush().await?;
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
        self.flush().await?;
        receipts::insert(&mut self.tx, &self.plant, receipt, mapping).await?;
        Ok(self.tx.commit().await?)
    }

    /// The stored texts of the days that a delivery touches, by place in the list and day.
    async fn stored_days(
        &mut self,
        delivered: &[(SourceId, Tag, Column)],
        cut: &[BTreeMap<i64, Cow<'_, Column>>],
    ) -> Result<BTreeMap<(usize, i64), String>, StoreError> {
        let (mut keys, mut places) = (Vec::new(), Vec::new());
        for (place, ((source, tag, _), days)) in delivered.iter().zip(cut).enumerate() {
            let (Some(first), Some(last)) = (days.keys().next(), days.keys().next_back()) else {
                continue;
            };
            match self.ends.get_mut(&(source.clone(), tag.clone())) {
                Some(end) if *first > *end => *end = *last,
                _ => {
                    keys.push((source.as_str(), tag.as_str(), *first, *last));
                    places.push((place, *last));
                }
            }
        }
        let mut stored = BTreeMap::new();
        if keys.is_empty() {
            return Ok(stored);
        }
        self.flush().await?;
        let rows = sqlx::query(STORED_DAYS)
            .bind(self.plant.as_str())
            .bind(to_json(&keys)?)
            .fetch_all(&mut *self.tx)
            .await?;
        for row in rows {
            let key: i64 = row.try_get(0)?;
            let Some((place, last)) = places.get(key as usize).copied() else { continue };
            let day: Option<i64> = row.try_get(1)?;
            if let (Some(day), Some(text)) = (day, row.try_get::<Option<String>, _>(2)?) {
                stored.insert((place, day), text);
            } else if let Some((source, tag, _)) = delivered.get(place) {
                self.ends.insert((source.clone(), tag.clone()), day.unwrap_or(last));
            }
        }
        Ok(stored)
    }

    async fn put(
        &mut self,
        source: &SourceId,
        tag: &Tag,
        day: i64,
        merged: &Merged,
        receipt: &str,
    ) -> Result<(), StoreError> {
        revisions::insert(&mut self.tx, &self.plant, (source, tag), merged, receipt).await?;
        let column = &merged.column;
        let text = encode(column).map_err(|source| StoreError::Chunk {
            tag: tag.to_string(),
            day,
            source,
        })?;
        self.waiting.push(Day {
            source: source.clone(),
            tag: tag.clone(),
            day,
            first_us: column.times.first().map_or(0, |t| t.micros()),
            last_us: column.times.last().map_or(0, |t| t.micros()),
            n: column.len(),
            text,
        });
        if self.waiting.len() < BATCH { Ok(()) } else { self.flush().await }
    }

    /// Writes the days that wait.
    async fn flush(&mut self) -> Result<(), StoreError> {
        let mut waiting = std::mem::take(&mut self.waiting).into_iter().peekable();
        while waiting.peek().is_some() {
            let (sql, n) = if waiting.len() >= BATCH { (PUT_DAYS, BATCH) } else { (PUT_DAY, 1) };
            let mut query = sqlx::query(sql);
            for day in waiting.by_ref().take(n) {
                query = query
                    .bind(self.plant.as_str())
                    .bind(day.source.as_str().to_owned())
                    .bind(day.tag.as_str().to_owned())
                    .bind(day.day)
                    .bind(CODEC_JSON)
                    .bind(day.first_us)
                    .bind(day.last_us)
                    .bind(day.n as i64)
                    .bind(day.text);
            }
            query.execute(&mut *self.tx).await?;
        }
        Ok(())
    }
}

/// The delivery cut into UTC days, each in the order of the delivery.
fn by_day(delivered: &Column) -> BTreeMap<i64, Cow<'_, Column>> {
    let (mut from, n) = (0, delivered.times.len().min(delivered.values.len()));
    if let Some(first) = delivered.times.first().map(|t| utc_day(*t))
        && delivered.times.iter().all(|t| utc_day(*t) == first)
    {
        return BTreeMap::from([(first, Cow::Borrowed(delivered))]);
    }
    let mut days: BTreeMap<i64, Column> = BTreeMap::new();
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
    days.into_iter().map(|(day, column)| (day, Cow::Owned(column))).collect()
}
