//! How a tag's day of readings is written: one line of JSON, short enough to store and plain
//! enough to read in any SQLite shell.
//!
//! ```json
//! {"start":1772409600000000,"step":60000000,"scale":1000,"v":[312,4,-1,null,0]}
//! {"start":1772409600000000,"tick":1000000,"dt":[0,61,58],"scale":1,"words":["Bad"],"v":[20,"b0",1]}
//! {"start":1772409600000000,"step":60000000,"words":["RUN","STOP"],"v":[0,0,1]}
//! ```
//!
//! - Times, in microseconds since 1970: on a regular grid `start + step * position`, where
//!   `null` is a place without a reading; else `start + tick * (sum of dt so far)`.
//! - A whole number in `v` is a step from the whole number before it, in units of 1/`scale`.
//!   Every value is checked to come back bit for bit; one that does not is written as it is,
//!   with a point or an exponent, and leaves the steps alone.
//! - `"b0"` is a value marked bad and `"w0"` a word, by their place in `words`. Without a
//!   `scale` no value is a number, and a whole number in `v` is the place of a word.
//!
//! The text depends on the readings only: words are listed as they first occur.

mod decode;
mod encode;
#[cfg(test)]
mod tests;

pub use decode::decode;
pub use encode::encode;

/// The codec of this module, as it stands beside each chunk.
pub(super) const CODEC_JSON: i64 = 1;

/// Powers of ten by which values are scaled.
const SCALES: [f64; 10] = [1e0, 1e1, 1e2, 1e3, 1e4, 1e5, 1e6, 1e7, 1e8, 1e9];

/// Why readings cannot be written as a chunk, or a chunk not be read.
#[derive(Clone, Debug, PartialEq, Eq, thiserror::Error)]
pub enum ChunkError {
    /// Times are not strictly ascending, or lengths differ.
    #[error("readings of a day must be strictly ascending in time, one value a time")]
    NotAscending,
    /// A value that no chunk can hold.
    #[error("reading {0} of the day is not a finite number or names a word that is not listed")]
    Value(usize),
    /// The text is not a chunk.
    #[error("stored readings are not readable at byte {at}: expected {expected}")]
    Malformed {
        /// Byte offset into the text.
        at: usize,
        /// What should stand there.
        expected: &'static str,
    },
}
