//! The plant file, each time its content became another one.

use super::{Store, StoreError};
use crate::base::Instant;

// Only where the newest one means something else: a file that goes back to what it was is a
// change, and a new comment is none.
pub(super) const INSERT: &str = "
    INSERT INTO plant_file (plant, revision, mapping, content, seen_us)
    SELECT ?1, ?2, ?3, ?4, ?5 WHERE ?2 IS NOT (
        SELECT revision FROM plant_file WHERE plant = ?1 ORDER BY seq DESC LIMIT 1)";
pub(super) const LATEST: &str =
    "SELECT * FROM plant_file WHERE plant = ?1 ORDER BY seq DESC LIMIT 1";
pub(super) const BY_REVISION: &str = "
    SELECT * FROM plant_file WHERE plant = ?1 AND revision = ?2 ORDER BY seq DESC LIMIT 1";

/// A plant file as it was read.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct PlantFile {
    /// Hex SHA-256 of the parsed content.
    pub revision: String,
    /// Hex SHA-256 of what decides how an export is read.
    pub mapping: String,
    /// The text.
    pub content: String,
    /// When it was first read in this form.
    pub seen: Instant,
}

#[derive(sqlx::FromRow)]
struct Row {
    revision: String,
    mapping: String,
    content: String,
    seen_us: i64,
}

fn from_row(row: Row) -> PlantFile {
    PlantFile {
        revision: row.revision,
        mapping: row.mapping,
        content: row.content,
        seen: Instant::from_micros(row.seen_us),
    }
}

impl Store {
    /// Keeps a plant file, and says whether it is another one than the newest kept.
    pub async fn save_plant_file(&self, plant: &str, file: &PlantFile) -> Result<bool, StoreError> {
        let mut tx = self.write().await?;
        let done = sqlx::query(INSERT)
            .bind(plant)
            .bind(file.revision.as_str())
            .bind(file.mapping.as_str())
            .bind(file.content.as_str())
            .bind(file.seen.micros())
            .execute(&mut *tx)
            .await?;
        tx.commit().await?;
        Ok(done.rows_affected() > 0)
    }

    /// The newest plant file kept.
    pub async fn latest_plant_file(&self, plant: &str) -> Result<Option<PlantFile>, StoreError> {
        let row: Option<Row> =
            sqlx::query_as(LATEST).bind(plant).fetch_optional(&self.readers).await?;
        Ok(row.map(from_row))
    }

    /// The plant file of a revision that an answer names.
    pub async fn plant_file(
        &self,
        plant: &str,
        revision: &str,
    ) -> Result<Option<PlantFile>, StoreError> {
        let row: Option<Row> = sqlx::query_as(BY_REVISION)
            .bind(plant)
            .bind(revision)
            .fetch_optional(&self.readers)
            .await?;
        Ok(row.map(from_row))
    }
}
