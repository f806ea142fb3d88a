//! How one export of the SCADA historian is laid out.

use crate::base::{SourceId, Zone};

/// One export layout of the plant's historian.
#[derive(Clone, Debug, PartialEq)]
pub struct Source {
    /// Name used when posting.
    pub id: SourceId,
    /// A column a tag, or a row a reading.
    pub layout: Layout,
    /// How time is written.
    pub time: TimeColumn,
    /// Instant values or means.
    pub values: Values,
    /// Longest hold of a change-only value; `None` where every row has every value.
    pub hold_us: Option<i64>,
    /// Spacing of rows.
    pub every_us: i64,
    /// Spacing of exports; data are stale after three times this.
    pub expected_every_us: i64,
    /// Column separator.
    pub delimiter: u8,
    /// Decimal separator, `.` or `,`.
    pub decimal: u8,
    /// Words and numbers that mark a bad value, compared without regard to case.
    pub bad_values: Vec<String>,
}

/// How an export is laid out.
#[derive(Clone, Debug, PartialEq, Eq)]
pub enum Layout {
    /// A column a tag.
    Wide,
    /// A row a reading.
    Long {
        /// Column of the tag.
        tag_column: String,
        /// Column of the value.
        value_column: String,
        /// Column of the unit, if any.
        unit_column: Option<String>,
        /// Column of the quality, if any.
        quality_column: Option<String>,
        /// Quality texts that mean good.
        good: Vec<String>,
    },
}

/// How time is written in an export.
#[derive(Clone, Debug, PartialEq)]
pub struct TimeColumn {
    /// Column name.
    pub column: String,
    /// Its form.
    pub format: TimeFormat,
    /// Zone of local times.
    pub zone: Zone,
    /// What a repeated hour means.
    pub repeated_hour: RepeatedHour,
}

/// A form of time stamp.
#[derive(Clone, Debug, PartialEq, Eq)]
pub enum TimeFormat {
    /// strptime directives.
    Strptime(String),
    /// ISO 8601, with or without an offset.
    Iso,
    /// Spreadsheet days since 1899-12-30.
    Serial,
    /// Unix seconds.
    Unix,
}

/// What a local time of the repeated hour means.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum RepeatedHour {
    /// First pass, then second, told by the order of the rows.
    ByOrder,
    /// Always the earlier.
    Earlier,
    /// Always the later.
    Later,
    /// Not taken.
    Reject,
}

/// Instant values or means over an interval.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Values {
    /// The value at the stamp.
    Instant,
    /// The mean over an interval.
    Mean {
        /// Its length.
        interval_us: i64,
        /// Which end the stamp marks.
        stamp: Stamp,
    },
}

/// Which end of a mean's interval the stamp marks.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Stamp {
    /// Its start.
    Start,
    /// Its end.
    End,
}
