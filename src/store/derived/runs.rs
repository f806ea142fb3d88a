//! Runs: stage 3.

use sqlx::SqliteConnection;

use super::{at, read_json_opt, write_json};
use crate::analysis::{Origin, Run, Verdict};
use crate::base::{Instant, TrainId};
use crate::store::{Store, StoreError};

pub(in crate::store) const OF_TRAIN: &str =
    "SELECT * FROM run WHERE plant = ?1 AND train = ?2 AND start_us < ?3 ORDER BY start_us";
pub(in crate::store) const CLEAR_FROM: &str =
    "DELETE FROM run WHERE plant = ?1 AND train = ?2 AND start_us >= ?3";
pub(in crate::store) const PUT: &str = "
    INSERT INTO run (plant, train, start_us, clean_start_us, cleaning, before_level, after_level,
        best, verdict, verdict_us, slope_1_m_per_m)
    VALUES (?1, ?2, ?3, ?4, ?5, ?6, ?7, ?8, ?9, ?10, ?11)";

#[derive(sqlx::FromRow)]
struct Row {
    train: String,
    start_us: i64,
    clean_start_us: i64,
    cleaning: Option<String>,
    before_level: Option<String>,
    after_level: Option<String>,
    best: Option<String>,
    verdict: String,
    verdict_us: Option<i64>,
    slope_1_m_per_m: Option<f64>,
}

fn from_row(row: Row) -> Result<Run, StoreError> {
    Ok(Run {
        train: TrainId::new(&row.train),
        start: at(row.start_us),
        clean_start: at(row.clean_start_us),
        origin: row.cleaning.map_or(Origin::Inferred, Origin::Recorded),
        before: read_json_opt(row.before_level.as_deref())?,
        after: read_json_opt(row.after_level.as_deref())?,
        best: read_json_opt(row.best.as_deref())?,
        verdict: Verdict::from_code(&row.verdict),
        verdict_known: row.verdict_us.map(at),
        slope_1_m_per_m: row.slope_1_m_per_m,
    })
}

/// Puts a train's runs in place of those that begin at or after a moment.
pub(super) async fn replace(
    conn: &mut SqliteConnection,
    plant: &str,
    train: &TrainId,
    from: Instant,
    runs: &[Run],
) -> Result<(), StoreError> {
    sqlx::query(CLEAR_FROM)
        .bind(plant)
        .bind(train.as_str())
        .bind(from.micros())
        .execute(&mut *conn)
        .await?;
    for run in runs.iter().filter(|r| r.start >= from) {
        let cleaning = match &run.origin {
            Origin::Recorded(id) => Some(id.as_str()),
            Origin::Inferred => None,
        };
        sqlx::query(PUT)
            .bind(plant)
            .bind(train.as_str())
            .bind(run.start.micros())
            .bind(run.clean_start.micros())
            .bind(cleaning)
            .bind(run.before.as_ref().map(write_json).transpose()?)
            .bind(run.after.as_ref().map(write_json).transpose()?)
            .bind(run.best.as_ref().map(write_json).transpose()?)
            .bind(run.verdict.code())
            .bind(run.verdict_known.map(Instant::micros))
            .bind(run.slope_1_m_per_m)
            .execute(&mut *conn)
            .await?;
    }
    Ok(())
}

impl Store {
    /// Runs of a train that begin before a moment, in order of time.
    pub async fn runs(
        &self,
        plant: &str,
        train: &TrainId,
        before: Instant,
    ) -> Result<Vec<Run>, StoreError> {
        let rows: Vec<Row> = sqlx::query_as(OF_TRAIN)
            .bind(plant)
            .bind(train.as_str())
            .bind(before.micros())
            .fetch_all(&self.readers)
            .await?;
        rows.into_iter().map(from_row).collect()
    }
}
