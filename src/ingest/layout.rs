//! The header of a wide export: which column is the time, which are tags.

use std::collections::BTreeMap;

use super::cells::Kind;
use super::refusal::{Refusal, delimiter_name, shown};
use super::rows::Splitter;
use crate::base::Tag;
use crate::plant::{Plant, Role, Source};

/// Most columns of an export.
pub(super) const COLUMNS_MAX: usize = 4_096;
const DELIMITERS: [u8; 4] = [b',', b';', b'\t', b'|'];
/// Names that are listed in an answer.
const LISTED_MAX: usize = 100;

/// A column that is a tag of the plant file.
pub(super) struct MappedColumn {
    pub index: usize,
    pub tag: Tag,
    pub kind: Kind,
}

/// What the header says.
pub(super) struct Header {
    /// Columns in all.
    pub columns: usize,
    pub time_index: usize,
    /// The name of the time column as the file has it.
    pub time_name: String,
    /// In the order of the file, at least one.
    pub mapped: Vec<MappedColumn>,
    /// The first 100 names that no train uses.
    pub unmapped: Vec<String>,
    /// What the sender should know of the columns.
    pub notes: Vec<String>,
}

/// The tags of a source and what kind of values they have. A tag that serves several trains or
/// roles is there once.
pub(super) fn tags_of(plant: &Plant, source: &Source) -> BTreeMap<Tag, Kind> {
    let mut tags: BTreeMap<Tag, Kind> = BTreeMap::new();
    for signal in plant.trains.iter().flat_map(|t| &t.signals) {
        if signal.source != source.id {
            continue;
        }
        let kind = tags.entry(signal.tag.clone()).or_insert(Kind::Number);
        if signal.role == Role::State {
            let mut words = match std::mem::replace(kind, Kind::Number) {
                Kind::State(words) => words,
                Kind::Number => Vec::new(),
            };
            words.extend(signal.states.iter().map(|(word, _)| word.trim().to_owned()));
            *kind = Kind::State(words);
        }
    }
    tags
}

/// Reads the header, which is one line unless a quoted name spans several.
///
/// # Errors
/// If the time column is missing, a needed name stands twice, or no column is a tag.
pub(super) fn read_header(
    text: &[u8],
    source: &Source,
    tags: &BTreeMap<Tag, Kind>,
) -> Result<Header, Refusal> {
    let names = names_in(text, source.delimiter);
    if names.len() > COLUMNS_MAX {
        return Err(Refusal::new(format!(
            "The header has {} columns, and at most {COLUMNS_MAX} are read. If the file has line ends, they were lost on the way: use --data-binary instead of -d. Else export fewer columns.",
            names.len()
        ))
        .at_line(1));
    }
    let Some(time_index) = names.iter().position(|n| is_time(n, source)) else {
        return Err(no_time_column(text, &names, source, tags));
    };
    let mut at: BTreeMap<&str, usize> = BTreeMap::new();
    let mut mapped = Vec::new();
    let mut unmapped = Vec::new();
    for (index, name) in names.iter().enumerate() {
        if index == time_index {
            continue;
        }
        if is_time(name, source) {
            return Err(twice(name, time_index, index));
        }
        if let Some((tag, kind)) = tags.get_key_value(&Tag::new(name)) {
            if let Some(before) = at.insert(name, index) {
                return Err(twice(name, before, index));
            }
            mapped.push(MappedColumn { index, tag: tag.clone(), kind: kind.clone() });
        } else if !name.is_empty() {
            unmapped.push(shown(name.as_bytes()));
        }
    }
    if mapped.is_empty() {
        return Err(no_tag_column(&names, source, tags));
    }
    let mut notes = Vec::new();
    if unmapped.len() > LISTED_MAX {
        let count = unmapped.len();
        notes.push(format!("{count} columns are not used; the first {LISTED_MAX} are listed."));
        unmapped.truncate(LISTED_MAX);
    }
    let absent: Vec<&str> = tags.keys().map(Tag::as_str).filter(|t| !at.contains_key(t)).collect();
    if !absent.is_empty() {
        notes.push(format!("The file has no column for {}.", list(&absent, 10)));
    }
    let time_name = shown(names[time_index].as_bytes());
    Ok(Header { columns: names.len(), time_index, time_name, mapped, unmapped, notes })
}

