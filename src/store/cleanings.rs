//! Cleans that somebody recorded.

use serde::Deserialize as _;
use serde::de::value::{Error as ValueError, StrDeserializer};
use sqlx::SqliteConnection;

use super::dirty::{mark, to_json};
use super::{Store, StoreError};
use crate::base::{Instant, Span, TrainId};
use crate::plant::{Phase, Step};

pub(super) const INSERT: &str = "
    INSERT INTO cleaning (plant, id, train, start_us, end_us, kind, steps, work_order, reference,
        recorded_us, recorded_by)
    VALUES (?1, ?2, ?3, ?4, ?5, ?6, ?7, ?8, ?9, ?10, ?11)";
pub(super) const BY_ID: &str = "SELECT * FROM cleaning WHERE plant = ?1 AND id = ?2";
pub(super) const BY_REFERENCE: &str = "SELECT * FROM cleaning WHERE plant = ?1 AND reference = ?2";
pub(super) const LIST: &str = "
    SELECT * FROM cleaning
    WHERE plant = ?1 AND (?2 IS NULL OR train = ?2)
        AND (?3 IS NULL OR (end_us > ?3 AND start_us < ?4))
        AND (?5 IS NULL OR (start_us, id) < (?5, ?6))
    ORDER BY start_us DESC, id DESC LIMIT ?7";

/// A recorded clean.
#[derive(Clone, Debug, PartialEq)]
pub struct Cleaning {
    /// Sortable id.
    pub id: String,
    /// The train.
    pub train: TrainId,
    /// From start to end.
    pub span: Span,
    /// `CleanInPlace`, `MaintenanceClean` or `ChemicalBackwash`.
    pub kind: Phase,
    /// What was done, in order.
    pub steps: Vec<Step>,
    /// The work order it was done under.
    pub work_order: Option<String>,
    /// The client's own name for it, unique in the plant.
    pub reference: Option<String>,
    /// When it was recorded.
    pub recorded: Instant,
    /// By whom.
    pub by: Option<String>,
}

/// Which cleans to list.
#[derive(Clone, Debug, Default, PartialEq)]
pub struct CleaningFilter {
    /// Only of this train.
    pub train: Option<TrainId>,
    /// Only where the clean shares a moment with it.
    pub span: Option<Span>,
    /// Only after this one in the list: start and id of the last of the page before.
    pub after: Option<(Instant, String)>,
    /// At most so many.
    pub limit: u32,
}

#[derive(sqlx::FromRow)]
struct Row {
    id: String,
    train: String,
    start_us: i64,
    end_us: i64,
    kind: String,
    steps: String,
    work_order: Option<String>,
    reference: Option<String>,
    recorded_us: i64,
    recorded_by: Option<String>,
}

fn from_row(row: Row) -> Result<Cleaning, StoreError> {
    let wrong = |e| StoreError::unreadable("cleaning", e);
    Ok(Cleaning {
        id: row.id,
        train: TrainId::new(&row.train),
        span: Span::new(Instant::from_micros(row.start_us), Instant::from_micros(row.end_us)),
        kind: Phase::deserialize(StrDeserializer::<ValueError>::new(&row.kind))
            .map_err(|e| StoreError::unreadable("cleaning", e))?,
        steps: serde_json::from_str(&row.steps).map_err(wrong)?,
        work_order: row.work_order,
        reference: row.reference,
        recorded: Instant::from_micros(row.recorded_us),
        by: row.recorded_by,
    })
}

/// Records a clean inside a transaction under way, and marks the plant days that have to be
/// worked again for it.
pub(super) async fn insert(
    conn: &mut SqliteConnection,
    plant: &str,
    cleaning: &Cleaning,
    dirty: &[(TrainId, Instant)],
) -> Result<(), StoreError> {
    let kind = to_json(&cleaning.kind)?;
    sqlx::query(INSERT)
        .bind(plant)
        .bind(cleaning.id.as_str())
        .bind(cleaning.train.as_str())
        .bind(cleaning.span.from.micros())
        .bind(cleaning.span.to.micros())
        .bind(kind.trim_matches('"'))
        .bind(to_json(&cleaning.steps)?)
        .bind(cleaning.work_order.as_deref())
        .bind(cleaning.reference.as_deref())
        .bind(cleaning.recorded.micros())
        .bind(cleaning.by.as_deref())
        .execute(&mut *conn)
        .await?;
    mark(conn, plant, dirty).await
}

impl Store {
    /// Records a clean, and marks the plant days that have to be worked again for it.
    ///
    /// # Errors
    /// [`StoreError::Exists`] if its reference is taken.
    pub async fn save_cleaning(
        &self,
        plant: &str,
        cleaning: &Cleaning,
        dirty: &[(TrainId, Instant)],
    ) -> Result<(), StoreError> {
        let mut tx = self.write().await?;
        insert(&mut tx, plant, cleaning, dirty).await?;
        Ok(tx.commit().await?)
    }

    /// The recorded clean of that id.
    pub async fn cleaning(&self, plant: &str, id: &str) -> Result<Option<Cleaning>, StoreError> {
        let row: Option<Row> =
            sqlx::query_as(BY_ID).bind(plant).bind(id).fetch_optional(&self.readers).await?;
        row.map(from_row).transpose()
    }

    /// The recorded clean of a client's own reference.
    pub async fn cleaning_by_reference(
        &self,
        plant: &str,
        reference: &str,
    ) -> Result<Option<Cleaning>, StoreError> {
        let row: Option<Row> = sqlx::query_as(BY_REFERENCE)
            .bind(plant)
            .bind(reference)
            .fetch_optional(&self.readers)
            .await?;
        row.map(from_row).transpose()
    }

    /// Recorded cleans, latest start first.
    pub async fn cleanings(
        &self,
        plant: &str,
        filter: &CleaningFilter,
    ) -> Result<Vec<Cleaning>, StoreError> {
        let after = filter.after.as_ref();
        let rows: Vec<Row> = sqlx::query_as(LIST)
            .bind(plant)
            .bind(filter.train.as_ref().map(TrainId::as_str))
            .bind(filter.span.map(|s| s.from.micros()))
            .bind(filter.span.map(|s| s.to.micros()))
            .bind(after.map(|(start, _)| start.micros()))
            .bind(after.map(|(_, id)| id.as_str()))
            .bind(filter.limit)
            .fetch_all(&self.readers)
            .await?;
        rows.into_iter().map(from_row).collect()
    }
}
