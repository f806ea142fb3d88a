//! Readings, decoded from the day chunks that hold them.

use futures_util::TryStreamExt;
use sqlx::{Row as _, SqliteConnection};

use super::chunk::decode;
use super::dirty::to_json;
use super::{Store, StoreError};
use crate::base::{CellValue, Column, DAY_US, Instant, SourceId, Span, Tag};

// CROSS JOIN keeps the order of the loops: the tags asked for outside, the key of the chunks
// inside. No ORDER BY: it would carry every text through a sorter, only to find it in order.
pub(super) const OF_TAGS: &str = "
    SELECT k.key AS place, c.day, c.content, c.n
    FROM json_each(?2) AS k CROSS JOIN reading_chunk AS c
    WHERE c.plant = ?1 AND c.source = k.value ->> 0 AND c.tag = k.value ->> 1
        AND c.day BETWEEN ?3 AND ?4";
pub(super) const LAST_BEFORE: &str = "
    SELECT k.key AS place, ?3 AS day, (
        SELECT content FROM reading_chunk AS c
        WHERE c.plant = ?1 AND c.source = k.value ->> 0 AND c.tag = k.value ->> 1
            AND c.day <= ?3 AND c.first_us < ?4
        ORDER BY c.day DESC LIMIT 1
    ) AS content
    FROM json_each(?2) AS k ORDER BY k.key";
pub(super) const NEWEST_OF_TAGS: &str = "
    SELECT (
        SELECT last_us FROM reading_chunk AS c
        WHERE c.plant = ?1 AND c.source = k.value ->> 0 AND c.tag = k.value ->> 1
        ORDER BY c.day DESC LIMIT 1
    )
    FROM json_each(?2) AS k ORDER BY k.key";
pub(super) const NEWEST_OF_SOURCE: &str =
    "SELECT max(last_us) FROM reading_chunk WHERE plant = ?1 AND source = ?2";

pub(super) const SPAN_OF_TAGS: &str = "
    SELECT min(c.first_us), max(c.last_us)
    FROM json_each(?2) AS k CROSS JOIN reading_chunk AS c
    WHERE c.plant = ?1 AND c.source = k.value ->> 0 AND c.tag = k.value ->> 1";

/// The UTC day of a moment, in days since 1970-01-01.
pub(super) fn utc_day(at: Instant) -> i64 {
    at.micros().div_euclid(DAY_US)
}

fn keys(tags: &[(SourceId, Tag)]) -> Result<String, StoreError> {
    to_json(&tags.iter().map(|(s, t)| (s.as_str(), t.as_str())).collect::<Vec<_>>())
}

/// Reads a stored chunk; says which it was if it cannot be read.
pub(super) fn read_chunk(text: &str, tag: &Tag, day: i64) -> Result<Column, StoreError> {
    decode(text).map_err(|source| StoreError::Chunk { tag: tag.to_string(), day, source })
}

/// Adds what of `day` lies in the span to the end of `out`.
fn append(out: &mut Column, day: Column, span: Span) {
    let from = day.times.partition_point(|t| *t < span.from);
    let to = day.times.partition_point(|t| *t < span.to).max(from);
    out.times.extend_from_slice(day.times.get(from..to).unwrap_or(&[]));
    let values = day.values.get(from..to).unwrap_or(&[]);
    if day.words.is_empty() {
        out.values.extend_from_slice(values);
        return;
    }
    let places: Vec<u32> = day.words.iter().map(|w| out.intern(w)).collect();
    let place = |w: u32| places.get(w as usize).copied().unwrap_or(w);
    out.values.extend(values.iter().map(|v| match *v {
        CellValue::Number(v) => CellValue::Number(v),
        CellValue::Word(w) => CellValue::Word(place(w)),
        CellValue::Bad(w) => CellValue::Bad(place(w)),
    }));
}

/// Newest reading of a source, good or bad, seen from a connection or a transaction.
pub(super) async fn newest_of_source(
    conn: &mut SqliteConnection,
    plant: &str,
    source: &SourceId,
) -> Result<Option<Instant>, StoreError> {
    let us: Option<i64> = sqlx::query_scalar(NEWEST_OF_SOURCE)
        .bind(plant)
        .bind(source.as_str())
        .fetch_one(conn)
        .await?;
    Ok(us.map(Instant::from_micros))
}

