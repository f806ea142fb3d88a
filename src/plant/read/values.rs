//! Values of a plant file: quantities, durations, ranges, moments, names.

use std::ops::RangeInclusive;

use super::walk::Value;
use crate::base::{Dimension, Instant, LocalTime, Wall, Zone, parse_duration_us, parse_quantity};
use crate::plant::Dated;

/// From when a value without a date holds.
pub(super) const ALWAYS: Instant = Instant::from_micros(i64::MIN);
/// Longer than any duration that can be meant; keeps microseconds well within an i64.
const LONGEST_S: f64 = 1000.0 * 365.25 * 86_400.0;

impl<'r> Value<'r> {
    /// A quantity, in SI.
    pub fn quantity(&self, dimension: Dimension) -> Option<f64> {
        match parse_quantity(self.text()?, dimension) {
            Ok(quantity) => Some(quantity.value_si),
            Err(error) => {
                let message = format!("{}: {}", self.name(), error.message);
                self.mistake(message, error.help.unwrap_or_default());
                None
            }
        }
    }

    /// A quantity above zero, in SI.
    pub fn positive(&self, dimension: Dimension) -> Option<f64> {
        let value = self.quantity(dimension)?;
        if value > 0.0 {
            return Some(value);
        }
        let message = format!("{} is not above zero", self.name());
        self.mistake(message, format!("write it like `{}`", dimension.example()));
        None
    }

    /// A quantity within a range in SI, which `said` words.
    pub fn within(
        &self,
        dimension: Dimension,
        range: RangeInclusive<f64>,
        said: &str,
    ) -> Option<f64> {
        let value = self.quantity(dimension)?;
        self.in_range(value, range, said)
    }

    fn in_range(&self, value: f64, range: RangeInclusive<f64>, said: &str) -> Option<f64> {
        if range.contains(&value) {
            return Some(value);
        }
        self.mistake(format!("{} is out of range", self.name()), format!("it is {said}"));
        None
    }

    /// A number within a range, which `said` words.
    pub fn number_within(&self, range: RangeInclusive<f64>, said: &str) -> Option<f64> {
        let value = self.number()?;
        self.in_range(value, range, said)
    }

    /// A duration such as `8 h` or `PT8H`, in microseconds; at least one.
    pub fn duration_us(&self) -> Option<i64> {
        if self.is_text() && self.text()?.starts_with('P') {
            return match parse_duration_us(self.text()?) {
                Ok(us) => Some(us),
                Err(error) => {
                    self.report.mistake(&self.span, error.to_string());
                    None
                }
            };
        }
        let seconds = self.positive(Dimension::Time)?;
        let us = (seconds * 1e6).round();
        if seconds <= LONGEST_S && us >= 1.0 {
            return Some(us as i64);
        }
        self.mistake(format!("{} is out of range", self.name()), "write it like `8 h`");
        None
    }

    /// A duration that may be zero, in microseconds.
    pub fn duration_or_zero_us(&self) -> Option<i64> {
        let zero = self.is_text()
            && parse_quantity(self.text()?, Dimension::Time).is_ok_and(|q| q.value_si == 0.0);
        if zero { Some(0) } else { self.duration_us() }
    }

    /// A pH, as a number or a text.
    pub fn ph(&self) -> Option<f64> {
        let value = if self.is_text() { self.quantity(Dimension::Ph)? } else { self.number()? };
        self.in_range(value, 0.0..=14.0, "from 0 to 14")
    }

    /// A range of pH such as `6 .. 9`.
    pub fn ph_range(&self) -> Option<(f64, f64)> {
        let text = self.text()?;
        let part = |t: &str| t.trim().parse::<f64>().ok().filter(|p| (0.0..=14.0).contains(p));
        let ends = text
            .trim_start_matches("pH")
            .split_once("..")
            .and_then(|(low, high)| Some((part(low)?, part(high)?)));
        match ends {
            Some((low, high)) if low < high => Some((low, high)),
            _ => {
                let message = format!("{}: `{text}` is not a range of pH", self.name());
                self.mistake(message, "write the lower end first, like `6 .. 9`");
                None
            }
        }
    }

    /// A name that stands in paths and keys.
    pub fn id(&self) -> Option<&'r str> {
        let text = self.text()?;
        let allowed = |c: char| c.is_ascii_alphanumeric() || matches!(c, '-' | '_' | '.');
        if text.len() <= 64 && text.chars().all(allowed) && text.contains(char::is_alphanumeric) {
            return Some(text);
        }
        let message = format!("`{text}` cannot be an id");
        self.mistake(
            message,
            "use up to 64 letters, digits, - _ or . without accents; `name` may hold any text",
        );
        None
    }

    /// A time zone.
    pub fn zone(&self) -> Option<Zone> {
        let text = self.text()?;
        match Zone::named(text) {
            Ok(zone) => Some(zone),
            Err(error) => {
                let names = Zone::all_names();
                let near = crate::base::nearest(text, names.iter().map(String::as_str));
                match near {
                    Some(near) => {
                        self.mistake(error.to_string(), format!("did you mean `{near}`?"));
                    }
                    None => self.report.mistake(&self.span, error.to_string()),
                }
                None
            }
        }
    }

    /// A moment: a date, which means midnight in the plant's zone, or an RFC 3339 time.
    pub fn moment(&self, zone: &Zone) -> Option<Instant> {
        let text = self.text_or_number()?;
        if let Some(wall) = date_of(&text) {
            match zone.resolve(wall) {
                Some(LocalTime::Once(at) | LocalTime::Twice(at, _) | LocalTime::Skipped(at)) => {
                    return Some(at);
                }
                None => {}
            }
        }
        match Instant::parse(&text) {
            Ok(at) => Some(at),
            Err(error) => {
                let message = format!("{}: {error}", self.name());
                self.mistake(message, "a date alone, like 2026-01-01, means its local midnight");
                None
            }
        }
    }

    /// Checks that dates of a list ascend; `self` is the list.
    pub fn ascending<T>(&self, items: &[Value<'r>], dated: &[Dated<T>]) {
        for (at, pair) in dated.windows(2).enumerate() {
            let [earlier, later] = pair else { continue };
            if later.from <= earlier.from {
                let span = items.get(at + 1).map_or(&self.span, |v| &v.span);
                self.report.mistake_help(
                    span,
                    format!("the dates of {} do not ascend", self.name()),
                    "order them by `from`, earliest first, each once",
                );
            }
        }
    }
}

/// Midnight of a text like `2026-01-01`.
fn date_of(text: &str) -> Option<Wall> {
    let mut parts = text.split('-');
    let (year, month, day) = (parts.next()?, parts.next()?, parts.next()?);
    let plain = |t: &str, digits: usize| t.len() == digits && t.bytes().all(|b| b.is_ascii_digit());
    if parts.next().is_some() || !plain(year, 4) || !plain(month, 2) || !plain(day, 2) {
        return None;
    }
    Some(Wall {
        year: year.parse().ok()?,
        month: month.parse().ok()?,
        day: day.parse().ok()?,
        hour: 0,
        minute: 0,
        second: 0,
        microsecond: 0,
    })
}
