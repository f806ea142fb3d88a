//! Times as answers write them: RFC 3339 with the plant's own offset, and in words.

use serde::Serialize;
use utoipa::ToSchema;

use crate::analysis::Dates;
use crate::base::{DAY_US, HOUR_US, Instant, MINUTE_US, SECOND_US, Zone};

/// A moment in RFC 3339, with the plant's own offset.
#[derive(Clone, Debug, PartialEq, Eq, Serialize, ToSchema)]
#[schema(value_type = String, format = DateTime, example = "2026-03-02T06:00:00+00:00")]
pub struct PlantTime(String);

impl PlantTime {
    /// A moment at a plant.
    pub fn new(zone: &Zone, at: Instant) -> Self {
        Self(zone.to_text(at))
    }
    /// A moment that may be missing.
    pub fn optional(zone: &Zone, at: Option<Instant>) -> Option<Self> {
        at.map(|t| Self::new(zone, t))
    }
    /// The text.
    pub fn as_str(&self) -> &str {
        &self.0
    }
}

/// An ISO 8601 duration to the second, such as `PT48M` or `P2DT3H`; what is negative is none.
pub fn duration_text(us: i64) -> String {
    let mut rest = us.max(0) / SECOND_US * SECOND_US;
    if rest == 0 {
        return "PT0S".to_owned();
    }
    let mut out = String::from("P");
    for (unit_us, letter) in [(DAY_US, 'D'), (HOUR_US, 'H'), (MINUTE_US, 'M'), (SECOND_US, 'S')] {
        if letter == 'H' && rest > 0 {
            out.push('T');
        }
        let n = rest / unit_us;
        if n > 0 {
            out.push_str(&format!("{n}{letter}"));
        }
        rest %= unit_us;
    }
    out
}

/// A duration in words, to one unit: `48 minutes`, `7 hours`, `3 days`.
pub fn duration_words(us: i64) -> String {
    let us = us.max(0);
    let (unit_us, name) = match us {
        _ if us < 2 * HOUR_US => (MINUTE_US, "minute"),
        _ if us < 2 * DAY_US => (HOUR_US, "hour"),
        _ => (DAY_US, "day"),
    };
    let n = us / unit_us;
    format!("{n} {name}{}", if n == 1 { "" } else { "s" })
}

/// A local date in words, `Monday 2 March`; with its year where that is not `near`'s.
pub fn day_words(zone: &Zone, at: Instant, near: Instant) -> String {
    let year = zone.wall(at).year;
    let words = zone.day_words(at);
    if year == zone.wall(near).year { words } else { format!("{words} {year}") }
}

/// A local date and time in words, `Monday 2 March 06:00`.
pub fn moment_words(zone: &Zone, at: Instant, near: Instant) -> String {
    format!("{} {}", day_words(zone, at, near), zone.clock_text(at))
}

/// When a limit is reached, in words, as it stands at `now`.
pub(super) fn dates_words(zone: &Zone, dates: &Dates, now: Instant, near: Instant) -> String {
    let likely = match dates.p50 {
        Some(t) if t <= now => return "most likely reached by now".to_owned(),
        Some(t) => format!("most likely {}", day_words(zone, t, near)),
        None => "more likely than not further off than 180 days".to_owned(),
    };
    match dates.p10 {
        Some(t) if t <= now => format!("{likely}, one chance in ten already"),
        Some(t) => format!("{likely}, one chance in ten before {}", day_words(zone, t, near)),
        None => likely,
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn durations_are_iso_8601() {
        for (us, text, words) in [
            (-5, "PT0S", "0 minutes"),
            (48 * MINUTE_US, "PT48M", "48 minutes"),
            (61 * SECOND_US, "PT1M1S", "1 minute"),
            (7 * HOUR_US + 14 * MINUTE_US + 999_999, "PT7H14M", "7 hours"),
            (DAY_US, "P1D", "24 hours"),
            (2 * DAY_US + 3 * HOUR_US, "P2DT3H", "2 days"),
        ] {
            assert_eq!(duration_text(us), text);
            assert_eq!(duration_words(us), words);
        }
    }

    #[test]
    fn moments_carry_the_plants_offset() {
        let zone = Zone::named("Europe/London").unwrap();
        let summer = Instant::parse("2026-07-01T05:00:00Z").unwrap();
        let winter = Instant::parse("2025-12-31T05:00:00Z").unwrap();
        assert_eq!(PlantTime::new(&zone, summer).as_str(), "2026-07-01T06:00:00+01:00");
        assert_eq!(moment_words(&zone, summer, summer), "Wednesday 1 July 06:00");
        assert_eq!(moment_words(&zone, winter, summer), "Wednesday 31 December 2025 05:00");
    }
}
