//! Readings posted one by one as JSON.

use std::collections::BTreeMap;

use serde::Deserialize;
use utoipa::ToSchema;

use super::cells::{Cell, CellReader, Kind, TOO_MANY_WORDS, WORDS_MAX};
use super::layout::tags_of;
use super::refusal::shown;
use super::{Batch, Summary, out_of_time};
use crate::base::{CellValue, Column, Instant, SourceId, Tag};
use crate::plant::{Layout, Plant, Source};

/// The body of a post of readings.
#[derive(Clone, Debug, PartialEq, Deserialize, ToSchema)]
#[serde(deny_unknown_fields)]
pub struct PostedReadings {
    /// Source of all readings that do not name their own.
    pub source: Option<String>,
    /// The readings, in the order in which they count.
    pub readings: Vec<PostedReading>,
}

/// One reading.
#[derive(Clone, Debug, PartialEq, Deserialize, ToSchema)]
#[serde(deny_unknown_fields)]
pub struct PostedReading {
    /// Its source, where it is not that of the post.
    pub source: Option<String>,
    /// RFC 3339, with an offset.
    #[schema(format = DateTime)]
    pub time: String,
    /// The tag, as the plant file names it.
    pub tag: String,
    /// A number with a decimal point, a word, or null for none.
    pub value: PostedValue,
    /// What the sender thinks of it; good where left out.
    pub quality: Option<String>,
}

/// A posted value.
#[derive(Clone, Debug, PartialEq, Deserialize, ToSchema)]
#[serde(untagged, expecting = "a value is a number, a text or null")]
pub enum PostedValue {
    /// A number.
    Number(f64),
    /// A number or a word, as text.
    Text(String),
    /// None.
    Missing,
}

/// Texts that mean good quality where the source names none: common practice, no source.
const GOOD: [&str; 4] = ["good", "ok", "192", ""];

struct Door<'a> {
    source: &'a Source,
    tags: BTreeMap<Tag, Kind>,
    cells: CellReader,
    batch: Batch,
}

/// Sorts posted readings by source and tag. `default` is the source of readings that name
/// none; a sole source of the plant needs no naming.
///
/// A rejection's `line` is the position of the reading in the post, from 1. Nothing is refused
/// as a whole.
pub fn take_posted(
    plant: &Plant,
    default: Option<&SourceId>,
    readings: &[PostedReading],
    received: Instant,
) -> (BTreeMap<SourceId, Batch>, Summary) {
    let mut doors: Vec<Door> = plant
        .sources
        .iter()
        .map(|source| Door {
            source,
            tags: tags_of(plant, source),
            // JSON numbers have a decimal point, whatever the exports have.
            cells: CellReader::new(b'.', &source.bad_values),
            batch: Batch::default(),
        })
        .collect();
    let mut summary = Summary::default();
    for (at, reading) in readings.iter().enumerate() {
        let position = at as u64 + 1;
        summary.rows += 1;
        summary.cells += 1;
        if let Err((value, why)) =
            take_one(&mut doors, default, reading, position, received, &mut summary)
        {
            summary.reject(1, position, &shown(reading.tag.as_bytes()), value.as_bytes(), &why);
        }
    }
    let batches = doors
        .into_iter()
        .filter(|door| !door.batch.tags.is_empty())
        .map(|door| (door.source.id.clone(), door.batch))
        .collect();
    (batches, summary)
}

/// Takes one reading, or says which text is to blame and why.
fn take_one(
    doors: &mut [Door],
    default: Option<&SourceId>,
    reading: &PostedReading,
    position: u64,
    received: Instant,
    summary: &mut Summary,
) -> Result<(), (String, String)> {
    let fault = |value: &str, why: &str| (value.to_owned(), why.to_owned());
    let sole = doors.len() == 1;
    let name = reading.source.as_deref().or(default.map(SourceId::as_str));
    let door = match name {
        Some(name) => doors
            .iter_mut()
            .find(|d| d.source.id.as_str() == name)
            .ok_or_else(|| fault(name, "no source of the plant file is called so"))?,
        None => doors
            .first_mut()
            .filter(|_| sole)
            .ok_or_else(|| fault("", "the plant has several sources: name one"))?,
    };
    let tag = Tag::new(reading.tag.trim());
    let Some(kind) = door.tags.get(&tag) else {
        let why = format!("not a tag of source `{}`", door.source.id);
        return Err((reading.tag.clone(), why));
    };
    let at = Instant::parse(&reading.time).map_err(|e| (reading.time.clone(), e.to_string()))?;
    if let Some(why) = out_of_time(at, received) {
        return Err(fault(&reading.time, why));
    }
    let text = text_of(&reading.value);
    let quality = reading.quality.as_deref().map_or("", str::trim);
    let (value, word) = if is_good(quality, door.source) {
        match door.cells.read(text.trim().as_bytes(), kind) {
            Cell::Missing => {
                summary.missing += 1;
                return Ok(());
            }
            Cell::Rejected(why) => return Err(fault(&text, why)),
            Cell::Number(number) => (CellValue::Number(number), String::new()),
            Cell::Word(word) => (CellValue::Word(0), shown(word)),
            Cell::Bad(_) => (CellValue::Bad(0), shown(text.as_bytes())),
        }
    } else {
        (CellValue::Bad(0), shown(quality.as_bytes()))
    };
    let column = column_of(&mut door.batch, tag);
    if !word.is_empty() && column.words.len() >= WORDS_MAX && !column.words.contains(&word) {
        return Err(fault(&word, TOO_MANY_WORDS));
    }
    let value = match value {
        CellValue::Number(_) => value,
        CellValue::Word(_) => CellValue::Word(column.intern(&word)),
        CellValue::Bad(_) => CellValue::Bad(column.intern(&word)),
    };
    column.push(at, value);
    column.lines.push(u32::try_from(position).unwrap_or(u32::MAX));
    if value.is_good() {
        summary.good += 1;
    } else {
        summary.bad += 1;
    }
    summary.reach(at);
    Ok(())
}

