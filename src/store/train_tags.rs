//! Which tag is what of which train, as the plant file has it: what the views of minutes join
//! readings to trains by. Nothing in here is a fact; the plant file is.

use sqlx::SqliteConnection;

use super::{Store, StoreError};
use crate::base::Instant;
use crate::plant::{Plant, Role, Signal, Train};

pub(super) const CLEAR: [&str; 3] = [
    "DELETE FROM train_tag WHERE plant = ?1",
    "DELETE FROM train_area WHERE plant = ?1",
    "DELETE FROM train_state WHERE plant = ?1",
];
pub(super) const PUT_TAG: &str = "
    INSERT INTO train_tag (plant, train, role, source, tag, from_us, to_us, factor, \"offset\",
        pressure, elevation_m)
    VALUES (?1, ?2, ?3, ?4, ?5, ?6, ?7, ?8, ?9, ?10, ?11)";
pub(super) const PUT_AREA: &str = "
    INSERT INTO train_area (plant, train, from_us, to_us, area_m2) VALUES (?1, ?2, ?3, ?4, ?5)";
// Of a code written twice the first counts, as it does where states are read.
pub(super) const PUT_STATE: &str = "
    INSERT OR IGNORE INTO train_state (plant, train, code, from_us, to_us, phase)
    VALUES (?1, ?2, ?3, ?4, ?5, ?6)";

const ALWAYS: Instant = Instant::from_micros(i64::MIN);
const STILL: Instant = Instant::from_micros(i64::MAX);

impl Store {
    /// Puts the tags, areas and state codes of a plant file in place of those there were.
    pub async fn save_train_tags(&self, plant: &Plant) -> Result<(), StoreError> {
        let mut tx = self.write().await?;
        for statement in CLEAR {
            sqlx::query(statement).bind(plant.id.as_str()).execute(&mut *tx).await?;
        }
        for train in &plant.trains {
            for role in Role::all() {
                let signals: Vec<&Signal> = train.signals_of(role).collect();
                for (i, signal) in signals.iter().enumerate() {
                    let to = signals.get(i + 1).map_or(STILL, |next| next.from);
                    // Two may begin at once where meters are shared: the later one counts.
                    if signal.from >= to {
                        continue;
                    }
                    put_tag(&mut tx, &plant.id, train, signal, to).await?;
                    put_states(&mut tx, &plant.id, train, signal, to).await?;
                }
            }
            put_areas(&mut tx, &plant.id, train).await?;
        }
        Ok(tx.commit().await?)
    }
}

async fn put_tag(
    conn: &mut SqliteConnection,
    plant: &str,
    train: &Train,
    signal: &Signal,
    to: Instant,
) -> Result<(), StoreError> {
    let referred = signal.role.is_referred_pressure();
    sqlx::query(PUT_TAG)
        .bind(plant)
        .bind(train.id.as_str())
        .bind(signal.role.word())
        .bind(signal.source.as_str())
        .bind(signal.tag.as_str())
        .bind(signal.from.micros())
        .bind(to.micros())
        .bind(signal.unit.map_or(1.0, |u| u.factor))
        .bind(signal.unit.map_or(0.0, |u| u.offset))
        .bind(referred.then(|| signal.pressure.word()))
        .bind(signal.elevation_m)
        .execute(conn)
        .await?;
    Ok(())
}

/// Codes as the view writes what it read: a number in its shortest form, a word trimmed.
async fn put_states(
    conn: &mut SqliteConnection,
    plant: &str,
    train: &Train,
    signal: &Signal,
    to: Instant,
) -> Result<(), StoreError> {
    for (code, phase) in &signal.states {
        let word = code.trim();
        let code = word.parse::<f64>().map_or_else(|_| word.to_owned(), |n| n.to_string());
        sqlx::query(PUT_STATE)
            .bind(plant)
            .bind(train.id.as_str())
            .bind(code)
            .bind(signal.from.micros())
            .bind(to.micros())
            .bind(phase.word())
            .execute(&mut *conn)
            .await?;
    }
    Ok(())
}

async fn put_areas(
    conn: &mut SqliteConnection,
    plant: &str,
    train: &Train,
) -> Result<(), StoreError> {
    for (i, area) in train.area_m2.iter().enumerate() {
        // The first one stands for the time before it too, as in `Train::area_at`.
        let from = if i == 0 { ALWAYS } else { area.from };
        let to = train.area_m2.get(i + 1).map_or(STILL, |next| next.from);
        sqlx::query(PUT_AREA)
            .bind(plant)
            .bind(train.id.as_str())
            .bind(from.micros())
            .bind(to.micros())
            .bind(area.value)
            .execute(&mut *conn)
            .await?;
    }
    Ok(())
}
