//! The rows below the header: each cell handed over or accounted for.

use std::collections::BTreeSet;

use super::cells::{Cell, CellReader, TOO_MANY_WORDS, WORDS_MAX};
use super::layout::{Header, MappedColumn};
use super::refusal::{Refusal, shown};
use super::repeated_hour::{HeldHour, HeldRow, Hold, Known, decide};
use super::rows::{Fields, Line};
use super::stamp::{Clock, Moment, expected};
use super::{Batch, Summary, out_of_time};
use crate::base::{CellValue, Column, Instant};
use crate::plant::{RepeatedHour, Source};

const WHICH_PASS: &str =
    "repeated_hour: the clock shows this time twice, and nothing tells which one is meant";
const TOO_MANY_HELD: &str = "repeated_hour: the clock shows this time twice, and there are too many rows to tell which one is meant";
const SKIPPED: &str = "skipped_hour: the clock went forward over this time; check the time zone";

/// Takes rows in the order of the file.
pub(super) struct Body {
    header: Header,
    clock: Clock,
    cells: CellReader,
    words: Vec<BTreeSet<String>>,
    wrong_time: String,
    repeated_hour: RepeatedHour,
    every_us: i64,
    received: Instant,
    newest_known: Option<Instant>,
    newest_in_file: Option<Instant>,
    last: Option<Instant>,
    newest_first: bool,
    held: HeldHour,
    readable_rows: u64,
    summary: Summary,
}

impl Body {
    pub fn new(
        mut header: Header,
        clock: Clock,
        source: &Source,
        received: Instant,
        newest_known: Option<Instant>,
    ) -> Self {
        let summary = Summary {
            unmapped_columns: std::mem::take(&mut header.unmapped),
            notes: std::mem::take(&mut header.notes),
            ..Summary::default()
        };
        Self {
            clock,
            cells: CellReader::new(source.decimal, &source.bad_values),
            words: vec![BTreeSet::new(); header.mapped.len()],
            wrong_time: expected(&source.time.format),
            header,
            repeated_hour: source.time.repeated_hour,
            every_us: source.every_us,
            received,
            newest_known,
            newest_in_file: None,
            last: None,
            newest_first: false,
            held: HeldHour::default(),
            readable_rows: 0,
            summary,
        }
    }

    /// Takes one row.
    pub fn row(&mut self, fields: Fields, line: &Line, out: &mut Batch) {
        self.summary.rows += 1;
        self.summary.cells += self.header.mapped.len() as u64;
        let (count, columns) = (fields.len(), self.header.columns);
        if !line.ended && count < columns {
            return self.reject_row(line.number, "", b"", "the last line is unfinished");
        }
        if (columns..count).any(|i| fields.get(i).is_some_and(|f| !f.is_empty())) {
            let why = format!(
                "row has {count} of {columns} columns: a decimal comma, or a delimiter in a text without quotes?"
            );
            return self.reject_row(line.number, "", b"", &why);
        }
        let Some(stamp) = fields.get(self.header.time_index) else {
            let why = format!("row has {count} of {columns} columns, and no time");
            return self.reject_row(line.number, "", b"", &why);
        };
        let Some(moment) = self.clock.read(stamp) else {
            let why = std::mem::take(&mut self.wrong_time);
            self.reject_time(line.number, stamp, &why);
            self.wrong_time = why;
            return;
        };
        self.readable_rows += 1;
        match moment {
            Moment::At(at) => {
                self.end_repeated_hour(out);
                if let Some(last) = self.last.filter(|l| *l != at) {
                    self.newest_first = at < last;
                }
                self.last = Some(at);
                self.take(fields, line.number, at, out);
            }
            Moment::Twice(earlier, later) => {
                self.summary.repeated_hour_rows += 1;
                match self.repeated_hour {
                    RepeatedHour::Earlier => self.take(fields, line.number, earlier, out),
                    RepeatedHour::Later => self.take(fields, line.number, later, out),
                    RepeatedHour::Reject => self.reject_time(line.number, stamp, WHICH_PASS),
                    RepeatedHour::ByOrder => {
                        let fields = fields.keep();
                        self.hold(HeldRow { fields, line: line.number, earlier, later }, out);
                    }
                }
            }
            Moment::Skipped => {
                self.summary.skipped_hour_rows += 1;
                self.reject_time(line.number, stamp, SKIPPED);
            }
        }
    }

    /// Says what became of every cell.
    ///
    /// # Errors
    /// If there was no row, or none could be read.
    pub fn finish(mut self, out: &mut Batch) -> Result<Summary, Refusal> {
        self.end_repeated_hour(out);
        self.fit(out);
        let mut summary = self.summary;
        if summary.rows == 0 {
            return Err(Refusal::new(
                "The file is a header without rows. Check the time span of the export.",
            ));
        }
        // Rows of a repeated hour were decided after rows that could not be read.
        summary.rejections.sort_by_key(|r| r.line);
        match summary.rejections.first() {
            Some(first) if self.readable_rows == 0 => {
                let mut detail = format!(
                    "None of the {} rows could be read. Line {}: {}",
                    summary.rows, first.line, first.reason
                );
                if !first.value.is_empty() {
                    detail.push_str(&format!(", but is `{}`", first.value));
                }
                detail.push('.');
                Err(Refusal::new(detail).at_line(first.line).at_column(&first.column))
            }
            _ => Ok(summary),
        }
    }

