//! What somebody with a SQLite shell sees, in a backup.

use sqlx::Row;
use sqlx::sqlite::{SqliteConnectOptions, SqlitePool};
use washbell::base::{CellValue, Column, DAY_US, SECOND_US};

use crate::{Given, PLANT, START_US, at, column, deliver, given, minutes};
use CellValue::{Bad, Number, Word};

/// A backup, opened as somebody with a shell would.
pub async fn shell(given: &Given) -> SqlitePool {
    let copy = given.folder.path().join("copy.db");
    given.store.backup(&copy).await.unwrap();
    SqlitePool::connect_with(SqliteConnectOptions::new().filename(copy)).await.unwrap()
}

const OF_DAY: &str = "SELECT time_us, value, word, quality FROM reading
    WHERE plant = ?1 AND source = 'scada' AND tag = ?2 AND day = ?3 ORDER BY time_us";

async fn check(given: &Given, tag: &str, want: &Column) {
    let rows = sqlx::query(OF_DAY)
        .bind(PLANT)
        .bind(tag)
        .bind(START_US / DAY_US)
        .fetch_all(&shell(given).await)
        .await
        .unwrap();
    let got: Vec<(i64, Option<f64>, Option<String>, String)> =
        rows.iter().map(|r| (r.get(0), r.get(1), r.get(2), r.get(3))).collect();
    let good = || "good".to_owned();
    let want: Vec<_> = want
        .times
        .iter()
        .zip(&want.values)
        .map(|(t, v)| match *v {
            Number(v) => (t.micros(), Some(v), None, good()),
            Word(w) => (t.micros(), None, Some(want.word(w).to_owned()), good()),
            Bad(w) => (t.micros(), None, Some(want.word(w).to_owned()), "bad".to_owned()),
        })
        .collect();
    assert_eq!(got, want, "{tag}");
}

#[tokio::test]
async fn the_reading_view_shows_what_was_delivered() {
    let given = given().await;
    let mut odd = Column::default();
    for (i, s) in [0, 61, 119, 4000, 4001].into_iter().enumerate() {
        odd.push(at(0).plus(s * SECOND_US), Number(20.5 - i as f64 / 4.0));
    }
    let mut full = minutes(0, 1440, 3);
    full.times.remove(700);
    full.values.remove(700);
    for (tag, want) in [
        ("PT-1", full),
        ("PT-2", odd),
        (
            "XS-1",
            column(
                &[(0, Word(0)), (1, Word(1)), (2, Bad(2)), (3, Word(0))],
                &["RUN", "STOP", "Bad"],
            ),
        ),
        (
            "XS-2",
            column(
                &[(0, Number(1.5)), (1, Bad(0)), (2, Word(1)), (3, Number(-2.0))],
                &["Bad", "LO"],
            ),
        ),
        ("PT-3", column(&[(0, Number(1.0)), (1, Number(1e300)), (2, Number(3.0))], &[])),
    ] {
        deliver(&given.store, tag, &want).await;
        check(&given, tag, &want).await;
    }
}

#[tokio::test]
async fn a_days_readings_are_found_by_the_key_of_their_chunk() {
    let given = given().await;
    deliver(&given.store, "PT-1", &minutes(0, 60, 1)).await;
    let plan = "EXPLAIN QUERY PLAN SELECT time_us, value FROM reading
        WHERE plant = 'p' AND source = 's' AND tag = 't' AND day = 1 ORDER BY time_us";
    let rows = sqlx::query(plan).fetch_all(&shell(&given).await).await.unwrap();
    let lines: Vec<String> = rows.iter().map(|r| r.get("detail")).collect();
    let search = lines.iter().find(|l| l.contains("SEARCH c ")).expect("a search of the chunks");
    assert!(
        search.contains("sqlite_autoindex_reading_chunk_1")
            && search.contains("plant=? AND source=? AND tag=? AND day=?"),
        "{lines:?}"
    );
    assert!(!lines.iter().any(|l| l.contains("SCAN c ")), "{lines:?}");
}
