//! The store, from outside: each test is given a store of its own.

mod facts;
mod intake;
mod minute;
mod upkeep;
mod views;

use std::collections::BTreeMap;

use tempfile::TempDir;
use washbell::base::{
    CellValue, Column, Counts, DAY_US, Instant, MINUTE_US, Outcome, Receipt, SourceId, Span, Tag,
};
use washbell::store::{Intake, MergeOutcome, Store, new_id};

pub const PLANT: &str = "harrow-fen";
/// 2026-03-02T00:00:00Z.
pub const START_US: i64 = 1_772_409_600_000_000;

/// A store in a folder that goes with it.
pub struct Given {
    pub store: Store,
    pub folder: TempDir,
}

pub async fn given() -> Given {
    let folder = tempfile::tempdir().unwrap();
    let store = Store::open(&folder.path().join("plant.db")).await.unwrap();
    Given { store, folder }
}

pub fn at(minutes: i64) -> Instant {
    Instant::from_micros(START_US + minutes * MINUTE_US)
}

pub fn source() -> SourceId {
    SourceId::new("scada")
}

pub fn tag(name: &str) -> (SourceId, Tag) {
    (source(), Tag::new(name))
}

pub fn days(from: i64, n: i64) -> Span {
    Span::new(at(from * 1440), at((from + n) * 1440))
}

pub fn column(rows: &[(i64, CellValue)], words: &[&str]) -> Column {
    let mut column =
        Column { words: words.iter().map(|w| (*w).to_owned()).collect(), ..Column::default() };
    rows.iter().for_each(|(minute, v)| column.push(at(*minute), *v));
    column
}

/// Minutes `from..to` of a slow, noisy quantity with three decimals.
pub fn minutes(from: i64, to: i64, seed: i64) -> Column {
    let mut column = Column::default();
    for m in from..to {
        let milli = 300 + seed * 37 + (m * 7919 + seed) % 41 + m % DAY_US / 97;
        column.push(at(m), CellValue::Number(milli as f64 / 1000.0));
    }
    column
}

pub fn receipt(digest: &str) -> Receipt {
    Receipt {
        id: new_id(),
        source: source(),
        file: "0600.csv".to_owned(),
        received: at(10),
        digest: format!("sha256:{digest}"),
        from: Some(at(0)),
        to: Some(at(9)),
        rows: 10,
        cells: 20,
        outcome: Outcome::Taken,
        message: "20 of 20 readings taken.".to_owned(),
        readings: Counts { accepted: 20, ..Counts::default() },
        unmapped_columns: Vec::new(),
        time_zone: "Europe/London".to_owned(),
        repeated_hour_rows: 0,
        skipped_hour_rows: 0,
        rejections: Vec::new(),
        rejections_total: 0,
        changed_from: BTreeMap::new(),
        analysed: false,
        earlier: None,
        notes: Vec::new(),
    }
}

/// Takes in one column as a delivery of its own; returns the receipt's id.
pub async fn deliver(store: &Store, name: &str, column: &Column) -> String {
    let receipt = receipt(&new_id());
    let mut intake = store.begin_intake(PLANT).await.unwrap();
    merge(&mut intake, name, column, &receipt.id).await;
    intake.commit(&receipt, "m1").await.unwrap();
    receipt.id
}

/// Merges one column.
pub async fn merge(
    intake: &mut Intake,
    name: &str,
    column: &Column,
    receipt: &str,
) -> MergeOutcome {
    let (source, tag) = tag(name);
    let mut outcomes = intake.merge(&[(source, tag, column.clone())], receipt).await.unwrap();
    assert_eq!(outcomes.len(), 1);
    outcomes.remove(0)
}