fn is_good(quality: &str, source: &Source) -> bool {
    match &source.layout {
        Layout::Long { good, .. } if !good.is_empty() => {
            quality.is_empty() || good.iter().any(|g| g.eq_ignore_ascii_case(quality))
        }
        _ => GOOD.iter().any(|g| g.eq_ignore_ascii_case(quality)),
    }
}

fn column_of(batch: &mut Batch, tag: Tag) -> &mut Column {
    let at = batch.tags.iter().position(|t| *t == tag).unwrap_or_else(|| {
        batch.tags.push(tag);
        batch.columns.push(Column::default());
        batch.tags.len() - 1
    });
    &mut batch.columns[at]
}

fn text_of(value: &PostedValue) -> String {
    match value {
        PostedValue::Number(number) => number.to_string(),
        PostedValue::Text(text) => text.clone(),
        PostedValue::Missing => String::new(),
    }
}

#[cfg(test)]
mod tests {
    use super::super::tests::plant;
    use super::*;

    fn take(json: &str) -> (BTreeMap<SourceId, Batch>, Summary) {
        let posted: PostedReadings = serde_json::from_str(json).unwrap();
        let default = posted.source.map(|s| SourceId::new(&s));
        let received = Instant::parse("2026-03-02T06:00:00Z").unwrap();
        take_posted(&plant(), default.as_ref(), &posted.readings, received)
    }

    #[test]
    fn each_reading_is_taken_or_accounted_for() {
        let (batches, summary) = take(
            r#"{"readings": [
                {"time": "2026-03-02T05:00:00Z", "tag": "PT-101", "value": 1.25},
                {"time": "2026-03-02T06:01:00+01:00", "tag": "PT-101", "value": "1.5", "quality": "Good"},
                {"time": "2026-03-02T05:02:00Z", "tag": "PT-101", "value": -9999},
                {"time": "2026-03-02T05:03:00Z", "tag": "PT-101", "value": 1.3, "quality": "Uncertain"},
                {"time": "2026-03-02T05:04:00Z", "tag": "PT-101", "value": null},
                {"time": "2026-03-02T05:05:00Z", "tag": "PT-101", "value": "1,5"},
                {"time": "2026-03-02 05:06:00", "tag": "PT-101", "value": 1},
                {"time": "2026-03-02T06:16:00Z", "tag": "PT-101", "value": 1},
                {"time": "2026-03-02T05:07:00Z", "tag": "PT-999", "value": 1},
                {"source": "lab", "time": "2026-03-02T05:07:00Z", "tag": "PT-101", "value": 1},
                {"time": "2026-03-02T05:08:00Z", "tag": "XS-101", "value": "Backwash"}
            ]}"#,
        );
        let batch = &batches[&SourceId::new("scada")];
        let values = &batch.columns[0].values;
        assert_eq!(values[..2], [CellValue::Number(1.25), CellValue::Number(1.5)]);
        assert_eq!(batch.columns[0].words, ["-9999", "Uncertain"]);
        assert_eq!(batch.columns[0].lines, [1, 2, 3, 4]);
        assert_eq!(batch.columns[1].words, ["Backwash"]);
        let counts = (summary.good, summary.bad, summary.missing, summary.rejected);
        assert_eq!(counts, (3, 2, 1, 5));
        assert_eq!(summary.cells, 11);
        let reasons: Vec<_> =
            summary.rejections.iter().map(|r| (r.line, r.reason.as_str())).collect();
        for ((line, reason), (expected, word)) in reasons.iter().zip([
            (6, "decimal comma"),
            (7, "no offset"),
            (8, "in the future"),
            (9, "not a tag"),
            (10, "no source"),
        ]) {
            assert_eq!(*line, expected);
            assert!(reason.contains(word), "{reason}");
        }
    }

    #[test]
    fn unknown_fields_and_left_out_values_are_errors() {
        for (json, word) in [
            (r#"{"readings": [], "extra": 1}"#, "extra"),
            (r#"{"readings": [{"time": "", "tag": "", "value": 1, "unit": "bar"}]}"#, "unit"),
            (r#"{"readings": [{"time": "", "tag": ""}]}"#, "value"),
            (r#"{"readings": [{"time": "", "tag": "", "value": true}]}"#, "number, a text or null"),
        ] {
            let error = serde_json::from_str::<PostedReadings>(json).unwrap_err().to_string();
            assert!(error.contains(word), "{error}");
        }
    }
}
