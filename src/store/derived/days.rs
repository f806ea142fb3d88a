//! Plant days: stage 2.

use sqlx::SqliteConnection;

use super::{at, reasons_of, reasons_text};
use crate::analysis::{Day, Quality};
use crate::base::{Instant, Span, TrainId};
use crate::store::dirty::to_json;
use crate::store::{Store, StoreError};

pub(in crate::store) const OF_TRAIN: &str = "
    SELECT * FROM (
        SELECT * FROM day WHERE plant = ?1 AND train = ?2 AND start_us >= ?3 AND start_us < ?4
        ORDER BY start_us DESC LIMIT ?5
    ) ORDER BY start_us";
// By train, because the key is: a bound on the start alone would read every day there is.
pub(in crate::store) const STARTS: &str = "
    SELECT DISTINCT d.start_us FROM json_each(?2) AS k CROSS JOIN day AS d
    WHERE d.plant = ?1 AND d.train = k.value AND d.start_us >= ?3 ORDER BY d.start_us";
pub(in crate::store) const CLEAR: &str =
    "DELETE FROM day WHERE plant = ?1 AND train = ?2 AND start_us >= ?3 AND start_us < ?4";
pub(in crate::store) const PUT: &str =
    "INSERT OR REPLACE INTO day (plant, train, start_us, end_us, resistance_1_m,
    half_width_1_m, start_hours, coarse, steady_resistance_1_m, flux_m_s, temperature_degc,
    end_tmp_max_pa, end_tmp_pa, laid_down_1_m, taken_off_1_m, volume_m, filtration_s, coverage,
    cycles, cycles_left_out, quality, reasons)
    VALUES (?1, ?2, ?3, ?4, ?5, ?6, ?7, ?8, ?9, ?10, ?11, ?12, ?13, ?14, ?15, ?16, ?17, ?18, ?19,
        ?20, ?21, ?22)";

#[derive(sqlx::FromRow)]
struct Row {
    train: String,
    start_us: i64,
    end_us: i64,
    resistance_1_m: Option<f64>,
    half_width_1_m: Option<f64>,
    start_hours: i64,
    coarse: bool,
    steady_resistance_1_m: Option<f64>,
    flux_m_s: Option<f64>,
    temperature_degc: Option<f64>,
    end_tmp_max_pa: Option<f64>,
    end_tmp_pa: Option<f64>,
    laid_down_1_m: Option<f64>,
    taken_off_1_m: Option<f64>,
    volume_m: f64,
    filtration_s: f64,
    coverage: f64,
    cycles: i64,
    cycles_left_out: i64,
    quality: String,
    reasons: String,
}

fn from_row(row: Row) -> Day {
    Day {
        train: TrainId::new(&row.train),
        start: at(row.start_us),
        end: at(row.end_us),
        resistance_1_m: row.resistance_1_m,
        half_width_1_m: row.half_width_1_m,
        start_hours: row.start_hours as u32,
        coarse: row.coarse,
        steady_resistance_1_m: row.steady_resistance_1_m,
        flux_m_s: row.flux_m_s,
        temperature_degc: row.temperature_degc,
        end_tmp_max_pa: row.end_tmp_max_pa,
        end_tmp_pa: row.end_tmp_pa,
        laid_down_1_m: row.laid_down_1_m,
        taken_off_1_m: row.taken_off_1_m,
        volume_m: row.volume_m,
        filtration_s: row.filtration_s,
        coverage: row.coverage,
        cycles: row.cycles as u32,
        cycles_left_out: row.cycles_left_out as u32,
        quality: Quality::from_code(&row.quality),
        reasons: reasons_of(&row.reasons),
    }
}

/// Puts a day in place of the one it was.
pub(super) async fn put(
    conn: &mut SqliteConnection,
    plant: &str,
    day: &Day,
) -> Result<(), StoreError> {
    sqlx::query(PUT)
        .bind(plant)
        .bind(day.train.as_str())
        .bind(day.start.micros())
        .bind(day.end.micros())
        .bind(day.resistance_1_m)
        .bind(day.half_width_1_m)
        .bind(i64::from(day.start_hours))
        .bind(day.coarse)
        .bind(day.steady_resistance_1_m)
        .bind(day.flux_m_s)
        .bind(day.temperature_degc)
        .bind(day.end_tmp_max_pa)
        .bind(day.end_tmp_pa)
        .bind(day.laid_down_1_m)
        .bind(day.taken_off_1_m)
        .bind(day.volume_m)
        .bind(day.filtration_s)
        .bind(day.coverage)
        .bind(i64::from(day.cycles))
        .bind(i64::from(day.cycles_left_out))
        .bind(day.quality.code())
        .bind(reasons_text(&day.reasons))
        .execute(conn)
        .await?;
    Ok(())
}

impl Store {
    /// The last `limit` days of a train that begin in a span, in order of time.
    pub async fn days(
        &self,
        plant: &str,
        train: &TrainId,
        span: Span,
        limit: u32,
    ) -> Result<Vec<Day>, StoreError> {
        let rows: Vec<Row> = sqlx::query_as(OF_TRAIN)
            .bind(plant)
            .bind(train.as_str())
            .bind(span.from.micros())
            .bind(span.to.micros())
            .bind(limit)
            .fetch_all(&self.readers)
            .await?;
        Ok(rows.into_iter().map(from_row).collect())
    }

    /// Starts of the plant days from a moment on that have rows of any of the trains.
    pub async fn day_starts(
        &self,
        plant: &str,
        trains: &[&TrainId],
        from: Instant,
    ) -> Result<Vec<Instant>, StoreError> {
        let trains: Vec<&str> = trains.iter().map(|t| t.as_str()).collect();
        let rows: Vec<i64> = sqlx::query_scalar(STARTS)
            .bind(plant)
            .bind(to_json(&trains)?)
            .bind(from.micros())
            .fetch_all(&self.readers)
            .await?;
        Ok(rows.into_iter().map(at).collect())
    }
}
