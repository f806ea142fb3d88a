//! What can go wrong with the store, and the one place that reads the engine's errors.

use std::path::PathBuf;

use super::chunk::ChunkError;

/// What can go wrong with the store. Each says what to do; sources say why.
#[derive(Debug, thiserror::Error)]
pub enum StoreError {
    /// Another process has this database open.
    #[error(
        "{} is held by another process, most likely the daemon; ask the daemon, or stop it first",
        .path.display()
    )]
    Held {
        /// The database.
        path: PathBuf,
    },
    /// The SQLite linked in can corrupt a write-ahead log.
    #[error("SQLite {version} is too old: it needs 3.51.3 or later, build with the bundled one")]
    OldSqlite {
        /// Version found.
        version: String,
    },
    /// A later version of this program made the database.
    #[error(
        "the database was made by a later version (its migration {migration} is not known here); \
         use that version, or a backup from before the upgrade"
    )]
    Newer {
        /// The unknown migration.
        migration: i64,
    },
    /// No room.
    #[error("the disk that holds the database is full; nothing was stored, free some space")]
    DiskFull,
    /// Somebody else writes for too long.
    #[error("the database is busy with another write; try again in a moment")]
    Busy,
    /// The file is not there, or may not be written.
    #[error(
        "the database cannot be opened or written; see that it is there, and who owns it and its folder"
    )]
    ReadOnly,
    /// The file is damaged or no database.
    #[error("the database file is damaged or is no database; restore the last backup")]
    Corrupt(#[source] Box<dyn std::error::Error + Send + Sync>),
    /// What was to be stored is there already, under the same key.
    #[error("it is stored already under the same key")]
    Exists(#[source] Box<dyn std::error::Error + Send + Sync>),
    /// A tag's day that cannot be written or read.
    #[error("readings of {tag} on day {day} (days since 1970) cannot be stored or read")]
    Chunk {
        /// The tag.
        tag: String,
        /// Days since 1970-01-01, UTC.
        day: i64,
        /// Why.
        source: ChunkError,
    },
    /// A stored text that this version cannot read.
    #[error("the stored {what} cannot be read")]
    Unreadable {
        /// Table or field.
        what: &'static str,
        /// Why.
        source: Box<dyn std::error::Error + Send + Sync>,
    },
    /// A file of the store.
    #[error("cannot use {}", .path.display())]
    File {
        /// Which.
        path: PathBuf,
        /// Why.
        source: std::io::Error,
    },
    /// Anything else.
    #[error("the database refused")]
    Other(#[source] Box<dyn std::error::Error + Send + Sync>),
}

impl StoreError {
    pub(super) fn unreadable(
        what: &'static str,
        source: impl std::error::Error + Send + Sync + 'static,
    ) -> Self {
        Self::Unreadable { what, source: Box::new(source) }
    }
}

/// Primary result codes of SQLite, <https://www.sqlite.org/rescode.html>.
mod code {
    pub const BUSY: i32 = 5;
    pub const LOCKED: i32 = 6;
    pub const READONLY: i32 = 8;
    pub const CORRUPT: i32 = 11;
    pub const FULL: i32 = 13;
    pub const CANTOPEN: i32 = 14;
    pub const NOTADB: i32 = 26;
}

impl From<sqlx::Error> for StoreError {
    fn from(error: sqlx::Error) -> Self {
        if matches!(error, sqlx::Error::PoolTimedOut) {
            return Self::Busy;
        }
        let Some(database) = error.as_database_error() else {
            return Self::Other(Box::new(error));
        };
        if database.is_unique_violation() {
            return Self::Exists(Box::new(error));
        }
        let full: i32 = database.code().and_then(|c| c.parse().ok()).unwrap_or(0);
        // The low byte is the primary code.
        match full & 0xff {
            code::BUSY | code::LOCKED => Self::Busy,
            code::READONLY | code::CANTOPEN => Self::ReadOnly,
            code::CORRUPT | code::NOTADB => Self::Corrupt(Box::new(error)),
            code::FULL => Self::DiskFull,
            _ => Self::Other(Box::new(error)),
        }
    }
}

impl From<sqlx::migrate::MigrateError> for StoreError {
    fn from(error: sqlx::migrate::MigrateError) -> Self {
        use sqlx::migrate::MigrateError;
        match error {
            MigrateError::VersionMissing(migration) => Self::Newer { migration },
            MigrateError::Execute(error) | MigrateError::ExecuteMigration(error, _) => error.into(),
            other => Self::Other(Box::new(other)),
        }
    }
}