/// Only names that are needed may not stand twice: many exports repeat `Quality`.
fn twice(name: &str, before: usize, again: usize) -> Refusal {
    Refusal::new(format!(
        "Columns {} and {} are both called `{}`; which one is meant cannot be told. Export it once.",
        before + 1,
        again + 1,
        shown(name.as_bytes())
    ))
    .at_line(1)
    .at_column(name)
}

fn names_in(text: &[u8], delimiter: u8) -> Vec<String> {
    let mut splitter = Splitter::default();
    let fields = splitter.split(text, delimiter);
    // Names over several lines are compared as if on one.
    let one_line = |f: &[u8]| {
        let name = String::from_utf8_lossy(f);
        if name.contains(['\n', '\r']) {
            name.split_whitespace().collect::<Vec<_>>().join(" ")
        } else {
            name.into_owned()
        }
    };
    fields.iter().map(one_line).collect()
}

fn is_time(name: &str, source: &Source) -> bool {
    name.to_lowercase() == source.time.column.trim().to_lowercase()
}

fn no_time_column(
    text: &[u8],
    names: &[String],
    source: &Source,
    tags: &BTreeMap<Tag, Kind>,
) -> Refusal {
    let wanted = source.time.column.trim();
    for delimiter in DELIMITERS.into_iter().filter(|d| *d != source.delimiter) {
        let others = names_in(text, delimiter);
        let fits = others.iter().any(|n| is_time(n, source))
            && others.iter().any(|n| tags.contains_key(&Tag::new(n)));
        if fits {
            let sign = if delimiter == b'\t' {
                "\\t".to_owned()
            } else {
                char::from(delimiter).to_string()
            };
            return Refusal::new(format!(
                "The columns are separated by {}, but the plant file says {} for source `{}`. Set delimiter = \"{sign}\" there, or change the export.",
                delimiter_name(delimiter),
                delimiter_name(source.delimiter),
                source.id
            ))
            .at_line(1);
        }
    }
    let shown_names: Vec<&str> = names.iter().map(String::as_str).collect();
    Refusal::new(format!(
        "No column is called `{wanted}`, the time column of source `{}`. Line 1 must be the header; found there: {}.",
        source.id,
        list(&shown_names, LISTED_MAX)
    ))
    .at_line(1)
    .at_column(wanted)
}

fn no_tag_column(names: &[String], source: &Source, tags: &BTreeMap<Tag, Kind>) -> Refusal {
    let found: Vec<&str> =
        names.iter().map(String::as_str).filter(|n| !is_time(n, source)).collect();
    let expected: Vec<&str> = tags.keys().map(Tag::as_str).collect();
    let mut detail = format!(
        "No column is a tag of source `{}`. Found: {}. The plant file names: {}.",
        source.id,
        list(&found, 20),
        list(&expected, 20)
    );
    if expected.iter().any(|t| found.iter().any(|n| n.eq_ignore_ascii_case(t))) {
        detail.push_str(" Names must match in capitals and small letters too.");
    }
    if found.iter().any(|n| n.contains('\u{fffd}')) {
        detail.push_str(" The header is not UTF-8; export as UTF-8.");
    }
    Refusal::new(detail).at_line(1)
}

/// The first names in a sentence, and how many more there are.
fn list(names: &[&str], most: usize) -> String {
    let mut text: Vec<String> = names.iter().take(most).map(|n| shown(n.as_bytes())).collect();
    if text.is_empty() {
        return "none".to_owned();
    }
    if names.len() > most {
        text.push(format!("and {} more", names.len() - most));
    }
    text.join(", ")
}
