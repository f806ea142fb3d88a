//! Copies, checks, and what the daemon says of its database.

use std::ffi::OsString;
use std::io;
use std::path::{Path, PathBuf};

use super::{BEGIN_WRITE, Store, StoreError, connect, pool};
use crate::base::Instant;

pub(super) const MIGRATION: &str =
    "SELECT coalesce(max(version), 0) FROM _sqlx_migrations WHERE success";
pub(super) const PROBE: &str = "
    INSERT INTO write_probe (one, at_us) VALUES (1, ?1)
    ON CONFLICT (one) DO UPDATE SET at_us = excluded.at_us";
pub(super) const COPY: &str = "VACUUM INTO ?1";
pub(super) const QUICK_CHECK: &str = "PRAGMA quick_check(20)";
pub(super) const FULL_CHECK: &str = "PRAGMA integrity_check(20)";
pub(super) const BYTES: &str =
    "SELECT page_count * page_size FROM pragma_page_count(), pragma_page_size()";

impl Store {
    /// The newest migration of the database.
    pub async fn migration(&self) -> Result<i64, StoreError> {
        Ok(sqlx::query_scalar(MIGRATION).fetch_one(&self.readers).await?)
    }

    /// Size of the database in bytes, its log not counted.
    pub async fn bytes(&self) -> Result<u64, StoreError> {
        let bytes: i64 = sqlx::query_scalar(BYTES).fetch_one(&self.readers).await?;
        Ok(bytes as u64)
    }

    /// Whether the database can be read and written now, by doing both. A write of this process
    /// under way counts as being able to write; the check does not wait for it.
    pub async fn check(&self, now: Instant) -> Result<(), StoreError> {
        self.migration().await?;
        let writer = self.writer.as_ref().ok_or(StoreError::ReadOnly)?;
        if let Some(mut tx) = writer.try_begin_with(BEGIN_WRITE).await? {
            sqlx::query(PROBE).bind(now.micros()).execute(&mut *tx).await?;
            tx.commit().await?;
        }
        Ok(())
    }

    /// What is wrong with the database file, in SQLite's words; empty where nothing is. Reads
    /// all of it.
    pub async fn faults(&self) -> Result<Vec<String>, StoreError> {
        let lines: Vec<String> = sqlx::query_scalar(QUICK_CHECK).fetch_all(&self.readers).await?;
        Ok(lines.into_iter().filter(|l| l != "ok").collect())
    }

    /// Writes a consistent, checked copy of the live database; one that is there is replaced
    /// once the new one is complete. Returns its size in bytes.
    ///
    /// # Errors
    /// If the copy cannot be written or does not pass its check; nothing is left of it then.
    pub async fn backup(&self, target: &Path) -> Result<u64, StoreError> {
        let part = beside(target);
        let done = self.copy_checked(&part, target).await;
        if done.is_err() {
            // What was wrong is said already; the rest of a copy is only in the way.
            let _ = tokio::fs::remove_file(&part).await;
        }
        done
    }

    async fn copy_checked(&self, part: &Path, target: &Path) -> Result<u64, StoreError> {
        let at = |path: &Path| {
            let path = path.to_owned();
            move |source| StoreError::File { path, source }
        };
        let name = part.to_str().ok_or_else(|| io::Error::other("its name is not UTF-8"));
        let name = name.map_err(at(target))?;
        sqlx::query(COPY).bind(name).execute(&self.readers).await?;

        let copy = pool(1, std::time::Duration::from_secs(30))
            .connect_with(connect(part).read_only(true))
            .await?;
        let lines: Vec<String> = sqlx::query_scalar(FULL_CHECK).fetch_all(&copy).await?;
        copy.close().await;
        if lines.iter().any(|l| l != "ok") {
            return Err(StoreError::Corrupt(lines.join("; ").into()));
        }
        let file = tokio::fs::File::open(part).await.map_err(at(part))?;
        file.sync_all().await.map_err(at(part))?;
        let bytes = file.metadata().await.map_err(at(part))?.len();
        tokio::fs::rename(part, target).await.map_err(at(target))?;
        // The new name, too, has to outlive a power cut.
        let folder = target.parent().filter(|p| !p.as_os_str().is_empty());
        let folder = folder.unwrap_or(Path::new("."));
        let folder_file = tokio::fs::File::open(folder).await.map_err(at(folder))?;
        folder_file.sync_all().await.map_err(at(folder))?;
        Ok(bytes)
    }
}

/// A name of its own in the same folder, so that renaming is one step.
fn beside(target: &Path) -> PathBuf {
    let mut name = OsString::from(target.as_os_str());
    name.push(format!(".{}.part", super::new_id()));
    PathBuf::from(name)
}
