//! Findings: stage 4.

use sqlx::SqliteConnection;

use super::{at, read_json, write_json};
use crate::analysis::Finding;
use crate::base::{Instant, Span, TrainId};
use crate::store::{Store, StoreError};

pub(in crate::store) const OF_TRAIN: &str = "
    SELECT train, as_of_us, evidence FROM finding
    WHERE plant = ?1 AND train = ?2 AND day_us >= ?3 AND day_us < ?4 ORDER BY day_us, kind";
pub(in crate::store) const CLEAR: &str =
    "DELETE FROM finding WHERE plant = ?1 AND train = ?2 AND day_us = ?3";
pub(in crate::store) const PUT: &str = "
    INSERT INTO finding (plant, train, day_us, kind, as_of_us, evidence)
    VALUES (?1, ?2, ?3, ?4, ?5, ?6)";

/// Puts the findings of a day in place of those it had.
pub(super) async fn replace(
    conn: &mut SqliteConnection,
    plant: &str,
    train: &TrainId,
    day: Instant,
    findings: &[Finding],
) -> Result<(), StoreError> {
    sqlx::query(CLEAR)
        .bind(plant)
        .bind(train.as_str())
        .bind(day.micros())
        .execute(&mut *conn)
        .await?;
    for f in findings {
        sqlx::query(PUT)
            .bind(plant)
            .bind(train.as_str())
            .bind(day.micros())
            .bind(f.evidence.finding.code())
            .bind(f.as_of.micros())
            .bind(write_json(&f.evidence)?)
            .execute(&mut *conn)
            .await?;
    }
    Ok(())
}

impl Store {
    /// Findings of a train on the days of a span, in order of time.
    pub async fn findings(
        &self,
        plant: &str,
        train: &TrainId,
        span: Span,
    ) -> Result<Vec<Finding>, StoreError> {
        let rows: Vec<(String, i64, String)> = sqlx::query_as(OF_TRAIN)
            .bind(plant)
            .bind(train.as_str())
            .bind(span.from.micros())
            .bind(span.to.micros())
            .fetch_all(&self.readers)
            .await?;
        rows.into_iter()
            .map(|(train, as_of, evidence)| {
                Ok(Finding {
                    train: TrainId::new(&train),
                    as_of: at(as_of),
                    evidence: read_json(&evidence)?,
                })
            })
            .collect()
    }
}
