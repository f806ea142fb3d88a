//! The written form of a time stamp: strptime directives, compiled once a file, or ISO 8601.

use super::cells::number;
use crate::plant::TimeFormat;

/// A form ready to read stamps.
pub(super) enum Form {
    Pieces(Vec<Piece>),
    Iso,
    Serial,
    Unix,
}

/// What a stamp says, before any zone.
pub(super) enum Parts {
    Civil(Civil),
    UnixSeconds(f64),
    SerialDays(f64),
}

/// A date and a clock time; not yet checked for being one.
#[derive(Clone, Copy)]
pub(super) struct Civil {
    pub year: i16,
    pub month: i8,
    pub day: i8,
    /// Counts instead of month and day, from 1.
    pub day_of_year: Option<i16>,
    pub hour: i8,
    pub minute: i8,
    pub second: i8,
    pub microsecond: i64,
    /// Seconds east of UTC, where the stamp says so.
    pub offset_s: Option<i32>,
}

const EPOCH: Civil = Civil {
    year: 1970,
    month: 1,
    day: 1,
    day_of_year: None,
    hour: 0,
    minute: 0,
    second: 0,
    microsecond: 0,
    offset_s: None,
};

/// One directive, or a sign that stands for itself.
#[derive(Clone, Copy, PartialEq, Eq)]
pub(super) enum Piece {
    Sign(u8),
    Spaces,
    Year,
    YearOfCentury,
    Month,
    MonthName,
    Day,
    DayOfYear,
    Hour,
    Hour12,
    HalfOfDay,
    Minute,
    Second,
    Fraction,
    /// With its point, and may be left out.
    DottedFraction,
    WeekdayName,
    Offset,
}

const MONTHS: [&str; 12] = [
    "January",
    "February",
    "March",
    "April",
    "May",
    "June",
    "July",
    "August",
    "September",
    "October",
    "November",
    "December",
];
const WEEKDAYS: [&str; 7] =
    ["Monday", "Tuesday", "Wednesday", "Thursday", "Friday", "Saturday", "Sunday"];

impl Form {
    /// Compiles a format.
    ///
    /// # Errors
    /// Names the directive that is not read, or the one that is missing.
    pub fn new(format: &TimeFormat) -> Result<Self, String> {
        match format {
            TimeFormat::Iso => Ok(Self::Iso),
            TimeFormat::Serial => Ok(Self::Serial),
            TimeFormat::Unix => Ok(Self::Unix),
            TimeFormat::Strptime(format) => {
                let mut pieces = Vec::new();
                compile(format, format, &mut pieces)?;
                check_complete(format, &pieces)?;
                Ok(Self::Pieces(pieces))
            }
        }
    }

    /// Reads a stamp that has no spaces around it; `None` if it does not fit to its end.
    pub fn read(&self, text: &[u8], decimal: u8) -> Option<Parts> {
        match self {
            Self::Unix => {
                number(text, b'.').or_else(|| number(text, decimal)).map(Parts::UnixSeconds)
            }
            Self::Serial => {
                number(text, decimal).or_else(|| number(text, b'.')).map(Parts::SerialDays)
            }
            Self::Iso => read_iso(text).map(Parts::Civil),
            Self::Pieces(pieces) => read_pieces(pieces, text).map(Parts::Civil),
        }
    }
}

