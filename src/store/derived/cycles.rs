//! Filtration cycles: stage 1.

use sqlx::{QueryBuilder, Sqlite, SqliteConnection};

use super::{at, finite, phase_of, phase_text};
use crate::analysis::{Cycle, Reason};
use crate::base::{Span, TrainId};
use crate::store::{Store, StoreError};

pub(in crate::store) const OF_TRAIN: &str = "
    SELECT * FROM cycle WHERE plant = ?1 AND train = ?2 AND start_us >= ?3 AND start_us < ?4
    ORDER BY start_us LIMIT ?5";
// A cycle is decided at most half a day and a bit after its start: the key bounds the search.
pub(in crate::store) const OF_DAY: &str = "
    SELECT * FROM cycle WHERE plant = ?1 AND train = ?2 AND start_us >= ?3 - 172800000000
        AND start_us < ?4 AND decided_us >= ?3 AND decided_us < ?4 ORDER BY start_us";
pub(in crate::store) const CLEAR: &str = "
    DELETE FROM cycle WHERE plant = ?1 AND train = ?2 AND start_us >= ?5
        AND start_us < ?4 AND decided_us >= ?3 AND decided_us < ?4";
const INTO: &str =
    "INSERT OR REPLACE INTO cycle (plant, train, start_us, end_us, decided_us, volume_m,
    flux_m_s, temperature_degc, start_resistance_1_m, start_half_width_1_m, end_resistance_1_m,
    end_tmp_pa, taken_off_before_1_m, preceded_by, followed_by, left_out) ";

#[derive(sqlx::FromRow)]
struct Row {
    train: String,
    start_us: i64,
    end_us: i64,
    decided_us: i64,
    volume_m: f64,
    flux_m_s: Option<f64>,
    temperature_degc: Option<f64>,
    start_resistance_1_m: Option<f64>,
    start_half_width_1_m: Option<f64>,
    end_resistance_1_m: Option<f64>,
    end_tmp_pa: Option<f64>,
    taken_off_before_1_m: Option<f64>,
    preceded_by: Option<String>,
    followed_by: Option<String>,
    left_out: Option<String>,
}

fn from_row(row: Row) -> Cycle {
    Cycle {
        train: TrainId::new(&row.train),
        start: at(row.start_us),
        end: at(row.end_us),
        decided: at(row.decided_us),
        volume_m: row.volume_m,
        flux_m_s: row.flux_m_s.unwrap_or(f64::NAN),
        temperature_degc: row.temperature_degc.unwrap_or(f64::NAN),
        start_resistance_1_m: row.start_resistance_1_m,
        start_half_width_1_m: row.start_half_width_1_m,
        end_resistance_1_m: row.end_resistance_1_m,
        end_tmp_pa: row.end_tmp_pa,
        taken_off_before_1_m: row.taken_off_before_1_m,
        preceded_by: row.preceded_by.as_deref().map(phase_of),
        followed_by: row.followed_by.as_deref().map(phase_of),
        left_out: row.left_out.as_deref().and_then(Reason::from_code),
    }
}

/// Adds cycles.
pub(super) async fn put(
    conn: &mut SqliteConnection,
    plant: &str,
    cycles: &[Cycle],
) -> Result<(), StoreError> {
    for part in cycles.chunks(500) {
        let mut query: QueryBuilder<Sqlite> = QueryBuilder::new(INTO);
        query.push_values(part, |mut b, c| {
            b.push_bind(plant.to_owned())
                .push_bind(c.train.as_str().to_owned())
                .push_bind(c.start.micros())
                .push_bind(c.end.micros())
                .push_bind(c.decided.micros())
                .push_bind(c.volume_m)
                .push_bind(finite(c.flux_m_s))
                .push_bind(finite(c.temperature_degc))
                .push_bind(c.start_resistance_1_m)
                .push_bind(c.start_half_width_1_m)
                .push_bind(c.end_resistance_1_m)
                .push_bind(c.end_tmp_pa)
                .push_bind(c.taken_off_before_1_m)
                .push_bind(c.preceded_by.map(phase_text))
                .push_bind(c.followed_by.map(phase_text))
                .push_bind(c.left_out.map(Reason::code));
        });
        query.build().execute(&mut *conn).await?;
    }
    Ok(())
}

/// Cycles decided in a day.
pub(super) async fn of_day(
    conn: &mut SqliteConnection,
    plant: &str,
    train: &TrainId,
    day: Span,
) -> Result<Vec<Cycle>, StoreError> {
    let rows: Vec<Row> = sqlx::query_as(OF_DAY)
        .bind(plant)
        .bind(train.as_str())
        .bind(day.from.micros())
        .bind(day.to.micros())
        .fetch_all(conn)
        .await?;
    Ok(rows.into_iter().map(from_row).collect())
}

impl Store {
    /// Cycles of a train that begin in a span, in order of time, at most `limit`.
    pub async fn cycles(
        &self,
        plant: &str,
        train: &TrainId,
        span: Span,
        limit: u32,
    ) -> Result<Vec<Cycle>, StoreError> {
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
