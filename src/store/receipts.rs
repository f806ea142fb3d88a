//! What was answered to each delivery.

use std::collections::BTreeMap;

use serde::de::DeserializeOwned;
use sqlx::SqliteConnection;

use super::dirty::to_json;
use super::{Store, StoreError};
use crate::base::{Counts, Instant, Outcome, Receipt, SourceId, TrainId};

pub(super) const INSERT: &str = "
    INSERT INTO receipt (plant, id, source, mapping, file, received_us, digest, from_us, to_us,
        rows, cells, outcome, message, accepted, repeated, revised, bad, missing, rejected,
        unmapped_columns, time_zone, repeated_hour_rows, skipped_hour_rows, rejections,
        rejections_total, changed_from, analysed, earlier, notes)
    VALUES (?1, ?2, ?3, ?4, ?5, ?6, ?7, ?8, ?9, ?10, ?11, ?12, ?13, ?14, ?15, ?16, ?17, ?18, ?19,
        ?20, ?21, ?22, ?23, ?24, ?25, ?26, ?27, ?28, ?29)";
pub(super) const BY_ID: &str = "SELECT * FROM receipt WHERE plant = ?1 AND id = ?2";
pub(super) const BY_DIGEST: &str = "
    SELECT * FROM receipt WHERE plant = ?1 AND source = ?2 AND digest = ?3 AND mapping = ?4";
// The plus keeps the engine from walking all receipts in the order of their ids: there is
// rarely one of that digest, and a year of posts is nine thousand.
pub(super) const NEWEST_BY_DIGEST: &str = "
    SELECT * FROM receipt WHERE plant = ?1 AND source = ?2 AND digest = ?3
    ORDER BY +id DESC LIMIT 1";
pub(super) const LIST: &str = "
    SELECT * FROM receipt
    WHERE plant = ?1 AND (?2 IS NULL OR source = ?2) AND (?3 IS NULL OR file = ?3)
        AND (?4 IS NULL OR received_us >= ?4) AND (?5 IS NULL OR id < ?5)
    ORDER BY id DESC LIMIT ?6";
pub(super) const PENDING: &str =
    "SELECT id FROM receipt WHERE plant = ?1 AND analysed = 0 ORDER BY id";
pub(super) const SET_ANALYSED: &str =
    "UPDATE receipt SET changed_from = ?3, analysed = ?4 WHERE plant = ?1 AND id = ?2";

/// Which receipts to list.
#[derive(Clone, Debug, Default, PartialEq)]
pub struct ReceiptFilter {
    /// Only of this source.
    pub source: Option<SourceId>,
    /// Only of this file name.
    pub file: Option<String>,
    /// Only received at or after.
    pub since: Option<Instant>,
    /// Only after this one in the list: the last id of the page before.
    pub after: Option<String>,
    /// At most so many.
    pub limit: u32,
}

#[derive(sqlx::FromRow)]
struct Row {
    id: String,
    source: String,
    file: String,
    received_us: i64,
    digest: String,
    from_us: Option<i64>,
    to_us: Option<i64>,
    rows: i64,
    cells: i64,
    outcome: String,
    message: String,
    accepted: i64,
    repeated: i64,
    revised: i64,
    bad: i64,
    missing: i64,
    rejected: i64,
    unmapped_columns: String,
    time_zone: String,
    repeated_hour_rows: i64,
    skipped_hour_rows: i64,
    rejections: String,
    rejections_total: i64,
    changed_from: String,
    analysed: bool,
    earlier: Option<String>,
    notes: String,
}

const OUTCOMES: [(Outcome, &str); 4] = [
    (Outcome::Taken, "taken"),
    (Outcome::TakenWithFaults, "taken_with_faults"),
    (Outcome::NothingNew, "nothing_new"),
    (Outcome::NothingUsable, "nothing_usable"),
];

fn outcome_text(outcome: Outcome) -> &'static str {
    OUTCOMES.iter().find(|(o, _)| *o == outcome).map_or("", |(_, text)| text)
}

fn read_json<T: DeserializeOwned>(text: &str) -> Result<T, StoreError> {
    serde_json::from_str(text).map_err(|e| StoreError::unreadable("receipt", e))
}

fn from_row(row: Row) -> Result<Receipt, StoreError> {
    let outcome = OUTCOMES.iter().find(|(_, text)| *text == row.outcome);
    let (outcome, _) = outcome.ok_or_else(|| {
        StoreError::unreadable("receipt", std::io::Error::other(row.outcome.clone()))
    })?;
    Ok(Receipt {
        id: row.id,
        source: SourceId::new(&row.source),
        file: row.file,
        received: Instant::from_micros(row.received_us),
        digest: row.digest,
        from: row.from_us.map(Instant::from_micros),
        to: row.to_us.map(Instant::from_micros),
        rows: row.rows as u64,
        cells: row.cells as u64,
        outcome: *outcome,
        message: row.message,
        readings: Counts {
            accepted: row.accepted as u64,
            repeated: row.repeated as u64,
            revised: row.revised as u64,
            bad: row.bad as u64,
            missing: row.missing as u64,
            rejected: row.rejected as u64,
        },
        unmapped_columns: read_json(&row.unmapped_columns)?,
        time_zone: row.time_zone,
        repeated_hour_rows: row.repeated_hour_rows as u64,
        skipped_hour_rows: row.skipped_hour_rows as u64,
        rejections: read_json(&row.rejections)?,
        rejections_total: row.rejections_total as u64,
        changed_from: read_json(&row.changed_from)?,
        analysed: row.analysed,
        earlier: row.earlier,
        notes: read_json(&row.notes)?,
    })
}

