//! What a door answers to a delivery of readings.

use std::collections::BTreeMap;

use serde::{Deserialize, Serialize};

use super::{Instant, SourceId, TrainId};

/// What became of the cells of a delivery. The six add up to the receipt's `cells`.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq, Serialize, Deserialize)]
pub struct Counts {
    /// New, or a good value over a bad one.
    pub accepted: u64,
    /// The same value is stored already.
    pub repeated: u64,
    /// Another value was stored; the new one counts from now and the old one is kept.
    pub revised: u64,
    /// The export itself marks the value so.
    pub bad: u64,
    /// An empty cell.
    pub missing: u64,
    /// Could not be read, or may not be taken.
    pub rejected: u64,
}

impl Counts {
    /// The sum of the six.
    pub fn cells(&self) -> u64 {
        self.accepted + self.repeated + self.revised + self.bad + self.missing + self.rejected
    }
    /// Adds another count to this one.
    pub fn add(&mut self, other: &Self) {
        self.accepted += other.accepted;
        self.repeated += other.repeated;
        self.revised += other.revised;
        self.bad += other.bad;
        self.missing += other.missing;
        self.rejected += other.rejected;
    }
}

/// A delivery's outcome in one word.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Serialize, Deserialize)]
#[serde(rename_all = "snake_case")]
pub enum Outcome {
    /// Every cell was taken.
    Taken,
    /// Some were not.
    TakenWithFaults,
    /// All that could be read was stored already.
    NothingNew,
    /// Nothing could be taken.
    NothingUsable,
}

/// One thing that was not taken, and why.
#[derive(Clone, Debug, PartialEq, Eq, Serialize, Deserialize)]
pub struct Rejection {
    /// Line of the file, the header being line 1; for readings posted as JSON, the
    /// position in the list, from 1.
    pub line: u64,
    /// Column name or tag; empty where the whole row was rejected.
    pub column: String,
    /// The text as it stood, at most 80 characters.
    pub value: String,
    /// Why, in words.
    pub reason: String,
}

/// What a door answers; durable once given.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize)]
pub struct Receipt {
    /// Sortable id.
    pub id: String,
    /// Source it was posted to.
    pub source: SourceId,
    /// File name as the sender gave it; empty where none was given.
    pub file: String,
    /// When it was received, by this service's clock.
    pub received: Instant,
    /// `sha256:` and the hex digest of the body as decoded.
    pub digest: String,
    /// Earliest reading in it, if any.
    pub from: Option<Instant>,
    /// Latest reading in it, if any.
    pub to: Option<Instant>,
    /// Rows below the header.
    pub rows: u64,
    /// Rows times mapped columns.
    pub cells: u64,
    /// In one word.
    pub outcome: Outcome,
    /// In one sentence.
    pub message: String,
    /// What became of the cells.
    pub readings: Counts,
    /// Columns that no train uses.
    pub unmapped_columns: Vec<String>,
    /// Zone used to read local times.
    pub time_zone: String,
    /// Rows that fell into a repeated hour.
    pub repeated_hour_rows: u64,
    /// Rows that fell into a skipped hour.
    pub skipped_hour_rows: u64,
    /// The first 1,000 rejections.
    pub rejections: Vec<Rejection>,
    /// How many there were.
    pub rejections_total: u64,
    /// From when each train's answers changed.
    pub changed_from: BTreeMap<TrainId, Instant>,
    /// Whether the analysis that follows from it is done.
    pub analysed: bool,
    /// An earlier receipt for the same file under another mapping.
    pub earlier: Option<String>,
    /// Anything else the sender should know, in sentences.
    pub notes: Vec<String>,
}
