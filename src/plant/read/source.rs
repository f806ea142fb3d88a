//! `[[source]]`: how the plant's historian exports.

use super::walk::{Section, Value};
use crate::base::{MINUTE_US, SourceId, Zone};
use crate::plant::not_yet::refuse;
use crate::plant::{Layout, RepeatedHour, Source, Stamp, TimeColumn, TimeFormat, Values};

/// What marks a bad value unless the source says otherwise.
pub(super) const BAD_VALUES: [&str; 3] = ["Bad", "No reply", "-9999"];

/// Directives of strptime that a time stamp may hold.
const DIRECTIVES: &str = "%AaBbDdeFfHIjklMmnPpQRSsTtYyZz:.123456789";

/// Reads one `[[source]]`.
pub(super) fn source(section: Section<'_>, plant_zone: &Zone) -> Source {
    let id = section.required("id", "\"scada\"", Value::id).unwrap_or_default();
    let expected_every = section.get("expected_every");
    let every_us = section.optional("every", Value::duration_us).unwrap_or(MINUTE_US);
    let expected_every_us =
        expected_every.as_ref().and_then(Value::duration_us).unwrap_or(60 * MINUTE_US);
    if every_us > expected_every_us {
        section.report.mistake_help(
            expected_every.as_ref().map_or(&section.span, |v| &v.span),
            "rows are further apart than exports",
            "`every` is the spacing of rows, `expected_every` that of exports",
        );
    }
    let (delimiter, decimal) = separators(&section);
    let source = Source {
        id: SourceId::new(id),
        layout: layout(&section),
        time: time(&section, plant_zone),
        values: values(&section),
        hold_us: hold(&section),
        every_us,
        expected_every_us,
        delimiter,
        decimal,
        bad_values: section
            .optional("bad_values", texts)
            .unwrap_or_else(|| BAD_VALUES.iter().map(|b| (*b).to_owned()).collect()),
    };
    section.finish();
    source
}

/// A list of texts or numbers.
fn texts(value: &Value<'_>) -> Option<Vec<String>> {
    Some(value.list()?.iter().filter_map(Value::text_or_number).collect())
}

fn owned(value: &Value<'_>) -> Option<String> {
    value.text().map(str::to_owned)
}

fn layout(section: &Section<'_>) -> Layout {
    let word = section.get("layout");
    let long =
        word.as_ref().and_then(|v| v.choice(&[("wide", false), ("long", true)])).unwrap_or(false);
    if !long {
        for key in ["tag_column", "value_column", "unit_column", "quality_column", "good"] {
            belongs(section, key, "layout = \"long\"");
        }
        return Layout::Wide;
    }
    if let Some(word) = &word {
        refuse("layout", "long", word);
    }
    Layout::Long {
        tag_column: section.required("tag_column", "\"Tag\"", owned).unwrap_or_default(),
        value_column: section.required("value_column", "\"Value\"", owned).unwrap_or_default(),
        unit_column: section.optional("unit_column", owned),
        quality_column: section.optional("quality_column", owned),
        good: section
            .optional("good", texts)
            .unwrap_or_else(|| vec!["Good".to_owned(), "192".to_owned()]),
    }
}

/// Notes a key that has no meaning without another.
pub(super) fn belongs(section: &Section<'_>, key: &'static str, with: &str) {
    if let Some(value) = section.get(key) {
        let message = format!("{} says nothing without {with}", value.name());
        value.mistake(message, format!("remove it, or write {with}"));
    }
}

fn time(section: &Section<'_>, plant_zone: &Zone) -> TimeColumn {
    let example = "{ column = \"Timestamp\", format = \"%Y-%m-%d %H:%M:%S\" }";
    let Some(time) = section.required("time", example, Value::section) else {
        return TimeColumn {
            column: String::new(),
            format: TimeFormat::Iso,
            zone: plant_zone.clone(),
            repeated_hour: RepeatedHour::ByOrder,
        };
    };
    if let Some(like) = time.get("like") {
        refuse("like", "", &like);
    }
    let column = TimeColumn {
        column: time.required("column", "\"Timestamp\"", owned).unwrap_or_default(),
        format: time.optional("format", format).unwrap_or(TimeFormat::Iso),
        zone: time.optional("time_zone", Value::zone).unwrap_or_else(|| plant_zone.clone()),
        repeated_hour: time
            .optional("repeated_hour", |v| {
                v.choice(&[
                    ("by-order", RepeatedHour::ByOrder),
                    ("earlier", RepeatedHour::Earlier),
                    ("later", RepeatedHour::Later),
                    ("reject", RepeatedHour::Reject),
                ])
            })
            .unwrap_or(RepeatedHour::ByOrder),
    };
    time.finish();
    column
}