    fn hold(&mut self, row: HeldRow, out: &mut Batch) {
        match self.held.hold(row) {
            Hold::Held => {}
            Hold::OtherHour(row) => {
                self.end_repeated_hour(out);
                self.hold(row, out);
            }
            Hold::TooMany(rows) => {
                for row in rows {
                    self.reject_held(&row, TOO_MANY_HELD);
                }
            }
        }
    }

    fn end_repeated_hour(&mut self, out: &mut Batch) {
        let rows = self.held.end();
        if rows.is_empty() {
            return;
        }
        let known = Known {
            received: self.received,
            newest: self.newest_in_file.or(self.newest_known),
            every_us: self.every_us,
            newest_first: self.newest_first,
        };
        let hours: Vec<_> = rows.iter().map(|r| (r.earlier, r.later)).collect();
        match decide(&hours, &known) {
            Some(moments) => {
                for (row, at) in rows.iter().zip(moments) {
                    self.take(row.fields.fields(), row.line, at, out);
                }
            }
            None => {
                for row in &rows {
                    self.reject_held(row, WHICH_PASS);
                }
            }
        }
    }

    fn reject_held(&mut self, row: &HeldRow, why: &str) {
        let fields = row.fields.fields();
        let stamp = fields.get(self.header.time_index).unwrap_or_default();
        self.reject_time(row.line, stamp, why);
    }

    fn reject_time(&mut self, line: u64, stamp: &[u8], why: &str) {
        let column = std::mem::take(&mut self.header.time_name);
        self.reject_row(line, &column, stamp, why);
        self.header.time_name = column;
    }

    fn reject_row(&mut self, line: u64, column: &str, value: &[u8], why: &str) {
        self.summary.reject(self.header.mapped.len() as u64, line, column, value, why);
    }

    /// Gives a batch the columns of this file.
    fn fit(&self, out: &mut Batch) {
        if out.tags.len() != self.header.mapped.len() {
            out.tags = self.header.mapped.iter().map(|m| m.tag.clone()).collect();
            out.columns = vec![Column::default(); out.tags.len()];
        }
    }

    /// Takes the cells of a row whose moment is known.
    fn take(&mut self, fields: Fields, line: u64, at: Instant, out: &mut Batch) {
        if let Some(why) = out_of_time(at, self.received) {
            let stamp = fields.get(self.header.time_index).unwrap_or_default();
            return self.reject_time(line, stamp, why);
        }
        self.fit(out);
        self.newest_in_file = Some(self.newest_in_file.map_or(at, |newest| newest.max(at)));
        let line_u32 = u32::try_from(line).unwrap_or(u32::MAX);
        let (mut good, mut bad, mut absent) = (0, 0, 0);
        let columns = self.header.mapped.iter().zip(&mut out.columns).zip(&mut self.words);
        for ((mapped, column), words) in columns {
            let Some(text) = fields.get(mapped.index) else {
                absent += 1;
                continue;
            };
            let value = match self.cells.read(text, &mapped.kind) {
                Cell::Number(number) => CellValue::Number(number),
                Cell::Missing => {
                    self.summary.missing += 1;
                    continue;
                }
                Cell::Bad(listed) => match intern(column, words, text) {
                    Some(at) => CellValue::Bad(at),
                    None => CellValue::Bad(column.intern(listed)),
                },
                Cell::Word(text) => match intern(column, words, text) {
                    Some(at) => CellValue::Word(at),
                    None => {
                        self.summary.reject(1, line, mapped.tag.as_str(), text, TOO_MANY_WORDS);
                        continue;
                    }
                },
                Cell::Rejected(why) => {
                    self.summary.reject(1, line, mapped.tag.as_str(), text, why);
                    continue;
                }
            };
            if value.is_good() {
                good += 1;
            } else {
                bad += 1;
            }
            column.push(at, value);
            column.lines.push(line_u32);
        }
        self.summary.good += good;
        self.summary.bad += bad;
        if good + bad > 0 {
            self.summary.reach(at);
        }
        if absent > 0 {
            self.reject_absent(fields.len(), line, absent);
        }
    }

    #[cold]
    fn reject_absent(&mut self, count: usize, line: u64, absent: u64) {
        let is_absent = |m: &&MappedColumn| m.index >= count;
        let first = self.header.mapped.iter().find(is_absent);
        let column = first.map_or("", |m| m.tag.as_str());
        let why = format!("row has {count} of {} columns", self.header.columns);
        self.summary.reject(absent, line, column, b"", &why);
    }
}

/// The index of a word; `None` where the column has held too many different ones, over all
/// the batches of the file.
fn intern(column: &mut Column, words: &mut BTreeSet<String>, text: &[u8]) -> Option<u32> {
    // A state repeats for hours, so it is nearly always known as it stands.
    if let Some(at) = column.words.iter().position(|w| w.as_bytes() == text) {
        return Some(at as u32);
    }
    let word = shown(text);
    if !words.contains(&word) {
        if words.len() >= WORDS_MAX {
            return None;
        }
        words.insert(word.clone());
    }
    Some(column.intern(&word))
}
