//! Time stamps to moments.

use super::form::{Form, Parts};
use super::refusal::Refusal;
use crate::base::{DAY_US, HOUR_US, Instant, LocalTime, MINUTE_US, SECOND_US, Wall, Zone};
use crate::plant::{TimeColumn, TimeFormat};

/// What a stamp means.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(super) enum Moment {
    /// One moment.
    At(Instant),
    /// A local time that the clock shows twice.
    Twice(Instant, Instant),
    /// A local time that the clock never shows.
    Skipped,
}

/// Days from 1899-12-30, day 0 of spreadsheet serials, to 1970-01-01.
const SERIAL_DAY_OF_1970: f64 = 25_569.0;

/// Reads the stamps of one file. It remembers the day and the hour it saw last, so that a long
/// file asks the zone once an hour of data.
pub(super) struct Clock {
    form: Form,
    zone: Zone,
    utc: Zone,
    decimal: u8,
    /// A date and its midnight as if the zone were UTC.
    day: Option<((i16, i8, i8), i64)>,
    /// A local hour of uniform offset, counted as if the zone were UTC, and its beginning.
    hour: Option<(i64, Instant)>,
}

impl Clock {
    /// For a source's time column and decimal sign.
    ///
    /// # Errors
    /// If the format holds what is not read, or does not make a full date.
    pub fn new(time: &TimeColumn, decimal: u8) -> Result<Self, Refusal> {
        let form = Form::new(&time.format).map_err(Refusal::new)?;
        let zone = time.zone.clone();
        Ok(Self { form, zone, utc: Zone::utc(), decimal, day: None, hour: None })
    }

    /// Reads a stamp; `None` if it does not fit the format or there is no such date or time.
    pub fn read(&mut self, text: &[u8]) -> Option<Moment> {
        match self.form.read(text, self.decimal)? {
            Parts::Civil(civil) => {
                let in_range = (0..24).contains(&civil.hour)
                    && (0..60).contains(&civil.minute)
                    && (0..60).contains(&civil.second);
                if !in_range {
                    return None;
                }
                let midnight_us = match civil.day_of_year {
                    Some(day) => self.midnight_of_day(civil.year, day)?,
                    None => self.midnight(civil.year, civil.month, civil.day)?,
                };
                let wall_us = midnight_us
                    + i64::from(civil.hour) * HOUR_US
                    + i64::from(civil.minute) * MINUTE_US
                    + i64::from(civil.second) * SECOND_US
                    + civil.microsecond;
                match civil.offset_s {
                    Some(s) => {
                        Some(Moment::At(Instant::from_micros(wall_us - i64::from(s) * SECOND_US)))
                    }
                    None => self.local(wall_us),
                }
            }
            Parts::UnixSeconds(s) => Some(Moment::At(Instant::from_micros(micros(s)?))),
            Parts::SerialDays(days) => {
                // Serials carry rounding of up to a second; rows are a second apart or more.
                let seconds = (days - SERIAL_DAY_OF_1970) * 86_400.0;
                self.local(micros(seconds.round())?)
            }
        }
    }

    fn midnight(&mut self, year: i16, month: i8, day: i8) -> Option<i64> {
        if let Some((date, midnight_us)) = self.day
            && date == (year, month, day)
        {
            return Some(midnight_us);
        }
        let wall = Wall { year, month, day, hour: 0, minute: 0, second: 0, microsecond: 0 };
        let Some(LocalTime::Once(at)) = self.utc.resolve(wall) else { return None };
        self.day = Some(((year, month, day), at.micros()));
        Some(at.micros())
    }

    fn midnight_of_day(&mut self, year: i16, day_of_year: i16) -> Option<i64> {
        let first_us = self.midnight(year, 1, 1)?;
        let at_us = first_us + i64::from(day_of_year - 1) * DAY_US;
        let same_year = self.utc.wall(Instant::from_micros(at_us)).year == year;
        (day_of_year >= 1 && same_year).then_some(at_us)
    }

