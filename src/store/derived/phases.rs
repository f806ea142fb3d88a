//! What trains did other than filter and backwash: stage 1.

use sqlx::{QueryBuilder, Sqlite, SqliteConnection};

use super::{at, phase_of, phase_text};
use crate::analysis::PhaseRow;
use crate::base::{Span, TrainId};
use crate::plant::Phase;
use crate::store::{Store, StoreError};

pub(in crate::store) const OF_TRAIN: &str = "
    SELECT train, start_us, end_us, phase FROM phase
    WHERE plant = ?1 AND train = ?2 AND start_us >= ?3 AND start_us < ?4
        AND (?5 IS NULL OR phase = ?5)
    ORDER BY start_us";
pub(in crate::store) const CLEAR: &str =
    "DELETE FROM phase WHERE plant = ?1 AND train = ?2 AND start_us >= ?3 AND start_us < ?4";
const INTO: &str = "INSERT INTO phase (plant, train, start_us, end_us, phase) ";

/// Adds rows that are not there.
pub(super) async fn put(
    conn: &mut SqliteConnection,
    plant: &str,
    rows: &[PhaseRow],
) -> Result<(), StoreError> {
    for part in rows.chunks(1000) {
        let mut query: QueryBuilder<Sqlite> = QueryBuilder::new(INTO);
        query.push_values(part, |mut b, r| {
            b.push_bind(plant.to_owned())
                .push_bind(r.train.as_str().to_owned())
                .push_bind(r.start.micros())
                .push_bind(r.end.micros())
                .push_bind(phase_text(r.phase));
        });
        query.build().execute(&mut *conn).await?;
    }
    Ok(())
}

impl Store {
    /// Phases of a train that begin in a span, all or of one kind, in order of time.
    pub async fn phases(
        &self,
        plant: &str,
        train: &TrainId,
        span: Span,
        kind: Option<Phase>,
    ) -> Result<Vec<PhaseRow>, StoreError> {
        let rows: Vec<(String, i64, i64, String)> = sqlx::query_as(OF_TRAIN)
            .bind(plant)
            .bind(train.as_str())
            .bind(span.from.micros())
            .bind(span.to.micros())
            .bind(kind.map(phase_text))
            .fetch_all(&self.readers)
            .await?;
        let row = |(train, start, end, phase): (String, i64, i64, String)| PhaseRow {
            train: TrainId::new(&train),
            start: at(start),
            end: at(end),
            phase: phase_of(&phase),
        };
        Ok(rows.into_iter().map(row).collect())
    }
}
