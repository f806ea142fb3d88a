//! The hour that the local clock shows twice, where a file tells its passes by order only.
//!
//! Rows of that hour are held back until the next row outside it, then decided together.

use super::rows::KeptFields;
use crate::base::{HOUR_US, Instant, MINUTE_US};

/// Most rows held back.
const ROWS_MAX: usize = 20_000;
/// Most bytes held back.
const BYTES_MAX: usize = 16_000_000;

/// A row whose local time the clock shows twice.
pub(super) struct HeldRow {
    pub fields: KeptFields,
    pub line: u64,
    pub earlier: Instant,
    pub later: Instant,
}

/// The rows of one repeated hour, in the order of the file.
#[derive(Default)]
pub(super) struct HeldHour {
    rows: Vec<HeldRow>,
    bytes: usize,
    full: bool,
}

/// What became of a row that was to be held.
pub(super) enum Hold {
    /// It waits for the end of its hour.
    Held,
    /// It belongs to another repeated hour: decide the present one, then hold it again.
    OtherHour(HeldRow),
    /// There are too many; these are not taken.
    TooMany(Vec<HeldRow>),
}

impl HeldHour {
    /// Holds a row back.
    pub fn hold(&mut self, row: HeldRow) -> Hold {
        if let Some(first) = self.rows.first()
            && row.earlier.since(first.earlier).abs() > 12 * HOUR_US
        {
            return Hold::OtherHour(row);
        }
        self.bytes += row.fields.bytes();
        self.rows.push(row);
        self.full |= self.rows.len() > ROWS_MAX || self.bytes > BYTES_MAX;
        if self.full {
            self.bytes = 0;
            return Hold::TooMany(std::mem::take(&mut self.rows));
        }
        Hold::Held
    }
    /// Ends the hour and gives its rows.
    pub fn end(&mut self) -> Vec<HeldRow> {
        std::mem::take(self).rows
    }
}

/// What is known beside the rows themselves.
pub(super) struct Known {
    /// When the file was received.
    pub received: Instant,
    /// The newest reading of the file so far, else of the source.
    pub newest: Option<Instant>,
    /// Spacing of rows.
    pub every_us: i64,
    /// Whether the file so far runs from new to old, where it shows.
    pub newest_first: bool,
}

/// Gives each row of a repeated hour its moment; `None` where it cannot be told.
///
/// `hours` holds the earlier and the later moment of each row, in the order of the file.
pub(super) fn decide(hours: &[(Instant, Instant)], known: &Known) -> Option<Vec<Instant>> {
    let steps = || hours.windows(2).map(|w| w[1].0.since(w[0].0));
    let back = steps().filter(|s| *s < 0).count();
    let forth = steps().filter(|s| *s > 0).count();
    let newest_first = match (back, forth) {
        (0 | 1, 0 | 1) => known.newest_first,
        (0 | 1, _) => false,
        (_, 0 | 1) => true,
        // It jumps to and fro: no order to tell the passes by.
        _ => return None,
    };
    let jump = if newest_first { steps().position(|s| s > 0) } else { steps().position(|s| s < 0) };
    if let Some(last_of_first) = jump {
        let moment = |(at, (earlier, later)): (usize, &(Instant, Instant))| {
            let in_first_pass = at <= last_of_first;
            if in_first_pass != newest_first { *earlier } else { *later }
        };
        return Some(hours.iter().enumerate().map(moment).collect());
    }
    let later = lone_pass_is_later(hours, known)?;
    Some(hours.iter().map(|h| if later { h.1 } else { h.0 }).collect())
}