    /// What a local time means, given in microseconds as if the zone were UTC.
    fn local(&mut self, wall_us: i64) -> Option<Moment> {
        let hour = wall_us.div_euclid(HOUR_US);
        if let Some((known, begins)) = self.hour
            && known == hour
        {
            return Some(Moment::At(begins.plus(wall_us.rem_euclid(HOUR_US))));
        }
        let first = self.resolve(hour * HOUR_US)?;
        let last = self.resolve(hour * HOUR_US + HOUR_US - 1)?;
        if let (LocalTime::Once(a), LocalTime::Once(b)) = (first, last)
            && b.since(a) == HOUR_US - 1
        {
            self.hour = Some((hour, a));
            return Some(Moment::At(a.plus(wall_us.rem_euclid(HOUR_US))));
        }
        Some(match self.resolve(wall_us)? {
            LocalTime::Once(at) => Moment::At(at),
            LocalTime::Twice(earlier, later) => Moment::Twice(earlier, later),
            LocalTime::Skipped(_) => Moment::Skipped,
        })
    }

    fn resolve(&self, wall_us: i64) -> Option<LocalTime> {
        self.zone.resolve(self.utc.wall(Instant::from_micros(wall_us)))
    }
}

/// Seconds to microseconds, if they lie in the years 1 to 9999 or so.
fn micros(seconds: f64) -> Option<i64> {
    let us = (seconds * SECOND_US as f64).round();
    // Year 1 and year 9999 in seconds since 1970.
    ((-6.2e16..2.5e17).contains(&us)).then_some(us as i64)
}