fn compile(whole: &str, format: &str, pieces: &mut Vec<Piece>) -> Result<(), String> {
    let mut bytes = format.bytes().peekable();
    while let Some(byte) = bytes.next() {
        if byte.is_ascii_whitespace() {
            pieces.push(Piece::Spaces);
            continue;
        }
        if byte != b'%' {
            pieces.push(Piece::Sign(byte));
            continue;
        }
        // Padding flags and widths matter to writing only: numbers are read with or without.
        let mut dotted = false;
        while let Some(flag) = bytes.next_if(|b| b"-_0:.3456789".contains(b)) {
            dotted |= flag == b'.';
        }
        let directive = bytes.next().unwrap_or(b'%');
        pieces.push(match directive {
            b'Y' => Piece::Year,
            b'y' => Piece::YearOfCentury,
            b'm' => Piece::Month,
            b'b' | b'B' | b'h' => Piece::MonthName,
            b'd' | b'e' => Piece::Day,
            b'j' => Piece::DayOfYear,
            b'H' | b'k' => Piece::Hour,
            b'I' | b'l' => Piece::Hour12,
            b'p' | b'P' => Piece::HalfOfDay,
            b'M' => Piece::Minute,
            b'S' => Piece::Second,
            b'f' if dotted => Piece::DottedFraction,
            b'f' => Piece::Fraction,
            b'a' | b'A' => Piece::WeekdayName,
            b'z' => Piece::Offset,
            b'n' | b't' => Piece::Spaces,
            b'T' => {
                compile(whole, "%H:%M:%S", pieces)?;
                continue;
            }
            b'R' => {
                compile(whole, "%H:%M", pieces)?;
                continue;
            }
            b'F' => {
                compile(whole, "%Y-%m-%d", pieces)?;
                continue;
            }
            b'D' => {
                compile(whole, "%m/%d/%y", pieces)?;
                continue;
            }
            b'%' if format.ends_with("%%") || bytes.peek().is_some() => Piece::Sign(b'%'),
            other => {
                return Err(format!(
                    "The time format `{whole}` holds %{}, which is not read. Use %Y %m %d %H %M %S, %y %b %B %j %I %p %f %z, %T %F, or like = with an example.",
                    char::from(other)
                ));
            }
        });
    }
    Ok(())
}

fn check_complete(format: &str, pieces: &[Piece]) -> Result<(), String> {
    let has = |wanted: &[Piece]| pieces.iter().any(|p| wanted.contains(p));
    let missing = if !has(&[Piece::Year, Piece::YearOfCentury]) {
        "%Y"
    } else if !has(&[Piece::Month, Piece::MonthName, Piece::DayOfYear]) {
        "%m"
    } else if !has(&[Piece::Day, Piece::DayOfYear]) {
        "%d"
    } else if !has(&[Piece::Hour, Piece::Hour12]) {
        "%H"
    } else if has(&[Piece::Hour12]) && !has(&[Piece::HalfOfDay]) {
        "%p"
    } else {
        return Ok(());
    };
    Err(format!("The time format `{format}` has no {missing}, so it does not make a moment."))
}

fn read_pieces(pieces: &[Piece], text: &[u8]) -> Option<Civil> {
    let mut rest = text;
    let mut civil = EPOCH;
    let (mut hour12, mut afternoon) = (None, None);
    for piece in pieces {
        match piece {
            Piece::Sign(sign) => rest = rest.strip_prefix(&[*sign])?,
            Piece::Spaces => rest = rest.trim_ascii_start(),
            Piece::Year => civil.year = digits(&mut rest, 4, 4)? as i16,
            Piece::YearOfCentury => {
                // POSIX strptime: 69 to 99 are the 1900s, 00 to 68 the 2000s.
                let year = digits(&mut rest, 2, 2)? as i16;
                civil.year = if year < 69 { 2000 + year } else { 1900 + year };
            }
            Piece::Month => civil.month = digits(&mut rest, 1, 2)? as i8,
            Piece::MonthName => civil.month = name(&mut rest, &MONTHS)? as i8 + 1,
            Piece::Day => civil.day = digits(&mut rest, 1, 2)? as i8,
            Piece::DayOfYear => civil.day_of_year = Some(digits(&mut rest, 1, 3)? as i16),
            Piece::Hour => civil.hour = digits(&mut rest, 1, 2)? as i8,
            Piece::Hour12 => hour12 = Some(digits(&mut rest, 1, 2)? as i8),
            Piece::HalfOfDay => afternoon = Some(half_of_day(&mut rest)?),
            Piece::Minute => civil.minute = digits(&mut rest, 1, 2)? as i8,
            Piece::Second => civil.second = digits(&mut rest, 1, 2)? as i8,
            Piece::Fraction => civil.microsecond = fraction(&mut rest)?,
            Piece::DottedFraction => {
                if let Some(tail) = rest.strip_prefix(b".") {
                    rest = tail;
                    civil.microsecond = fraction(&mut rest)?;
                }
            }
            Piece::WeekdayName => {
                name(&mut rest, &WEEKDAYS)?;
            }
            Piece::Offset => civil.offset_s = Some(offset(&mut rest)?),
        }
    }
    if let (Some(hour), Some(afternoon)) = (hour12, afternoon) {
        if !(1..=12).contains(&hour) {
            return None;
        }
        civil.hour = hour % 12 + if afternoon { 12 } else { 0 };
    }
    rest.is_empty().then_some(civil)
}

