//! Readings as delivered: one tag's values in time, in the unit of the export.

use serde::{Deserialize, Serialize};

use super::Instant;

/// One delivered value. Words are indices into the column's own list.
#[derive(Clone, Copy, Debug, PartialEq, Serialize, Deserialize)]
pub enum CellValue {
    /// A finite number, in the tag's own unit.
    Number(f64),
    /// A word, for tags whose values are words.
    Word(u32),
    /// Marked bad by the export; the word is what it said.
    Bad(u32),
}

impl CellValue {
    /// Whether the value may be used.
    pub fn is_good(self) -> bool {
        !matches!(self, Self::Bad(_))
    }
}

/// Values of one tag. In a delivery they stand in the order of the file; in a stored day they
/// are strictly ascending in time.
#[derive(Clone, Debug, Default, PartialEq)]
pub struct Column {
    /// When.
    pub times: Vec<Instant>,
    /// What; as long as `times`.
    pub values: Vec<CellValue>,
    /// Line of the file for each value, header being 1; empty for stored columns.
    pub lines: Vec<u32>,
    /// Words that values refer to.
    pub words: Vec<String>,
}

impl Column {
    /// Number of values.
    pub fn len(&self) -> usize {
        self.times.len()
    }
    /// Whether there is none.
    pub fn is_empty(&self) -> bool {
        self.times.is_empty()
    }
    /// The index of a word, added if new.
    pub fn intern(&mut self, word: &str) -> u32 {
        if let Some(at) = self.words.iter().position(|w| w == word) {
            return at as u32;
        }
        self.words.push(word.to_owned());
        (self.words.len() - 1) as u32
    }
    /// The word of an index; empty if there is none.
    pub fn word(&self, at: u32) -> &str {
        self.words.get(at as usize).map_or("", String::as_str)
    }
    /// Adds a value at the end.
    #[inline]
    pub fn push(&mut self, time: Instant, value: CellValue) {
        self.times.push(time);
        self.values.push(value);
    }
}
