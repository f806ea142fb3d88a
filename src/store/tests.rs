use std::path::Path;

use sqlx::{Connection, Executor, SqlSafeStr};

use super::*;

/// The statements of this folder's own files; those of `derived` stand beside them. The test
/// below counts them against the source.
const STATEMENTS: [&str; 48] = [
    SQLITE_VERSION,
    BEGIN_WRITE,
    acts::INSERT,
    acts::LIST,
    acts::OF_SUBJECT,
    cleanings::BY_ID,
    cleanings::BY_REFERENCE,
    cleanings::INSERT,
    cleanings::LIST,
    dirty::CLEAR,
    dirty::LIST,
    dirty::MARK,
    history::ADD,
    history::ENTRIES,
    history::LIST,
    history::NEXT_NUMBER,
    history::ONE,
    history::SET_ITEM,
    intake::PUT_DAY,
    intake::PUT_DAYS,
    intake::STORED_DAYS,
    plant_files::BY_REVISION,
    plant_files::INSERT,
    plant_files::LATEST,
    readings::LAST_BEFORE,
    readings::NEWEST_OF_SOURCE,
    readings::NEWEST_OF_TAGS,
    readings::OF_TAGS,
    readings::SPAN_OF_TAGS,
    receipts::BY_DIGEST,
    receipts::BY_ID,
    receipts::INSERT,
    receipts::LIST,
    receipts::NEWEST_BY_DIGEST,
    receipts::PENDING,
    receipts::SET_ANALYSED,
    revisions::INSERT,
    revisions::OF_RECEIPT,
    revisions::OF_TAG,
    train_tags::PUT_AREA,
    train_tags::PUT_STATE,
    train_tags::PUT_TAG,
    upkeep::BYTES,
    upkeep::COPY,
    upkeep::FULL_CHECK,
    upkeep::MIGRATION,
    upkeep::PROBE,
    upkeep::QUICK_CHECK,
];

#[tokio::test]
async fn every_statement_is_understood_by_a_fresh_database() {
    let folder = tempfile::tempdir().unwrap();
    let store = Store::open(&folder.path().join("x.db")).await.unwrap();
    let mut writer = store.writer.as_ref().unwrap().acquire().await.unwrap();
    let lists: [&[&str]; 4] = [
        &STATEMENTS,
        &derived::statements::STATEMENTS,
        &derived::statements::CLEAR_ALL,
        &train_tags::CLEAR,
    ];
    let listed: Vec<&str> = lists.concat();
    for sql in &listed {
        if let Err(e) = writer.prepare(sql.into_sql_str()).await {
            panic!("{e} in {sql}");
        }
    }
    let folder = Path::new(env!("CARGO_MANIFEST_DIR")).join("src/store");
    assert_eq!(written(&folder), listed.len(), "a statement is missing from the lists");
}

/// Statements in the source of a folder and those below. A constant named INTO is the beginning
/// of a statement that is put together, and cannot be prepared.
fn written(folder: &Path) -> usize {
    let mut found = 0;
    for entry in std::fs::read_dir(folder).unwrap() {
        let path = entry.unwrap().path();
        if path.is_dir() {
            found += written(&path);
        } else if !path.ends_with("tests.rs") && !path.ends_with("statements.rs") {
            found += std::fs::read_to_string(&path).unwrap().lines().map(declared).sum::<usize>();
        }
    }
    found
}

/// How many statements a line of source begins to declare.
fn declared(line: &str) -> usize {
    match line.split_once("const ").and_then(|(_, rest)| rest.split_once(": ")) {
        Some(("INTO", _)) => 0,
        Some((_, kind)) if kind.starts_with("&str =") => 1,
        Some((_, kind)) => kind
            .strip_prefix("[&str; ")
            .and_then(|rest| rest.split_once(']'))
            .map_or(0, |(n, _)| n.parse().unwrap()),
        None => 0,
    }
}

#[test]
fn only_a_sqlite_with_a_safe_log_is_taken() {
    for (version, safe) in
        [("3.51.3", true), ("3.51.2", false), ("3.52.0", true), ("4.0", true), ("3.40.1", false)]
    {
        assert_eq!(is_safe(version), safe, "{version}");
    }
}

#[tokio::test]
async fn errors_of_the_engine_are_told_apart() {
    let folder = tempfile::tempdir().unwrap();
    let store = Store::open(&folder.path().join("x.db")).await.unwrap();
    let pool = store.writer.as_ref().unwrap();
    // A ceiling on pages stands in for a full disk: the code is the same.
    let mut conn = pool.acquire().await.unwrap();
    conn.execute("PRAGMA max_page_count = 1").await.unwrap();
    let full = conn
        .execute("INSERT INTO act SELECT 'p', value, 1, 'a', 'b', 'c', hex(randomblob(90000)), NULL, NULL, NULL FROM json_each('[1,2]')")
        .await
        .unwrap_err();
    assert!(matches!(full.into(), StoreError::DiskFull));
    let read_only = store.readers.execute("DELETE FROM dirty").await.unwrap_err();
    assert!(matches!(read_only.into(), StoreError::ReadOnly));
    let other = store.readers.execute("SELECT nonsense").await.unwrap_err();
    assert!(matches!(other.into(), StoreError::Other(_)));

    let text = folder.path().join("notes.db");
    std::fs::write(&text, "no database at all, only a text of some length\n".repeat(99)).unwrap();
    assert!(matches!(Store::open(&text).await, Err(StoreError::Corrupt(_))));
}

#[tokio::test]
async fn facts_cannot_be_altered() {
    let folder = tempfile::tempdir().unwrap();
    let store = Store::open(&folder.path().join("x.db")).await.unwrap();
    let mut conn = store.writer.as_ref().unwrap().acquire().await.unwrap();
    let mut tx = conn.begin().await.unwrap();
    for sql in [
        "INSERT INTO plant_file VALUES (1, 'p', 'r', 'm', 'c', 1)",
        "INSERT INTO receipt VALUES ('p', 'r', 's', 'm', '', 1, 'd', NULL, NULL, 1, 1, 'taken', '',
            1, 0, 0, 0, 0, 0, '[]', 'UTC', 0, 0, '[]', 0, '{}', 0, NULL, '[]')",
        "INSERT INTO revision VALUES (1, 'p', 's', 't', 1, '1.0', '2.0', 'r')",
        "INSERT INTO cleaning VALUES ('p', 'c', 't', 1, 2, 'k', '[]', NULL, NULL, 1, NULL)",
        "INSERT INTO act VALUES ('p', 'a', 1, 'who', 'what', 'kind', 'id', NULL, NULL, NULL)",
    ] {
        tx.execute(sql).await.unwrap();
    }
    tx.commit().await.unwrap();
    for table in ["plant_file", "receipt", "revision", "cleaning", "act"] {
        let columns: Vec<String> = sqlx::query_scalar("SELECT name FROM pragma_table_info(?1)")
            .bind(table)
            .fetch_all(&mut *conn)
            .await
            .unwrap();
        assert!(columns.len() > 4);
        for column in columns {
            let sql = format!("UPDATE {table} SET {column} = {column}");
            let done = conn.execute(sqlx::AssertSqlSafe(sql)).await;
            let may = table == "receipt" && ["changed_from", "analysed"].contains(&column.as_str());
            assert_eq!(done.is_ok(), may, "{table}.{column}");
        }
        let deleted = conn.execute(sqlx::AssertSqlSafe(format!("DELETE FROM {table}"))).await;
        assert!(deleted.unwrap_err().to_string().contains("only added to"), "{table}");
    }
}
