//! Assessments: stage 3.

use sqlx::SqliteConnection;

use super::{at, read_json, read_json_opt, write_json};
use crate::analysis::{Assessment, GrowthFrom};
use crate::base::{Instant, TrainId};
use crate::store::{Store, StoreError};

pub(in crate::store) const BEFORE: &str = "
    SELECT * FROM (
        SELECT * FROM assessment WHERE plant = ?1 AND train = ?2 AND day_us < ?3
        ORDER BY day_us DESC LIMIT ?4
    ) ORDER BY day_us";
pub(in crate::store) const CLEAR: &str =
    "DELETE FROM assessment WHERE plant = ?1 AND train = ?2 AND day_us = ?3";
pub(in crate::store) const PUT: &str = "
    INSERT INTO assessment (plant, train, day_us, as_of_us, run_start_us, run_days, baseline, trend,
        growth, growth_from, temperature_degc, holds, dates)
    VALUES (?1, ?2, ?3, ?4, ?5, ?6, ?7, ?8, ?9, ?10, ?11, ?12, ?13)";

#[derive(sqlx::FromRow)]
struct Row {
    train: String,
    day_us: i64,
    as_of_us: i64,
    run_start_us: Option<i64>,
    run_days: i64,
    baseline: Option<String>,
    trend: Option<String>,
    growth: Option<String>,
    growth_from: Option<String>,
    temperature_degc: Option<f64>,
    holds: String,
    dates: String,
}

fn from_row(row: Row) -> Result<Assessment, StoreError> {
    Ok(Assessment {
        train: TrainId::new(&row.train),
        day: at(row.day_us),
        as_of: at(row.as_of_us),
        run_start: row.run_start_us.map(at),
        baseline: read_json_opt(row.baseline.as_deref())?,
        run_days: row.run_days as u32,
        trend: read_json_opt(row.trend.as_deref())?,
        growth: read_json_opt(row.growth.as_deref())?,
        growth_from: row.growth_from.as_deref().and_then(GrowthFrom::from_code),
        temperature_degc: row.temperature_degc,
        holds: read_json(&row.holds)?,
        dates: read_json(&row.dates)?,
    })
}

/// Puts an assessment in place of the one of its day.
pub(super) async fn put(
    conn: &mut SqliteConnection,
    plant: &str,
    a: &Assessment,
) -> Result<(), StoreError> {
    sqlx::query(CLEAR)
        .bind(plant)
        .bind(a.train.as_str())
        .bind(a.day.micros())
        .execute(&mut *conn)
        .await?;
    sqlx::query(PUT)
        .bind(plant)
        .bind(a.train.as_str())
        .bind(a.day.micros())
        .bind(a.as_of.micros())
        .bind(a.run_start.map(Instant::micros))
        .bind(i64::from(a.run_days))
        .bind(a.baseline.as_ref().map(write_json).transpose()?)
        .bind(a.trend.as_ref().map(write_json).transpose()?)
        .bind(a.growth.as_ref().map(write_json).transpose()?)
        .bind(a.growth_from.map(GrowthFrom::code))
        .bind(a.temperature_degc)
        .bind(write_json(&a.holds)?)
        .bind(write_json(&a.dates)?)
        .execute(conn)
        .await?;
    Ok(())
}

impl Store {
    /// The last `n` assessments of a train of days that begin before a moment, in order of time.
    pub async fn assessments_before(
        &self,
        plant: &str,
        train: &TrainId,
        before: Instant,
        n: u32,
    ) -> Result<Vec<Assessment>, StoreError> {
        let rows: Vec<Row> = sqlx::query_as(BEFORE)
            .bind(plant)
            .bind(train.as_str())
            .bind(before.micros())
            .bind(n)
            .fetch_all(&self.readers)
            .await?;
        rows.into_iter().map(from_row).collect()
    }
}