/// How the stamps should look, for a rejection.
pub(super) fn expected(format: &TimeFormat) -> String {
    match format {
        TimeFormat::Strptime(format) => format!("the time does not fit {format}"),
        TimeFormat::Iso => "the time is not ISO 8601, like 2026-03-02 06:00:00".to_owned(),
        TimeFormat::Serial => "the time is not a spreadsheet serial, like 46083.25".to_owned(),
        TimeFormat::Unix => "the time is not in Unix seconds, like 1772431200".to_owned(),
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::plant::RepeatedHour;

    fn clock(format: TimeFormat, zone: &str) -> Clock {
        let zone = Zone::named(zone).unwrap();
        let column = "Time".to_owned();
        let time = TimeColumn { column, format, zone, repeated_hour: RepeatedHour::ByOrder };
        Clock::new(&time, b'.').unwrap()
    }

    /// One line a case: format, stamp, UTC time, or empty where it is no time.
    fn check(zone: &str, cases: &[(&str, &str, &str)]) {
        for (format, stamp, expected) in cases {
            let format = match *format {
                "iso" => TimeFormat::Iso,
                "serial" => TimeFormat::Serial,
                "unix" => TimeFormat::Unix,
                other => TimeFormat::Strptime(other.to_owned()),
            };
            let read = match clock(format, zone).read(stamp.as_bytes()) {
                Some(Moment::At(at)) => at.to_utc_text(),
                Some(Moment::Twice(a, b)) => format!("{a} or {b}"),
                Some(Moment::Skipped) => "skipped".to_owned(),
                None => String::new(),
            };
            assert_eq!(read, *expected, "{stamp}");
        }
    }

    #[test]
    fn stamps_in_the_trades_forms() {
        check(
            "Europe/London",
            &[
                ("%Y-%m-%d %H:%M:%S", "2026-03-02 06:00:00", "2026-03-02T06:00:00Z"),
                ("%Y-%m-%d %H:%M:%S", "2026-07-02 06:00:00", "2026-07-02T05:00:00Z"),
                ("%d/%m/%Y %H:%M", "2/3/2026 6:05", "2026-03-02T06:05:00Z"),
                ("%m/%d/%Y %I:%M:%S %p", "3/2/2026 12:05:00 AM", "2026-03-02T00:05:00Z"),
                ("%m/%d/%Y %I:%M:%S %p", "03/02/2026 12:05:00 p.m.", "2026-03-02T12:05:00Z"),
                ("%d-%b-%y %H:%M:%S", "02-MAR-26 06:00:00", "2026-03-02T06:00:00Z"),
                ("%d %B %Y %T", "2 March 2026 06:00:00", "2026-03-02T06:00:00Z"),
                ("%Y%m%d%H%M", "202603020605", "2026-03-02T06:05:00Z"),
                ("%Y/%j %H:%M", "2026/061 06:00", "2026-03-02T06:00:00Z"),
                ("%Y/%j %H:%M", "2026/366 06:00", ""),
                ("%d.%m.%Y %H:%M:%S,%f", "02.03.2026 06:00:00,25", "2026-03-02T06:00:00.250Z"),
                ("%Y-%m-%dT%H:%M:%S%z", "2026-03-02T06:00:00+0100", "2026-03-02T05:00:00Z"),
                ("%Y-%m-%d %H:%M:%S", "2026-02-30 06:00:00", ""),
                ("%Y-%m-%d %H:%M:%S", "2026-03-02 24:00:00", ""),
                ("%Y-%m-%d %H:%M:%S", "2026-03-02 06:00", ""),
                ("%Y-%m-%d %H:%M:%S", "2026-03-02 06:00:00 x", ""),
                ("iso", "2026-03-02T06:00", "2026-03-02T06:00:00Z"),
                ("iso", "2026-03-02 06:00:00.1234567", "2026-03-02T06:00:00.123456Z"),
                ("iso", "2026-03-02T06:00:00Z", "2026-03-02T06:00:00Z"),
                ("iso", "2026-03-02 06:00:00-05:30", "2026-03-02T11:30:00Z"),
                ("iso", "2026-03-02", ""),
                ("iso", "02/03/2026 06:00", ""),
                ("serial", "46083.25", "2026-03-02T06:00:00Z"),
                ("serial", "46083.2506944444", "2026-03-02T06:01:00Z"),
                ("unix", "1772431200", "2026-03-02T06:00:00Z"),
                ("unix", "1772431200.5", "2026-03-02T06:00:00.500Z"),
                ("unix", "1e300", ""),
            ],
        );
    }

    #[test]
    fn the_changes_of_the_clock() {
        // Clocks in the United Kingdom went forward at 01:00 GMT on 29 March 2026 and back at
        // 02:00 BST on 25 October.
        let twice = "2026-10-25T00:30:00Z or 2026-10-25T01:30:00Z";
        check(
            "Europe/London",
            &[
                ("iso", "2026-03-29 00:59", "2026-03-29T00:59:00Z"),
                ("iso", "2026-03-29 01:00", "skipped"),
                ("iso", "2026-03-29 02:00", "2026-03-29T01:00:00Z"),
                ("iso", "2026-10-25 01:30", twice),
                ("iso", "2026-10-25 01:30+01:00", "2026-10-25T00:30:00Z"),
                ("iso", "2026-10-25 02:00", "2026-10-25T02:00:00Z"),
                ("serial", "46320.0625", twice),
            ],
        );
        // Lord Howe Island moves by half an hour: on 5 April 2026 at 02:00 back to 01:30.
        check(
            "Australia/Lord_Howe",
            &[
                ("iso", "2026-04-05 01:29", "2026-04-04T14:29:00Z"),
                ("iso", "2026-04-05 01:30", "2026-04-04T14:30:00Z or 2026-04-04T15:00:00Z"),
                ("iso", "2026-04-05 02:00", "2026-04-04T15:30:00Z"),
            ],
        );
    }

    #[test]
    fn a_format_that_cannot_be_read_says_so() {
        for (format, word) in [("%Y-%m %H:%M", "%d"), ("%Q", "%Q"), ("%d/%m %H", "%Y"), ("%", "%")]
        {
            let refused = Form::new(&TimeFormat::Strptime(format.to_owned())).err().unwrap();
            assert!(refused.contains(word), "{refused}");
        }
    }
}
