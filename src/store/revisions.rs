//! Values that were replaced, and by which delivery.

use std::fmt::Write as _;

use sqlx::SqliteConnection;

use super::merge::Merged;
use super::{Store, StoreError};
use crate::base::{CellValue, Column, Instant, SourceId, Span, Tag};

pub(super) const INSERT: &str = "
    INSERT INTO revision (plant, source, tag, time_us, old_value, new_value, receipt)
    SELECT ?1, ?2, ?3, value ->> 0, value -> 1, value -> 2, ?4 FROM json_each(?5) ORDER BY key";
pub(super) const OF_TAG: &str = "
    SELECT seq, source, tag, time_us, old_value, new_value, receipt FROM revision
    WHERE plant = ?1 AND source = ?2 AND tag = ?3 AND time_us >= ?4 AND time_us < ?5
    ORDER BY time_us, seq";
pub(super) const OF_RECEIPT: &str = "
    SELECT seq, source, tag, time_us, old_value, new_value, receipt FROM revision
    WHERE plant = ?1 AND receipt = ?2 AND seq > ?3 ORDER BY seq LIMIT ?4";

/// A value with its word spelled out.
#[derive(Clone, Debug, PartialEq)]
pub enum StoredValue {
    /// A number, in the tag's own unit.
    Number(f64),
    /// A word.
    Word(String),
    /// Marked bad; what the export said.
    Bad(String),
}

/// One replaced value.
#[derive(Clone, Debug, PartialEq)]
pub struct StoredRevision {
    /// Order of the replacements.
    pub seq: i64,
    /// Source of the tag.
    pub source: SourceId,
    /// The tag.
    pub tag: Tag,
    /// Time of the reading.
    pub time: Instant,
    /// What counted before.
    pub old: StoredValue,
    /// What counted from then on.
    pub new: StoredValue,
    /// The delivery that replaced it.
    pub receipt: String,
}

#[derive(sqlx::FromRow)]
struct Row {
    seq: i64,
    source: String,
    tag: String,
    time_us: i64,
    old_value: String,
    new_value: String,
    receipt: String,
}

#[derive(serde::Deserialize)]
struct BadText {
    bad: String,
}

impl StoredValue {
    /// A value of a column.
    pub fn of(column: &Column, value: CellValue) -> Self {
        match value {
            CellValue::Number(v) => Self::Number(v),
            CellValue::Word(w) => Self::Word(column.word(w).to_owned()),
            CellValue::Bad(w) => Self::Bad(column.word(w).to_owned()),
        }
    }
    fn read(text: &str) -> Result<Self, StoreError> {
        let wrong = |e| StoreError::unreadable("revision", e);
        match text.as_bytes().first() {
            Some(b'"') => Ok(Self::Word(serde_json::from_str(text).map_err(wrong)?)),
            Some(b'{') => {
                let read: BadText = serde_json::from_str(text).map_err(wrong)?;
                Ok(Self::Bad(read.bad))
            }
            // Not by serde_json, whose numbers may differ in the last bit.
            _ => Ok(Self::Number(text.parse().map_err(|e| StoreError::unreadable("revision", e))?)),
        }
    }
}

fn write_value(out: &mut String, column: &Column, value: CellValue) -> Result<(), StoreError> {
    let wrong = |e| StoreError::unreadable("revision", e);
    match value {
        CellValue::Number(v) => {
            // Shortest digits that come back as the same number; writing to a String never fails.
            let _ = write!(out, "{v:?}");
        }
        CellValue::Word(w) => {
            out.push_str(&serde_json::to_string(column.word(w)).map_err(wrong)?);
        }
        CellValue::Bad(w) => {
            out.push_str("{\"bad\":");
            out.push_str(&serde_json::to_string(column.word(w)).map_err(wrong)?);
            out.push('}');
        }
    }
    Ok(())
}

/// Writes the revisions of one tag's day inside a transaction under way, in one statement.
pub(super) async fn insert(
    conn: &mut SqliteConnection,
    plant: &str,
    (source, tag): (&SourceId, &Tag),
    merged: &Merged,
    receipt: &str,
) -> Result<(), StoreError> {
    if merged.revisions.is_empty() {
        return Ok(());
    }
    let mut list = String::with_capacity(2 + merged.revisions.len() * 40);
    for (i, revision) in merged.revisions.iter().enumerate() {
        list.push(if i == 0 { '[' } else { ',' });
        let _ = write!(list, "[{},", revision.time.micros());
        write_value(&mut list, &merged.column, revision.old)?;
        list.push(',');
        write_value(&mut list, &merged.column, revision.new)?;
        list.push(']');
    }
    list.push(']');
    sqlx::query(INSERT)
        .bind(plant)
        .bind(source.as_str())
        .bind(tag.as_str())
        .bind(receipt)
        .bind(list)
        .execute(conn)
        .await?;
    Ok(())
}

fn from_row(row: Row) -> Result<StoredRevision, StoreError> {
    Ok(StoredRevision {
        seq: row.seq,
        source: SourceId::new(&row.source),
        tag: Tag::new(&row.tag),
        time: Instant::from_micros(row.time_us),
        old: StoredValue::read(&row.old_value)?,
        new: StoredValue::read(&row.new_value)?,
        receipt: row.receipt,
    })
}

impl Store {
    /// What was replaced in a tag's readings of a span, in time order.
    pub async fn revisions(
        &self,
        plant: &str,
        source: &SourceId,
        tag: &Tag,
        span: Span,
    ) -> Result<Vec<StoredRevision>, StoreError> {
        let rows: Vec<Row> = sqlx::query_as(OF_TAG)
            .bind(plant)
            .bind(source.as_str())
            .bind(tag.as_str())
            .bind(span.from.micros())
            .bind(span.to.micros())
            .fetch_all(&self.readers)
            .await?;
        rows.into_iter().map(from_row).collect()
    }

    /// What a delivery replaced, in order, after the revision `after` (0 to begin with), at
    /// most `limit`.
    pub async fn revisions_by_receipt(
        &self,
        plant: &str,
        receipt: &str,
        after: i64,
        limit: u32,
    ) -> Result<Vec<StoredRevision>, StoreError> {
        let rows: Vec<Row> = sqlx::query_as(OF_RECEIPT)
            .bind(plant)
            .bind(receipt)
            .bind(after)
            .bind(limit)
            .fetch_all(&self.readers)
            .await?;
        rows.into_iter().map(from_row).collect()
    }
}