/// Writes a receipt inside the transaction that stores what it speaks of.
pub(super) async fn insert(
    conn: &mut SqliteConnection,
    plant: &str,
    receipt: &Receipt,
    mapping: &str,
) -> Result<(), StoreError> {
    let counts = &receipt.readings;
    sqlx::query(INSERT)
        .bind(plant)
        .bind(receipt.id.as_str())
        .bind(receipt.source.as_str())
        .bind(mapping)
        .bind(receipt.file.as_str())
        .bind(receipt.received.micros())
        .bind(receipt.digest.as_str())
        .bind(receipt.from.map(Instant::micros))
        .bind(receipt.to.map(Instant::micros))
        .bind(receipt.rows as i64)
        .bind(receipt.cells as i64)
        .bind(outcome_text(receipt.outcome))
        .bind(receipt.message.as_str())
        .bind(counts.accepted as i64)
        .bind(counts.repeated as i64)
        .bind(counts.revised as i64)
        .bind(counts.bad as i64)
        .bind(counts.missing as i64)
        .bind(counts.rejected as i64)
        .bind(to_json(&receipt.unmapped_columns)?)
        .bind(receipt.time_zone.as_str())
        .bind(receipt.repeated_hour_rows as i64)
        .bind(receipt.skipped_hour_rows as i64)
        .bind(to_json(&receipt.rejections)?)
        .bind(receipt.rejections_total as i64)
        .bind(to_json(&receipt.changed_from)?)
        .bind(receipt.analysed)
        .bind(receipt.earlier.as_deref())
        .bind(to_json(&receipt.notes)?)
        .execute(conn)
        .await?;
    Ok(())
}

/// Sets what the analysis found, inside the transaction that stores it.
pub(super) async fn set_analysed(
    conn: &mut SqliteConnection,
    plant: &str,
    id: &str,
    changed_from: &BTreeMap<TrainId, Instant>,
    analysed: bool,
) -> Result<(), StoreError> {
    sqlx::query(SET_ANALYSED)
        .bind(plant)
        .bind(id)
        .bind(to_json(changed_from)?)
        .bind(analysed)
        .execute(conn)
        .await?;
    Ok(())
}

impl Store {
    /// The receipt of that id.
    pub async fn receipt(&self, plant: &str, id: &str) -> Result<Option<Receipt>, StoreError> {
        let row: Option<Row> =
            sqlx::query_as(BY_ID).bind(plant).bind(id).fetch_optional(&self.readers).await?;
        row.map(from_row).transpose()
    }

    /// The receipt of the same file under the same mapping.
    pub async fn receipt_by_digest(
        &self,
        plant: &str,
        source: &SourceId,
        digest: &str,
        mapping: &str,
    ) -> Result<Option<Receipt>, StoreError> {
        let row: Option<Row> = sqlx::query_as(BY_DIGEST)
            .bind(plant)
            .bind(source.as_str())
            .bind(digest)
            .bind(mapping)
            .fetch_optional(&self.readers)
            .await?;
        row.map(from_row).transpose()
    }

    /// The newest receipt of the same file under whatever mapping.
    pub async fn newest_receipt_of(
        &self,
        plant: &str,
        source: &SourceId,
        digest: &str,
    ) -> Result<Option<Receipt>, StoreError> {
        let row: Option<Row> = sqlx::query_as(NEWEST_BY_DIGEST)
            .bind(plant)
            .bind(source.as_str())
            .bind(digest)
            .fetch_optional(&self.readers)
            .await?;
        row.map(from_row).transpose()
    }

    /// Receipts, newest first.
    pub async fn receipts(
        &self,
        plant: &str,
        filter: &ReceiptFilter,
    ) -> Result<Vec<Receipt>, StoreError> {
        let rows: Vec<Row> = sqlx::query_as(LIST)
            .bind(plant)
            .bind(filter.source.as_ref().map(SourceId::as_str))
            .bind(filter.file.as_deref())
            .bind(filter.since.map(Instant::micros))
            .bind(filter.after.as_deref())
            .bind(filter.limit)
            .fetch_all(&self.readers)
            .await?;
        rows.into_iter().map(from_row).collect()
    }

    /// Ids of receipts whose analysis is not done, oldest first.
    pub async fn pending_receipts(&self, plant: &str) -> Result<Vec<String>, StoreError> {
        Ok(sqlx::query_scalar(PENDING).bind(plant).fetch_all(&self.readers).await?)
    }

    /// Sets from when each train's answers changed, and whether the analysis is done.
    pub async fn set_analysed(
        &self,
        plant: &str,
        id: &str,
        changed_from: &BTreeMap<TrainId, Instant>,
        analysed: bool,
    ) -> Result<(), StoreError> {
        let mut tx = self.write().await?;
        set_analysed(&mut tx, plant, id, changed_from, analysed).await?;
        Ok(tx.commit().await?)
    }
}