/// `2026-03-02T06:00`, with a space instead of the T, seconds, a fraction, an offset or Z.
fn read_iso(text: &[u8]) -> Option<Civil> {
    let mut rest = text;
    let mut civil = EPOCH;
    civil.year = digits(&mut rest, 4, 4)? as i16;
    rest = rest.strip_prefix(b"-")?;
    civil.month = digits(&mut rest, 2, 2)? as i8;
    rest = rest.strip_prefix(b"-")?;
    civil.day = digits(&mut rest, 2, 2)? as i8;
    let (between, tail) = rest.split_first()?;
    if !b"Tt ".contains(between) {
        return None;
    }
    rest = tail;
    civil.hour = digits(&mut rest, 2, 2)? as i8;
    rest = rest.strip_prefix(b":")?;
    civil.minute = digits(&mut rest, 2, 2)? as i8;
    if let Some(tail) = rest.strip_prefix(b":") {
        rest = tail;
        civil.second = digits(&mut rest, 2, 2)? as i8;
        if let Some(tail) = rest.strip_prefix(b".").or(rest.strip_prefix(b",")) {
            rest = tail;
            civil.microsecond = fraction(&mut rest)?;
        }
    }
    rest = rest.trim_ascii_start();
    if !rest.is_empty() {
        civil.offset_s = Some(offset(&mut rest)?);
    }
    rest.is_empty().then_some(civil)
}

fn digits(rest: &mut &[u8], least: usize, most: usize) -> Option<i32> {
    let (mut value, mut count) = (0, 0);
    while count < most
        && let Some((byte, tail)) = rest.split_first()
        && byte.is_ascii_digit()
    {
        value = value * 10 + i32::from(byte - b'0');
        count += 1;
        *rest = tail;
    }
    (count >= least).then_some(value)
}

/// Decimals of a second to microseconds; finer ones are cut off.
fn fraction(rest: &mut &[u8]) -> Option<i64> {
    let (mut value, mut count) = (0, 0);
    while count < 9
        && let Some((byte, tail)) = rest.split_first()
        && byte.is_ascii_digit()
    {
        if count < 6 {
            value = value * 10 + i64::from(byte - b'0');
        }
        count += 1;
        *rest = tail;
    }
    while (1..6).contains(&count) {
        value *= 10;
        count += 1;
    }
    (count > 0).then_some(value)
}

/// The place in the list of a name, in full or by its first three letters.
fn name(rest: &mut &[u8], names: &[&str]) -> Option<usize> {
    let starts =
        |n: &str| rest.get(..n.len()).is_some_and(|r| r.eq_ignore_ascii_case(n.as_bytes()));
    let (at, length) = names.iter().enumerate().find_map(|(at, name)| {
        let length = [*name, &name[..3]].into_iter().find(|n| starts(n))?.len();
        Some((at, length))
    })?;
    *rest = rest.get(length..)?;
    Some(at)
}

fn half_of_day(rest: &mut &[u8]) -> Option<bool> {
    for (text, afternoon) in [("AM", false), ("PM", true), ("A.M.", false), ("P.M.", true)] {
        if rest.get(..text.len()).is_some_and(|r| r.eq_ignore_ascii_case(text.as_bytes())) {
            *rest = rest.get(text.len()..)?;
            return Some(afternoon);
        }
    }
    None
}

/// `Z`, `+01`, `+0100`, `+01:00`, in seconds east of UTC.
fn offset(rest: &mut &[u8]) -> Option<i32> {
    let (sign, tail) = rest.split_first()?;
    *rest = tail;
    let sign = match sign {
        b'Z' | b'z' => return Some(0),
        b'+' => 1,
        b'-' => -1,
        _ => return None,
    };
    let hours = digits(rest, 2, 2)?;
    let minutes = if let Some(tail) = rest.strip_prefix(b":") {
        *rest = tail;
        digits(rest, 2, 2)?
    } else if rest.first().is_some_and(u8::is_ascii_digit) {
        digits(rest, 2, 2)?
    } else {
        0
    };
    (hours <= 18 && minutes < 60).then_some(sign * (hours * 3600 + minutes * 60))
}
