//! What people did to what this service said. Never altered.

use sqlx::SqliteConnection;

use super::{Store, StoreError};
use crate::base::Instant;

pub(super) const INSERT: &str = "
    INSERT INTO act (plant, id, at_us, actor, what, subject_kind, subject, reason, before_text,
        after_text)
    VALUES (?1, ?2, ?3, ?4, ?5, ?6, ?7, ?8, ?9, ?10)";
pub(super) const OF_SUBJECT: &str = "
    SELECT * FROM act WHERE plant = ?1 AND subject_kind = ?2 AND subject = ?3 ORDER BY id";
pub(super) const LIST: &str = "
    SELECT * FROM act WHERE plant = ?1 AND (?2 IS NULL OR id < ?2) ORDER BY id DESC LIMIT ?3";

/// One act of a person.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Act {
    /// Sortable id.
    pub id: String,
    /// When, by this service's clock.
    pub at: Instant,
    /// Who, as they gave their name.
    pub by: String,
    /// What they did, for example `accept`.
    pub what: String,
    /// Kind of thing they did it to, for example `recommendation`.
    pub subject_kind: String,
    /// Its id or number.
    pub subject: String,
    /// Why, in their words.
    pub reason: Option<String>,
    /// How it stood before.
    pub before: Option<String>,
    /// How it stood after.
    pub after: Option<String>,
}

#[derive(sqlx::FromRow)]
struct Row {
    id: String,
    at_us: i64,
    actor: String,
    what: String,
    subject_kind: String,
    subject: String,
    reason: Option<String>,
    before_text: Option<String>,
    after_text: Option<String>,
}

fn from_row(row: Row) -> Act {
    Act {
        id: row.id,
        at: Instant::from_micros(row.at_us),
        by: row.actor,
        what: row.what,
        subject_kind: row.subject_kind,
        subject: row.subject,
        reason: row.reason,
        before: row.before_text,
        after: row.after_text,
    }
}

/// Writes an act inside the transaction that stores what it did.
pub(super) async fn insert(
    conn: &mut SqliteConnection,
    plant: &str,
    act: &Act,
) -> Result<(), StoreError> {
    sqlx::query(INSERT)
        .bind(plant)
        .bind(act.id.as_str())
        .bind(act.at.micros())
        .bind(act.by.as_str())
        .bind(act.what.as_str())
        .bind(act.subject_kind.as_str())
        .bind(act.subject.as_str())
        .bind(act.reason.as_deref())
        .bind(act.before.as_deref())
        .bind(act.after.as_deref())
        .execute(conn)
        .await?;
    Ok(())
}

impl Store {
    /// Records an act that changed nothing else in the store.
    pub async fn save_act(&self, plant: &str, act: &Act) -> Result<(), StoreError> {
        let mut tx = self.write().await?;
        insert(&mut tx, plant, act).await?;
        Ok(tx.commit().await?)
    }

    /// What was done to one thing, in order.
    pub async fn acts_on(
        &self,
        plant: &str,
        subject_kind: &str,
        subject: &str,
    ) -> Result<Vec<Act>, StoreError> {
        let rows: Vec<Row> = sqlx::query_as(OF_SUBJECT)
            .bind(plant)
            .bind(subject_kind)
            .bind(subject)
            .fetch_all(&self.readers)
            .await?;
        Ok(rows.into_iter().map(from_row).collect())
    }

    /// All acts, newest first, after the one of id `after`, at most `limit`.
    pub async fn acts(
        &self,
        plant: &str,
        after: Option<&str>,
        limit: u32,
    ) -> Result<Vec<Act>, StoreError> {
        let rows: Vec<Row> = sqlx::query_as(LIST)
            .bind(plant)
            .bind(after)
            .bind(limit)
            .fetch_all(&self.readers)
            .await?;
        Ok(rows.into_iter().map(from_row).collect())
    }
}
