//! Hours: stage 1.

use sqlx::{QueryBuilder, Sqlite, SqliteConnection};

use super::{at, phase_of, phase_text, reasons_of, reasons_text};
use crate::analysis::{Hour, Quality, Steady};
use crate::base::{Span, TrainId};
use crate::store::{Store, StoreError};

pub(in crate::store) const OF_TRAIN: &str = "
    SELECT * FROM hour WHERE plant = ?1 AND train = ?2 AND start_us >= ?3 AND start_us < ?4
    ORDER BY start_us LIMIT ?5";
pub(in crate::store) const CLEAR: &str =
    "DELETE FROM hour WHERE plant = ?1 AND train = ?2 AND start_us >= ?3 AND start_us < ?4";
const INTO: &str = "INSERT INTO hour (plant, train, start_us, end_us, resistance_1_m,
    resistance_min_1_m, resistance_max_1_m, flux_m_s, tmp_pa, temperature_degc,
    start_resistance_1_m, start_half_width_1_m, starts, end_tmp_max_pa, samples, expected,
    filtration_s, volume_m, mostly, quality, reasons) ";

#[derive(sqlx::FromRow)]
struct Row {
    train: String,
    start_us: i64,
    end_us: i64,
    resistance_1_m: Option<f64>,
    resistance_min_1_m: Option<f64>,
    resistance_max_1_m: Option<f64>,
    flux_m_s: Option<f64>,
    tmp_pa: Option<f64>,
    temperature_degc: Option<f64>,
    start_resistance_1_m: Option<f64>,
    start_half_width_1_m: Option<f64>,
    starts: i64,
    end_tmp_max_pa: Option<f64>,
    samples: i64,
    expected: i64,
    filtration_s: f64,
    volume_m: f64,
    mostly: String,
    quality: String,
    reasons: String,
}

fn from_row(row: Row) -> Hour {
    let steady = row.resistance_1_m.map(|resistance_1_m| Steady {
        resistance_1_m,
        resistance_min_1_m: row.resistance_min_1_m.unwrap_or(f64::NAN),
        resistance_max_1_m: row.resistance_max_1_m.unwrap_or(f64::NAN),
        flux_m_s: row.flux_m_s.unwrap_or(f64::NAN),
        tmp_pa: row.tmp_pa.unwrap_or(f64::NAN),
        temperature_degc: row.temperature_degc.unwrap_or(f64::NAN),
    });
    Hour {
        train: TrainId::new(&row.train),
        start: at(row.start_us),
        end: at(row.end_us),
        steady,
        start_resistance_1_m: row.start_resistance_1_m,
        start_half_width_1_m: row.start_half_width_1_m,
        starts: row.starts as u32,
        end_tmp_max_pa: row.end_tmp_max_pa,
        samples: row.samples as u32,
        expected: row.expected as u32,
        filtration_s: row.filtration_s,
        volume_m: row.volume_m,
        mostly: phase_of(&row.mostly),
        quality: Quality::from_code(&row.quality),
        reasons: reasons_of(&row.reasons),
    }
}

/// Adds hours that are not there.
pub(super) async fn put(
    conn: &mut SqliteConnection,
    plant: &str,
    hours: &[Hour],
) -> Result<(), StoreError> {
    for part in hours.chunks(500) {
        let mut query: QueryBuilder<Sqlite> = QueryBuilder::new(INTO);
        query.push_values(part, |mut b, h| {
            let s = h.steady.as_ref();
            b.push_bind(plant.to_owned())
                .push_bind(h.train.as_str().to_owned())
                .push_bind(h.start.micros())
                .push_bind(h.end.micros())
                .push_bind(s.map(|s| s.resistance_1_m))
                .push_bind(s.map(|s| s.resistance_min_1_m))
                .push_bind(s.map(|s| s.resistance_max_1_m))
                .push_bind(s.map(|s| s.flux_m_s))
                .push_bind(s.map(|s| s.tmp_pa))
                .push_bind(s.map(|s| s.temperature_degc))
                .push_bind(h.start_resistance_1_m)
                .push_bind(h.start_half_width_1_m)
                .push_bind(i64::from(h.starts))
                .push_bind(h.end_tmp_max_pa)
                .push_bind(i64::from(h.samples))
                .push_bind(i64::from(h.expected))
                .push_bind(h.filtration_s)
                .push_bind(h.volume_m)
                .push_bind(phase_text(h.mostly))
                .push_bind(h.quality.code())
                .push_bind(reasons_text(&h.reasons));
        });
        query.build().execute(&mut *conn).await?;
    }
    Ok(())
}

/// Hours of a day, as the transaction sees them.
pub(super) async fn of_day(
    conn: &mut SqliteConnection,
    plant: &str,
    train: &TrainId,
    day: Span,
) -> Result<Vec<Hour>, StoreError> {
    let rows: Vec<Row> = sqlx::query_as(OF_TRAIN)
        .bind(plant)
        .bind(train.as_str())
        .bind(day.from.micros())
        .bind(day.to.micros())
        .bind(u32::MAX)
        .fetch_all(conn)
        .await?;
    Ok(rows.into_iter().map(from_row).collect())
}

impl Store {
    /// Hours of a train that begin in a span, in order of time, at most `limit`.
    pub async fn hours(
        &self,
        plant: &str,
        train: &TrainId,
        span: Span,
        limit: u32,
    ) -> Result<Vec<Hour>, StoreError> {
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
}