fn format(value: &Value<'_>) -> Option<TimeFormat> {
    let text = value.text()?;
    if !text.contains('%') {
        let words =
            [("iso", TimeFormat::Iso), ("serial", TimeFormat::Serial), ("unix", TimeFormat::Unix)];
        if let Some((word, format)) = words.into_iter().find(|(w, _)| *w == text) {
            refuse("format", word, value);
            return Some(format);
        }
        let help = "write strptime directives such as %Y-%m-%d %H:%M:%S, or \"iso\"";
        value.mistake(format!("`{text}` is not a form of time stamp"), help);
        return None;
    }
    let mut letters = Vec::new();
    let mut rest = text.chars();
    while let Some(c) = rest.next() {
        if c != '%' {
            continue;
        }
        // Flags and widths stand between the sign and the letter.
        let letter =
            rest.by_ref().find(|c| !matches!(c, '-' | '_' | '^' | '#' | ':' | '.' | '0'..='9'));
        match letter {
            Some(letter) if DIRECTIVES.contains(letter) => letters.push(letter),
            _ => {
                let wrong = letter.map_or_else(|| "%".to_owned(), |l| format!("%{l}"));
                let help = "write strptime directives such as %Y-%m-%d %H:%M:%S";
                value.mistake(format!("`{wrong}` is not a directive of a time stamp"), help);
                return None;
            }
        }
    }
    let has = |any: &str| letters.iter().any(|l| any.contains(*l));
    let date = has("FDs") || (has("Yy") && ((has("mBb") && has("de")) || has("j")));
    let clock = has("TRs") || (has("HkIl") && has("M"));
    if date && clock {
        return Some(TimeFormat::Strptime(text.to_owned()));
    }
    let lacks = if date { "time of day" } else { "whole date" };
    value.mistake(
        format!("`{text}` holds no {lacks}"),
        "a time stamp needs year, month, day, hour and minute",
    );
    None
}

fn values(section: &Section<'_>) -> Values {
    let word = section.get("values");
    let mean = word
        .as_ref()
        .and_then(|v| v.choice(&[("instant", false), ("mean", true)]))
        .unwrap_or(false);
    if !mean {
        belongs(section, "interval", "values = \"mean\"");
        belongs(section, "stamp", "values = \"mean\"");
        return Values::Instant;
    }
    if let Some(word) = &word {
        refuse("values", "mean", word);
    }
    let stamps = [("start", Stamp::Start), ("end", Stamp::End)];
    let interval_us = section.required("interval", "\"15 min\"", Value::duration_us);
    let stamp = section.required("stamp", "\"end\"", |v| v.choice(&stamps));
    Values::Mean {
        interval_us: interval_us.unwrap_or(MINUTE_US),
        stamp: stamp.unwrap_or(Stamp::End),
    }
}

fn hold(section: &Section<'_>) -> Option<i64> {
    let word = section.get("between");
    let held = word.as_ref().and_then(|v| v.choice(&[("none", false), ("hold", true)]));
    if held != Some(true) {
        belongs(section, "max_hold", "between = \"hold\"");
        return None;
    }
    if let Some(word) = &word {
        refuse("between", "hold", word);
    }
    section.required("max_hold", "\"15 min\"", Value::duration_us)
}

/// The bytes that separate columns and mark decimals.
fn separators(section: &Section<'_>) -> (u8, u8) {
    let given = section.get("delimiter");
    let delimiter = given.as_ref().and_then(delimiter).unwrap_or(b',');
    let decimal = section.optional("decimal", |v| v.choice(&[(".", b'.'), (",", b',')]));
    let decimal = decimal.unwrap_or(b'.');
    if delimiter == decimal {
        section.report.mistake_help(
            given.as_ref().map_or(&section.span, |v| &v.span),
            "columns and decimals cannot be marked by the same character",
            "where decimals are commas, the delimiter is mostly \";\" or \"\\t\"",
        );
    }
    (delimiter, decimal)
}

fn delimiter(value: &Value<'_>) -> Option<u8> {
    // A tab is blank, so the trimmed text would lose it.
    let text = value.raw_text()?;
    match text.as_bytes() {
        [byte @ (b',' | b';' | b'|' | b'\t' | b' ')] => Some(*byte),
        _ if text.eq_ignore_ascii_case("tab") => Some(b'\t'),
        _ => {
            let message = format!("`{text}` cannot separate columns");
            value.mistake(message, r#"write ",", ";", "|" or "\t""#);
            None
        }
    }
}
