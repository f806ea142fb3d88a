//! Reading a plant file: the TOML is walked with its places, all mistakes at once.

mod check;
mod limits;
mod procedure;
mod source;
mod tags;
mod train;
mod values;
mod walk;

use std::collections::BTreeSet;
use std::path::Path;

use toml::de::DeTable;

pub use procedure::strength_mg_l;
pub(super) use walk::Value;

use super::mistake::{Mistake, Report};
use super::model::{MonthTemperature, Plant, Service};
use super::revision::{mapping, revision};
use super::source::Source;
use crate::base::{Dimension, SourceId, Zone};
use crate::science::TemperatureLaw;
use limits::DEFAULT_LIMITS;
use tags::Context;
use train::Common;
use walk::Section;

/// Where permeability is compared unless the plant says otherwise, degrees Celsius.
const REFERENCE_TEMPERATURE_DEGC: f64 = 20.0;
const SHIFTS: [(i8, i8); 3] = [(6, 0), (14, 0), (22, 0)];
const LISTEN: &str = "127.0.0.1:8420";
const DATABASE: &str = "washbell.db";

/// A plant file that holds no mistake.
#[derive(Clone, Debug, PartialEq)]
pub struct Reading {
    /// The plant.
    pub plant: Plant,
    /// What is allowed, and has a consequence the reader should know.
    pub warnings: Vec<Mistake>,
    /// Paths of the settings that the file states, such as `train[0].clean_duration`.
    pub stated: BTreeSet<String>,
}

/// Reads a plant file. `file_dir` is the folder of the file, for paths relative to it.
///
/// # Errors
/// All mistakes of the file, in its order: of syntax, unknown keys, missing keys, wrong types
/// and units, values out of range, and what does not fit together.
pub fn read(text: &str, file_dir: &Path) -> Result<Reading, Vec<Mistake>> {
    let (document, syntax) = DeTable::parse_recoverable(text);
    let report = Report::new(text, &syntax);
    let mut plant = plant(Section::root(&report, document.get_ref()), file_dir);
    let findings = report.finish();
    if !findings.mistakes.is_empty() {
        return Err(findings.mistakes);
    }
    plant.revision = revision(&plant, file_dir);
    plant.mapping = mapping(&plant);
    Ok(Reading { plant, warnings: findings.warnings, stated: findings.stated })
}

/// The whole file. Where something is wrong the report has a mistake, and what stands in for it
/// is never seen outside.
fn plant(root: Section<'_>, file_dir: &Path) -> Plant {
    let head = root.section("plant");
    let id = head.required("id", "\"harrow-fen\"", Value::id).unwrap_or_default();
    let zone =
        head.required("time_zone", "\"Europe/London\"", Value::zone).unwrap_or_else(Zone::utc);
    let sources = sources(&root, &zone);
    let source_ids: Vec<SourceId> = sources.iter().map(|s| s.id.clone()).collect();
    let common = Common {
        tags: Context { zone: &zone, sources: &source_ids },
        limits: limits::limits(root.section("limits"), &DEFAULT_LIMITS),
        procedures: root.sections("procedure").into_iter().map(procedure::procedure).collect(),
        integrity: limits::integrity(root.section("integrity")),
    };
    let mut placed: Vec<_> =
        root.sections("train").into_iter().map(|s| train::train(s, &common)).collect();
    if placed.is_empty() && root.get("train").is_none_or(|v| v.is_list()) {
        root.report.missing(&root.span, "the plant has no train", "add a [[train]]");
    }
    check::trains(root.report, &mut placed);
    let temperature = head.optional("reference_temperature", |v| {
        v.within(Dimension::Temperature, 0.0..=60.0, "from 0 to 60 degC")
    });
    let plant = Plant {
        id: id.to_owned(),
        name: head.optional("name", Value::text).unwrap_or(id).to_owned(),
        reference_temperature_degc: temperature.unwrap_or(REFERENCE_TEMPERATURE_DEGC),
        temperature_law: head.optional("temperature_law", law).unwrap_or(TemperatureLaw::Iapws),
        shifts: head.optional("shifts", shifts).unwrap_or_else(|| SHIFTS.to_vec()),
        service: service(root.section("service"), file_dir),
        sources,
        trains: placed.into_iter().map(|p| p.train).collect(),
        outlook_temperature: outlook(root.section("outlook")),
        retention_us: retention(root.section("retention")),
        revision: String::new(),
        mapping: String::new(),
        zone,
    };
    head.finish();
    root.finish();
    plant
}

