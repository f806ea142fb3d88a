use sqlx::Executor;
use sqlx::sqlite::{SqliteConnectOptions, SqlitePool};
use washbell::base::TrainId;
use washbell::store::{Store, StoreError, new_id};

use crate::{PLANT, at, days, deliver, given, minutes, tag};

#[tokio::test]
async fn a_second_opening_is_told_who_holds_it() {
    let given = given().await;
    let path = given.store.path().to_owned();
    let second = Store::open(&path).await.unwrap_err();
    assert!(matches!(&second, StoreError::Held { path: held } if *held == path));
    assert!(second.to_string().contains("daemon"), "{second}");
    given.store.close().await;
    Store::open(&path).await.unwrap().close().await;
}

#[tokio::test]
async fn what_was_stored_outlives_the_process() {
    let given = given().await;
    let path = given.store.path().to_owned();
    deliver(&given.store, "PT-1", &minutes(0, 100, 1)).await;
    given.store.close().await;
    let again = Store::open(&path).await.unwrap();
    let read = again.readings(PLANT, &[tag("PT-1")], days(0, 1)).await.unwrap();
    assert_eq!(read[0].values, minutes(0, 100, 1).values);
    assert!(again.migration().await.unwrap() >= 1);
    assert!(again.sqlite_version().starts_with("3."));
}

#[tokio::test]
async fn a_database_of_a_later_version_is_refused() {
    let given = given().await;
    let path = given.store.path().to_owned();
    given.store.close().await;
    let pool = SqlitePool::connect_with(SqliteConnectOptions::new().filename(&path)).await.unwrap();
    pool.execute(
        "INSERT INTO _sqlx_migrations (version, description, success, checksum, execution_time)
         VALUES (9999, 'later', TRUE, x'00', 1)",
    )
    .await
    .unwrap();
    pool.close().await;
    for refused in [Store::open(&path).await, Store::open_beside(&path).await] {
        let refused = refused.unwrap_err();
        assert!(matches!(refused, StoreError::Newer { migration: 9999 }));
        assert!(refused.to_string().contains("later version"), "{refused}");
    }
}

#[tokio::test]
async fn a_backup_of_a_live_database_is_a_database() {
    let given = given().await;
    deliver(&given.store, "PT-1", &minutes(0, 3000, 1)).await;
    let target = given.folder.path().join("copy.db");
    std::fs::write(&target, "yesterday's").unwrap();
    // As the backup command does beside the daemon, while a write is under way.
    let intake = given.store.begin_intake(PLANT).await.unwrap();
    let beside = Store::open_beside(given.store.path()).await.unwrap();
    let bytes = beside.backup(&target).await.unwrap();
    drop(intake);
    assert_eq!(bytes, std::fs::metadata(&target).unwrap().len());
    let copy = Store::open(&target).await.unwrap();
    let read = copy.readings(PLANT, &[tag("PT-1")], days(0, 9)).await.unwrap();
    assert_eq!(read[0].values, minutes(0, 3000, 1).values);
    assert!(copy.faults().await.unwrap().is_empty());

    let nowhere = given.folder.path().join("no such folder").join("copy.db");
    assert!(given.store.backup(&nowhere).await.is_err());
    let names = std::fs::read_dir(given.folder.path()).unwrap();
    let left =
        names.filter(|e| e.as_ref().unwrap().path().extension().is_some_and(|e| e == "part"));
    assert_eq!(left.count(), 0, "half a copy was left");
}

#[tokio::test]
async fn beside_the_daemon_nothing_is_written() {
    let given = given().await;
    let beside = Store::open_beside(given.store.path()).await.unwrap();
    let refused = beside.mark_dirty(PLANT, &[(TrainId::new("uf-1"), at(0))]).await;
    assert!(matches!(refused, Err(StoreError::ReadOnly)));
    assert!(matches!(beside.check(at(0)).await, Err(StoreError::ReadOnly)));
    beside.close().await;
    let path = given.store.path().to_owned();
    deliver(&given.store, "PT-1", &minutes(0, 10, 1)).await;
    given.store.close().await;
    let alone = Store::open_beside(&path).await.unwrap();
    let read = alone.readings(PLANT, &[tag("PT-1")], days(0, 1)).await.unwrap();
    assert_eq!(read[0].len(), 10, "the daemon is down, its database can still be read");
    let none = Store::open_beside(&given.folder.path().join("none.db")).await;
    assert!(matches!(none, Err(StoreError::ReadOnly)));
}

#[tokio::test]
async fn the_check_reads_and_writes_and_waits_for_nobody() {
    let given = given().await;
    given.store.check(at(0)).await.unwrap();
    let intake = given.store.begin_intake(PLANT).await.unwrap();
    given.store.check(at(1)).await.unwrap();
    drop(intake);
    given.store.check(at(2)).await.unwrap();
    assert!(given.store.faults().await.unwrap().is_empty());
    assert!(given.store.bytes().await.unwrap() > 4096);
}

#[test]
fn ids_sort_by_the_time_they_were_made() {
    let ids: Vec<_> = (0..1000).map(|_| new_id()).collect();
    assert!(ids.windows(2).all(|w| w[0] < w[1]));
}