/// Whether a lone pass is the later one; `None` where it cannot be told.
///
/// Received within 24 hours of it: the latest pass that does not reach into the future. Else
/// the one that follows the newest reading within one and a half rows, or a quarter of an hour.
fn lone_pass_is_later(hours: &[(Instant, Instant)], known: &Known) -> Option<bool> {
    let (first, first_again) = *hours.iter().min()?;
    let (last, last_again) = *hours.iter().max()?;
    if known.received.since(last) <= 24 * HOUR_US {
        return Some(last_again <= known.received);
    }
    let tolerance_us = (known.every_us + known.every_us / 2).max(15 * MINUTE_US);
    let newest = known.newest?;
    let follows = |at: Instant| (1..=tolerance_us).contains(&at.since(newest));
    match (follows(first), follows(first_again)) {
        (true, _) => Some(false),
        (false, true) => Some(true),
        (false, false) => None,
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    // The clock in London shows 01:00 to 01:59 twice on 25 October 2026: from 00:00Z and 01:00Z.
    fn utc(clock: &str) -> Instant {
        Instant::parse(&format!("2026-10-{clock}Z")).unwrap()
    }
    fn hours(clocks: &[&str]) -> Vec<(Instant, Instant)> {
        let once = |c: &&str| utc(&format!("25T{c}:00")).plus(-HOUR_US);
        clocks.iter().map(|c| (once(c), once(c).plus(HOUR_US))).collect()
    }
    /// The UTC minutes after 00:00Z of each row, or nothing where it cannot be told.
    fn check(clocks: &[&str], received: &str, newest: Option<&str>, expected: &[i64]) {
        let known = Known {
            received: utc(received),
            newest: newest.map(utc),
            every_us: MINUTE_US,
            newest_first: false,
        };
        let midnight = utc("25T00:00:00");
        let told: Vec<i64> = decide(&hours(clocks), &known)
            .unwrap_or_default()
            .iter()
            .map(|t| t.since(midnight) / MINUTE_US)
            .collect();
        assert_eq!(told, expected, "{clocks:?} received {received}");
    }

    #[test]
    fn two_passes_are_told_apart_by_the_jump() {
        let late = "31T00:00:00";
        check(&["01:00", "01:30", "01:59", "01:00", "01:30"], late, None, &[0, 30, 59, 60, 90]);
        // A row delivered twice is no jump.
        check(&["01:00", "01:00", "01:30", "01:10"], late, None, &[0, 0, 30, 70]);
        // Newest first.
        check(&["01:50", "01:20", "01:00", "01:40", "01:10"], late, None, &[110, 80, 60, 40, 10]);
        check(&["01:00", "01:30", "01:10", "01:40", "01:20"], late, None, &[]);
    }

    #[test]
    fn a_fresh_lone_pass_is_the_latest_that_is_not_in_the_future() {
        let pass = ["01:00", "01:30", "01:59"];
        check(&pass, "25T01:05:00", None, &[0, 30, 59]);
        check(&pass, "25T02:05:00", None, &[60, 90, 119]);
        check(&pass, "26T00:30:00", None, &[60, 90, 119]);
    }

    #[test]
    fn an_old_lone_pass_must_follow_something() {
        let pass = ["01:00", "01:30", "01:59"];
        let late = "31T00:00:00";
        check(&pass, late, Some("24T23:59:00"), &[0, 30, 59]);
        check(&pass, late, Some("25T00:59:00"), &[60, 90, 119]);
        check(&pass, late, Some("25T12:00:00"), &[]);
        check(&pass, late, Some("24T20:00:00"), &[]);
        check(&pass, late, None, &[]);
    }

    #[test]
    fn too_many_rows_are_not_held() {
        let mut hour = HeldHour::default();
        let (earlier, later) = hours(&["01:00"])[0];
        let row = |line| HeldRow {
            fields: super::super::rows::Splitter::default().split(b"01:00,1", b',').keep(),
            line,
            earlier,
            later,
        };
        let mut refused = 0;
        for line in 0..=ROWS_MAX as u64 + 5 {
            if let Hold::TooMany(rows) = hour.hold(row(line)) {
                refused += rows.len();
            }
        }
        assert_eq!(refused, ROWS_MAX + 6);
        assert!(hour.end().is_empty());
        assert!(matches!(hour.hold(row(1)), Hold::Held), "the next hour begins anew");
    }
}