fn sources(root: &Section<'_>, zone: &Zone) -> Vec<Source> {
    let sections = root.sections("source");
    let spans: Vec<_> =
        sections.iter().map(|s| s.get("id").map_or(s.span.clone(), |v| v.span)).collect();
    let sources: Vec<Source> = sections.into_iter().map(|s| source::source(s, zone)).collect();
    if sources.is_empty() && root.get("source").is_none_or(|v| v.is_list()) {
        root.report.missing(&root.span, "the plant has no source", "add a [[source]]");
    }
    for (at, (source, span)) in sources.iter().zip(&spans).enumerate() {
        let id = source.id.as_str();
        if !id.is_empty() && sources.iter().take(at).any(|s| s.id == source.id) {
            let message = format!("there is a source `{id}` already");
            root.report.mistake_help(span, message, "give each source an id of its own");
        }
    }
    sources
}

fn law(value: &Value<'_>) -> Option<TemperatureLaw> {
    match TemperatureLaw::parse(value.text()?) {
        Ok(law) => Some(law),
        Err(error) => {
            value.report.mistake(&value.span, error.to_string());
            None
        }
    }
}

fn shifts(value: &Value<'_>) -> Option<Vec<(i8, i8)>> {
    let items = value.list()?;
    let mut shifts: Vec<(i8, i8)> = Vec::new();
    for item in &items {
        let text = item.text_or_number()?;
        let Some(shift) = clock(&text) else {
            item.mistake(format!("`{text}` is not a time of day"), "write it like \"06:00\"");
            continue;
        };
        if shifts.last().is_some_and(|last| *last >= shift) {
            item.mistake("the shifts do not ascend", "order them by time of day, each once");
        }
        shifts.push(shift);
    }
    if items.is_empty() {
        value.mistake("a day has at least one shift", "write shifts = [\"06:00\"]");
    }
    Some(shifts)
}

/// Hour and minute of a text like `06:00` (or `06:00:00`, which TOML makes of a bare time).
fn clock(text: &str) -> Option<(i8, i8)> {
    let (hour, minute) =
        text.strip_suffix(":00").filter(|t| t.len() == 5).unwrap_or(text).split_once(':')?;
    let part = |t: &str, below: i8| {
        let plain = t.len() == 2 && t.bytes().all(|b| b.is_ascii_digit());
        t.parse::<i8>().ok().filter(|n| plain && *n < below)
    };
    Some((part(hour, 24)?, part(minute, 60)?))
}

fn service(section: Section<'_>, file_dir: &Path) -> Service {
    let listen = section.optional("listen", |v| {
        let text = v.text()?;
        let port = text.rsplit_once(':').filter(|(host, _)| !host.is_empty());
        if port.is_some_and(|(_, port)| port.parse::<u16>().is_ok()) {
            return Some(text);
        }
        v.mistake(
            format!("`{text}` is not an address to listen on"),
            "write it like 127.0.0.1:8420",
        );
        None
    });
    let database = section.optional("database", Value::text).unwrap_or(DATABASE);
    let service =
        Service { listen: listen.unwrap_or(LISTEN).to_owned(), database: file_dir.join(database) };
    section.finish();
    service
}

fn outlook(section: Section<'_>) -> Vec<MonthTemperature> {
    let mut months: Vec<MonthTemperature> = Vec::new();
    for item in section.optional("temperature", Value::list).unwrap_or_default() {
        let Some(entry) = item.section() else { continue };
        let month = entry.required("month", "1", |v| {
            let month = v.number_within(1.0..=12.0, "from 1 to 12")?;
            if month.fract() == 0.0 {
                return Some(month as i8);
            }
            v.mistake(format!("{month} is not a month"), "write it from 1 to 12");
            None
        });
        let value = entry.required("value", "\"4 degC\"", |v| {
            v.within(Dimension::Temperature, -2.0..=60.0, "from -2 to 60 degC")
        });
        entry.finish();
        let (Some(month), Some(temperature_degc)) = (month, value) else { continue };
        if months.iter().any(|m| m.month == month) {
            item.mistake(format!("month {month} stands here twice"), "give each month once");
        }
        months.push(MonthTemperature { month, temperature_degc });
    }
    section.finish();
    months
}

fn retention(section: Section<'_>) -> Option<i64> {
    let kept = section.optional("readings", Value::duration_us);
    section.finish();
    kept
}
