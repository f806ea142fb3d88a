//! Tests only: what an hourly post asks must not cost more with every year of history.

use super::{assessments, cycles, days, hours, phases, runs};
use crate::store::{Store, dirty, history, intake, readings, receipts};

/// Statements of a post, and the search that each has to make.
const SEARCHES: [(&str, &str); 17] = [
    (receipts::BY_DIGEST, "(plant=? AND source=? AND digest=? AND mapping=?)"),
    (receipts::NEWEST_BY_DIGEST, "(plant=? AND source=? AND digest=?)"),
    (receipts::PENDING, "receipt_pending (plant=?)"),
    (readings::NEWEST_OF_SOURCE, "reading_chunk_last (plant=? AND source=?)"),
    (readings::NEWEST_OF_TAGS, "(plant=? AND source=? AND tag=?)"),
    (readings::OF_TAGS, "(plant=? AND source=? AND tag=? AND day>? AND day<?)"),
    (intake::STORED_DAYS, "(plant=? AND source=? AND tag=? AND day>? AND day<?)"),
    (dirty::LIST, "dirty USING PRIMARY KEY (plant=?)"),
    (history::LIST, "item_open (plant=? AND kind=? AND open>? AND open<?)"),
    (hours::OF_TRAIN, "(plant=? AND train=? AND start_us>? AND start_us<?)"),
    (cycles::OF_DAY, "(plant=? AND train=? AND start_us>? AND start_us<?)"),
    (cycles::CLEAR, "(plant=? AND train=? AND start_us>? AND start_us<?)"),
    (phases::OF_TRAIN, "(plant=? AND train=? AND start_us>? AND start_us<?)"),
    (days::OF_TRAIN, "(plant=? AND train=? AND start_us>? AND start_us<?)"),
    (days::STARTS, "(plant=? AND train=? AND start_us>?)"),
    (assessments::BEFORE, "(plant=? AND train=? AND day_us<?)"),
    (runs::OF_TRAIN, "(plant=? AND train=? AND start_us<?)"),
];

#[tokio::test]
async fn a_post_searches_by_keys_however_long_the_history() {
    let folder = tempfile::tempdir().unwrap();
    let store = Store::open(&folder.path().join("x.db")).await.unwrap();
    for (sql, search) in SEARCHES {
        let sql = format!("EXPLAIN QUERY PLAN {sql}");
        let steps: Vec<(i64, i64, i64, String)> = sqlx::query_as(sqlx::AssertSqlSafe(sql.clone()))
            .fetch_all(&store.readers)
            .await
            .unwrap_or_else(|e| panic!("{e} in {sql}"));
        let steps: Vec<String> = steps.into_iter().map(|s| s.3).collect();
        assert!(steps.iter().any(|s| s.ends_with(search)), "{sql}\n{steps:#?}");
        for step in steps.iter().filter(|s| s.starts_with("SCAN")) {
            let small = step.contains("VIRTUAL TABLE") || step.contains("subquery");
            assert!(small, "{sql}\n{step}");
        }
    }
}
