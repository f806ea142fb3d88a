//! Floor 8: the only place that knows SQL. One SQLite file holds a plant's facts; what is
//! worked out from them stands beside them. One method is one unit of work, takes the plant
//! first, and names no type of the engine.
//!
//! One connection writes, a few read. A file beside the database is locked while it is open,
//! so that a second process is told so instead of waiting for ever.
//!
//! Migrations are taken in when this file is compiled: after adding one, touch it.

mod acts;
mod chunk;
mod cleanings;
mod derived;
mod dirty;
mod error;
mod history;
mod intake;
mod merge;
mod plant_files;
mod readings;
mod receipts;
mod revisions;
#[cfg(test)]
mod tests;
mod train_tags;
mod upkeep;

use std::fs::{File, TryLockError};
use std::path::{Path, PathBuf};
use std::sync::Arc;
use std::time::Duration;

use sqlx::migrate::Migrator;
use sqlx::sqlite::{
    SqliteConnectOptions, SqliteJournalMode, SqlitePool, SqlitePoolOptions, SqliteSynchronous,
};
use sqlx::{ConnectOptions, Sqlite, Transaction};

pub use acts::Act;
pub use chunk::{ChunkError, decode, encode};
pub use cleanings::{Cleaning, CleaningFilter};
pub use derived::{Changes, StoredNow};
pub use dirty::DirtyDay;
pub use error::StoreError;
pub use history::{Entry, HistoryEntry, ItemFilter, ItemKind, Said};
pub use intake::{Intake, MergeOutcome};
pub use merge::{Merged, Revision, merge};
pub use plant_files::PlantFile;
pub use receipts::ReceiptFilter;
pub use revisions::{StoredRevision, StoredValue};

static MIGRATIONS: Migrator = sqlx::migrate!("./migrations");

/// The version from which resetting a write-ahead log is safe, <https://www.sqlite.org/wal.html>.
const SQLITE_OLDEST: (u32, u32, u32) = (3, 51, 3);
/// How long one write may wait for another: a big import or a rebuild is one transaction.
const WRITER_WAIT: Duration = Duration::from_secs(600);
/// How long to wait for another process, a shell for example.
const BUSY_WAIT: Duration = Duration::from_secs(5);
const READERS: u32 = 4;

const SQLITE_VERSION: &str = "SELECT sqlite_version()";
const BEGIN_WRITE: &str = "BEGIN IMMEDIATE";

/// The database of a plant. Clones share it.
#[derive(Clone, Debug)]
pub struct Store {
    /// None where the file was opened beside the process that holds it.
    writer: Option<SqlitePool>,
    readers: SqlitePool,
    path: PathBuf,
    version: String,
    /// Held until the last clone is gone.
    _lock: Option<Arc<File>>,
}

/// A new id: unique, and sorting by the time at which it was made.
pub fn new_id() -> String {
    uuid::Uuid::now_v7().to_string()
}

impl Store {
    /// Opens the database, making it if there is none, and brings it to this version's form.
    ///
    /// # Errors
    /// [`StoreError::Held`] if another process has it open, [`StoreError::Newer`] if a later
    /// version made it, [`StoreError::OldSqlite`] if the SQLite linked in is not safe.
    pub async fn open(path: &Path) -> Result<Self, StoreError> {
        let lock = take_lock(path)?;
        let options = connect(path)
            .create_if_missing(true)
            .journal_mode(SqliteJournalMode::Wal)
            .synchronous(SqliteSynchronous::Full)
            .pragma("journal_size_limit", "67108864");
        let writer = pool(1, WRITER_WAIT).connect_with(options).await?;
        let version = safe_version(&writer).await?;
        MIGRATIONS.run(&writer).await?;
        let readers = connect_readers(path).await?;
        Ok(Self {
            writer: Some(writer),
            readers,
            path: path.to_owned(),
            version,
            _lock: Some(Arc::new(lock)),
        })
    }

    /// Opens a database that another process may hold, to read and to back it up. Every write
    /// answers [`StoreError::ReadOnly`].
    ///
    /// # Errors
    /// If there is no such database, or a later version made it.
    pub async fn open_beside(path: &Path) -> Result<Self, StoreError> {
        let readers = connect_readers(path).await?;
        let version = safe_version(&readers).await?;
        let store = Self { writer: None, readers, path: path.to_owned(), version, _lock: None };
        let (here, known) = (store.migration().await?, newest_migration());
        if here > known {
            return Err(StoreError::Newer { migration: here });
        }
        Ok(store)
    }

    /// Waits for what is being written, folds the log into the file, and lets go of it.
    pub async fn close(self) {
        self.readers.close().await;
        if let Some(writer) = &self.writer {
            writer.close().await;
        }
    }

    /// Where the database is.
    pub fn path(&self) -> &Path {
        &self.path
    }
    /// Version of the SQLite linked in.
    pub fn sqlite_version(&self) -> &str {
        &self.version
    }

    /// Begins the one write that may be under way; dropping it undoes it.
    async fn write(&self) -> Result<Transaction<'static, Sqlite>, StoreError> {
        let writer = self.writer.as_ref().ok_or(StoreError::ReadOnly)?;
        Ok(writer.begin_with(BEGIN_WRITE).await?)
    }
}

fn newest_migration() -> i64 {
    MIGRATIONS.iter().map(|m| m.version).max().unwrap_or(0)
}

fn connect(path: &Path) -> SqliteConnectOptions {
    SqliteConnectOptions::new()
        .filename(path)
        .foreign_keys(true)
        .busy_timeout(BUSY_WAIT)
        .pragma("cache_size", "-16000")
        .disable_statement_logging()
}

/// A pool that keeps its connections: they are threads of this process, not sockets.
fn pool(connections: u32, wait: Duration) -> SqlitePoolOptions {
    SqlitePoolOptions::new()
        .max_connections(connections)
        .acquire_timeout(wait)
        .idle_timeout(None)
        .max_lifetime(None)
        .test_before_acquire(false)
}

async fn connect_readers(path: &Path) -> Result<SqlitePool, StoreError> {
    Ok(pool(READERS, Duration::from_secs(30)).connect_with(connect(path).read_only(true)).await?)
}

async fn safe_version(pool: &SqlitePool) -> Result<String, StoreError> {
    let version: String = sqlx::query_scalar(SQLITE_VERSION).fetch_one(pool).await?;
    if is_safe(&version) { Ok(version) } else { Err(StoreError::OldSqlite { version }) }
}

fn is_safe(version: &str) -> bool {
    let mut parts = version.split('.').map(|p| p.parse::<u32>().unwrap_or(0));
    let mut next = || parts.next().unwrap_or(0);
    (next(), next(), next()) >= SQLITE_OLDEST
}

/// Locks the file beside the database. The lock goes with the process, however it ends.
fn take_lock(path: &Path) -> Result<File, StoreError> {
    let mut name = path.as_os_str().to_owned();
    name.push(".lock");
    let beside = PathBuf::from(name);
    let at = |source| StoreError::File { path: beside.clone(), source };
    let file =
        File::options().create(true).truncate(false).write(true).open(&beside).map_err(at)?;
    match file.try_lock() {
        Ok(()) => Ok(file),
        Err(TryLockError::WouldBlock) => Err(StoreError::Held { path: path.to_owned() }),
        Err(TryLockError::Error(source)) => Err(at(source)),
    }
}
