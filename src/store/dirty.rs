//! Days whose derived rows are older than their facts: work still to do.

use sqlx::SqliteConnection;

use super::{Store, StoreError};
use crate::base::{Instant, TrainId};

pub(super) const MARK: &str = "
    INSERT INTO dirty (plant, train, day_start_us, mark)
    SELECT ?1, value ->> 0, value ->> 1, 1 FROM json_each(?2) WHERE true
    ON CONFLICT (plant, train, day_start_us) DO UPDATE SET mark = mark + 1";
pub(super) const LIST: &str = "
    SELECT train, day_start_us, mark FROM dirty WHERE plant = ?1 ORDER BY day_start_us, train";
pub(super) const CLEAR: &str = "
    DELETE FROM dirty WHERE plant = ?1 AND (train, day_start_us, mark) IN
        (SELECT value ->> 0, value ->> 1, value ->> 2 FROM json_each(?2))";

/// A plant day of a train that has to be worked again.
#[derive(Clone, Debug, PartialEq, Eq, PartialOrd, Ord)]
pub struct DirtyDay {
    /// Start of the plant day.
    pub day_start: Instant,
    /// The train.
    pub train: TrainId,
    /// Grows with every new reason: clearing with an older mark leaves the day dirty.
    pub mark: i64,
}

/// Marks days inside a transaction under way.
pub(super) async fn mark(
    conn: &mut SqliteConnection,
    plant: &str,
    days: &[(TrainId, Instant)],
) -> Result<(), StoreError> {
    if days.is_empty() {
        return Ok(());
    }
    let days = to_json(&days.iter().map(|(t, d)| (t.as_str(), d.micros())).collect::<Vec<_>>())?;
    sqlx::query(MARK).bind(plant).bind(days).execute(conn).await?;
    Ok(())
}

/// Clears days inside the transaction that stores what was worked out for them.
pub(super) async fn clear(
    conn: &mut SqliteConnection,
    plant: &str,
    days: &[DirtyDay],
) -> Result<(), StoreError> {
    let days: Vec<_> =
        days.iter().map(|d| (d.train.as_str(), d.day_start.micros(), d.mark)).collect();
    sqlx::query(CLEAR).bind(plant).bind(to_json(&days)?).execute(conn).await?;
    Ok(())
}

/// JSON text of plain keys, for `json_each`.
pub(super) fn to_json<T: serde::Serialize + ?Sized>(keys: &T) -> Result<String, StoreError> {
    serde_json::to_string(keys).map_err(|e| StoreError::unreadable("key", e))
}

impl Store {
    /// Days that have to be worked again, oldest first.
    pub async fn dirty_days(&self, plant: &str) -> Result<Vec<DirtyDay>, StoreError> {
        let rows: Vec<(String, i64, i64)> =
            sqlx::query_as(LIST).bind(plant).fetch_all(&self.readers).await?;
        let day = |(train, us, mark): (String, i64, i64)| DirtyDay {
            day_start: Instant::from_micros(us),
            train: TrainId::new(&train),
            mark,
        };
        Ok(rows.into_iter().map(day).collect())
    }

    /// Marks days for work: after a fact other than readings was told, or all of them for a
    /// rebuild.
    pub async fn mark_dirty(
        &self,
        plant: &str,
        days: &[(TrainId, Instant)],
    ) -> Result<(), StoreError> {
        let mut tx = self.write().await?;
        mark(&mut tx, plant, days).await?;
        Ok(tx.commit().await?)
    }

    /// Clears days that were worked with those marks. A day marked again since stays.
    pub async fn clear_dirty(&self, plant: &str, days: &[DirtyDay]) -> Result<(), StoreError> {
        let mut tx = self.write().await?;
        clear(&mut tx, plant, days).await?;
        Ok(tx.commit().await?)
    }
}
