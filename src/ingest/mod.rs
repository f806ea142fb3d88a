//! Floor 9, the door in: bytes of an export, or readings posted as JSON, to columns of
//! readings, with every cell accounted for.
//!
//! Pure: the caller brings the bytes and takes the columns away. Nothing here knows what is
//! stored already; whether a cell is new, repeated or revised is for the store to say. Memory
//! is bounded by the longest line and the rows of one repeated hour, whatever the file's size.

mod accept;
mod body;
mod cells;
mod form;
mod json;
mod layout;
mod parser;
mod refusal;
mod repeated_hour;
mod rows;
mod sentence;
mod stamp;
#[cfg(test)]
mod tests;

use crate::base::{Column, Instant, MINUTE_US, Rejection, Tag};

pub use accept::{AcceptError, Accepted, Delivery, accept_file, accept_readings, digest};
pub use json::{PostedReading, PostedReadings, PostedValue, take_posted};
pub use parser::Parser;
pub use refusal::Refusal;
pub use sentence::{message, outcome};

/// Rejections that are listed; all are counted.
pub const REJECTIONS_LISTED_MAX: usize = 1_000;
/// How far ahead of its receipt a reading may be, for clocks that run fast.
const AHEAD_US_MAX: i64 = 15 * MINUTE_US;
/// 1990-01-01T00:00:00Z. Membrane filtration of water by trains is younger; what is dated
/// before it comes from a clock that was reset.
const EARLIEST: Instant = Instant::from_micros(631_152_000_000_000);

/// Readings on their way to the store: one column a tag, values in the order of the file.
///
/// A batch belongs to one delivery. Take it away whenever it is large enough.
#[derive(Clone, Debug, Default, PartialEq)]
pub struct Batch {
    /// The tags of the file, in its order.
    pub tags: Vec<Tag>,
    /// As long as `tags`; their `lines` are set.
    pub columns: Vec<Column>,
}

impl Batch {
    /// Values in all columns, good and bad.
    pub fn cells(&self) -> usize {
        self.columns.iter().map(Column::len).sum()
    }
    /// Takes the values away and leaves empty columns of the same tags.
    pub fn take(&mut self) -> Self {
        let columns = self.columns.iter_mut().map(std::mem::take).collect();
        Self { tags: self.tags.clone(), columns }
    }
}

/// What became of a delivery up to the store's door.
///
/// `cells` is always `good + bad + missing + rejected`. The good and the bad ones are handed
/// over; the others are not.
#[derive(Clone, Debug, Default, PartialEq)]
pub struct Summary {
    /// Rows below the header, blank lines left out; readings, where posted as JSON.
    pub rows: u64,
    /// Rows times mapped columns; readings, where posted as JSON.
    pub cells: u64,
    /// Values that may be used.
    pub good: u64,
    /// Marked bad by the export.
    pub bad: u64,
    /// Empty cells.
    pub missing: u64,
    /// Could not be read, or may not be taken.
    pub rejected: u64,
    /// The first 1,000 by line. One stands for all cells of a row where the row is to blame.
    pub rejections: Vec<Rejection>,
    /// How many there were.
    pub rejections_total: u64,
    /// The first 100 columns that no train uses.
    pub unmapped_columns: Vec<String>,
    /// Earliest moment of a value handed over.
    pub from: Option<Instant>,
    /// Latest moment of a value handed over.
    pub to: Option<Instant>,
    /// Rows whose local time the clock shows twice.
    pub repeated_hour_rows: u64,
    /// Rows whose local time the clock never shows.
    pub skipped_hour_rows: u64,
    /// What else the sender should know, in sentences.
    pub notes: Vec<String>,
}

impl Summary {
    /// Counts cells as rejected and lists the reason once.
    fn reject(&mut self, cells: u64, line: u64, column: &str, value: &[u8], reason: &str) {
        self.rejected += cells;
        self.rejections_total += 1;
        if self.rejections.len() < REJECTIONS_LISTED_MAX {
            self.rejections.push(Rejection {
                line,
                column: column.to_owned(),
                value: refusal::shown(value),
                reason: reason.to_owned(),
            });
        }
    }
    /// Widens the span of what was handed over.
    fn reach(&mut self, at: Instant) {
        self.from = Some(self.from.map_or(at, |from| from.min(at)));
        self.to = Some(self.to.map_or(at, |to| to.max(at)));
    }
}

/// Why a moment is not one of this plant's readings, if so.
fn out_of_time(at: Instant, received: Instant) -> Option<&'static str> {
    if at.since(received) > AHEAD_US_MAX {
        return Some("in the future: more than 15 minutes ahead of its receipt");
    }
    (at < EARLIEST).then_some("before 1990: the clock that stamped it was not set")
}