impl Store {
    /// The readings of tags in a span, one column each in the order asked for, strictly
    /// ascending in time; empty where there is none.
    pub async fn readings(
        &self,
        plant: &str,
        tags: &[(SourceId, Tag)],
        span: Span,
    ) -> Result<Vec<Column>, StoreError> {
        let mut columns = vec![Column::default(); tags.len()];
        if span.length_us() <= 0 {
            return Ok(columns);
        }
        let mut rows = sqlx::query(OF_TAGS)
            .bind(plant)
            .bind(keys(tags)?)
            .bind(utc_day(span.from))
            .bind(utc_day(span.to.plus(-1)))
            .fetch(&self.readers);
        let mut texts: Vec<(usize, i64, String)> = Vec::new();
        let mut expected = vec![0usize; tags.len()];
        while let Some(row) = rows.try_next().await? {
            let place = row.try_get::<i64, _>(0)? as usize;
            texts.push((place, row.try_get(1)?, row.try_get(2)?));
            if let Some(n) = expected.get_mut(place) {
                *n += row.try_get::<i64, _>(3)? as usize;
            }
        }
        for (column, n) in columns.iter_mut().zip(expected) {
            column.times.reserve_exact(n);
            column.values.reserve_exact(n);
        }
        // They come in order; this says so whatever the engine does.
        texts.sort_by_key(|(place, day, _)| (*place, *day));
        for (place, day, text) in texts {
            if let (Some((_, tag)), Some(out)) = (tags.get(place), columns.get_mut(place)) {
                append(out, read_chunk(&text, tag, day)?, span);
            }
        }
        Ok(columns)
    }

    /// The last reading of each tag before a moment, however old: a column of one value, or an
    /// empty one. For values that hold until their next.
    pub async fn last_before(
        &self,
        plant: &str,
        tags: &[(SourceId, Tag)],
        at: Instant,
    ) -> Result<Vec<Column>, StoreError> {
        let mut columns = vec![Column::default(); tags.len()];
        let rows = sqlx::query(LAST_BEFORE)
            .bind(plant)
            .bind(keys(tags)?)
            .bind(utc_day(at))
            .bind(at.micros())
            .fetch_all(&self.readers)
            .await?;
        for row in rows {
            let place = row.try_get::<i64, _>(0)? as usize;
            let text: Option<&str> = row.try_get(2)?;
            if let (Some((_, tag)), Some(out), Some(text)) =
                (tags.get(place), columns.get_mut(place), text)
            {
                let day = read_chunk(text, tag, row.try_get(1)?)?;
                let before = day.times.partition_point(|t| *t < at);
                if let Some(time) = before.checked_sub(1).and_then(|i| day.times.get(i)).copied() {
                    append(out, day, Span::new(time, at));
                }
            }
        }
        Ok(columns)
    }

    /// Time of a source's newest reading, good or bad.
    pub async fn newest_reading(
        &self,
        plant: &str,
        source: &SourceId,
    ) -> Result<Option<Instant>, StoreError> {
        let mut conn = self.readers.acquire().await?;
        newest_of_source(&mut conn, plant, source).await
    }

    /// Time of each tag's newest reading, good or bad, in the order asked for.
    pub async fn newest_readings(
        &self,
        plant: &str,
        tags: &[(SourceId, Tag)],
    ) -> Result<Vec<Option<Instant>>, StoreError> {
        let rows: Vec<Option<i64>> = sqlx::query_scalar(NEWEST_OF_TAGS)
            .bind(plant)
            .bind(keys(tags)?)
            .fetch_all(&self.readers)
            .await?;
        Ok(rows.into_iter().map(|us| us.map(Instant::from_micros)).collect())
    }

    /// Times of the earliest and the newest reading of some tags.
    pub async fn readings_span(
        &self,
        plant: &str,
        tags: &[(SourceId, Tag)],
    ) -> Result<Option<Span>, StoreError> {
        let row: (Option<i64>, Option<i64>) = sqlx::query_as(SPAN_OF_TAGS)
            .bind(plant)
            .bind(keys(tags)?)
            .fetch_one(&self.readers)
            .await?;
        let at = Instant::from_micros;
        Ok(row.0.zip(row.1).map(|(first, last)| Span::new(at(first), at(last))))
    }
}
