//! What trains did at their newest reading.

use sqlx::SqliteConnection;

use super::{at, phase_of, phase_text};
use crate::analysis::Now;
use crate::base::{Instant, TrainId};
use crate::store::{Store, StoreError};

pub(in crate::store) const NEWEST: &str = "
    SELECT train, phase, since_us, newest_us, codes FROM train_now
    WHERE plant = ?1 AND train = ?2 ORDER BY day_us DESC LIMIT 1";
pub(in crate::store) const CLEAR: &str =
    "DELETE FROM train_now WHERE plant = ?1 AND train = ?2 AND day_us >= ?3 AND day_us < ?4";
pub(in crate::store) const PUT: &str = "
    INSERT OR REPLACE INTO train_now (plant, train, day_us, phase, since_us, newest_us, codes)
    VALUES (?1, ?2, ?3, ?4, ?5, ?6, ?7)";

/// What a train did at its newest reading, and state codes that nobody named.
#[derive(Clone, Debug, PartialEq)]
pub struct StoredNow {
    /// What it did.
    pub now: Now,
    /// State codes that the plant file does not name.
    pub unknown_codes: Vec<String>,
}

/// Puts the row of a day in place of the one it had.
pub(super) async fn put(
    conn: &mut SqliteConnection,
    plant: &str,
    day: Instant,
    now: &Now,
    codes: &[String],
) -> Result<(), StoreError> {
    sqlx::query(PUT)
        .bind(plant)
        .bind(now.train.as_str())
        .bind(day.micros())
        .bind(phase_text(now.phase))
        .bind(now.since.micros())
        .bind(now.newest.micros())
        .bind(codes.join("\n"))
        .execute(conn)
        .await?;
    Ok(())
}

impl Store {
    /// What a train did at its newest reading.
    pub async fn train_now(
        &self,
        plant: &str,
        train: &TrainId,
    ) -> Result<Option<StoredNow>, StoreError> {
        let row: Option<(String, String, i64, i64, String)> = sqlx::query_as(NEWEST)
            .bind(plant)
            .bind(train.as_str())
            .fetch_optional(&self.readers)
            .await?;
        Ok(row.map(|(train, phase, since, newest, codes)| StoredNow {
            now: Now {
                train: TrainId::new(&train),
                phase: phase_of(&phase),
                since: at(since),
                newest: at(newest),
            },
            unknown_codes: codes.lines().map(str::to_owned).collect(),
        }))
    }
}
