//! Walking a parsed TOML document: sections and values that know their place and what they are
//! called, note their mistakes, and go on.

use std::cell::RefCell;
use std::ops::Range;

use toml::Spanned;
use toml::de::{DeString, DeTable, DeValue};

use super::super::mistake::Report;
use crate::base::nearest;

/// A table of the file, or the place where one could be.
pub(in crate::plant) struct Section<'r> {
    pub report: &'r Report<'r>,
    /// The header, or the braces.
    pub span: Range<usize>,
    /// As `check` and messages name it: `train[0].tags`.
    pub path: String,
    table: Option<&'r DeTable<'r>>,
    known: RefCell<Vec<&'static str>>,
    /// Keys that are required and not there, with an example.
    lacking: RefCell<Vec<(&'static str, String)>>,
}

/// A value of the file.
#[derive(Clone)]
pub(in crate::plant) struct Value<'r> {
    pub report: &'r Report<'r>,
    pub span: Range<usize>,
    /// The key, with the sections above.
    pub path: String,
    raw: &'r DeValue<'r>,
}

impl<'r> Section<'r> {
    /// The document itself.
    pub fn root(report: &'r Report<'r>, table: &'r DeTable<'r>) -> Self {
        Self::new(report, 0..0, String::new(), Some(table))
    }

    fn new(
        report: &'r Report<'r>,
        span: Range<usize>,
        path: String,
        table: Option<&'r DeTable<'r>>,
    ) -> Self {
        Self { report, span, path, table, known: RefCell::default(), lacking: RefCell::default() }
    }

    /// Whether the file has this section.
    pub fn is_there(&self) -> bool {
        self.table.is_some()
    }

    fn path_of(&self, key: &str) -> String {
        if self.path.is_empty() { key.to_owned() } else { format!("{}.{key}", self.path) }
    }

    /// The value of a key, which is a known one from now on.
    pub fn get(&self, key: &'static str) -> Option<Value<'r>> {
        self.known.borrow_mut().push(key);
        let raw = self.table?.get(key)?;
        let path = self.path_of(key);
        self.report.stated(path.clone());
        Some(Value { report: self.report, span: raw.span(), path, raw: raw.get_ref() })
    }

    /// A key that may be left out.
    pub fn optional<T>(
        &self,
        key: &'static str,
        read: impl FnOnce(&Value<'r>) -> Option<T>,
    ) -> Option<T> {
        self.get(key).and_then(|v| read(&v))
    }

    /// A key that must be there; `example` is how it could read. That it is missing is noted
    /// by `finish`, unless a misspelt key tells why.
    pub fn required<T>(
        &self,
        key: &'static str,
        example: &str,
        read: impl FnOnce(&Value<'r>) -> Option<T>,
    ) -> Option<T> {
        let value = self.get(key);
        if value.is_none() {
            self.lacking.borrow_mut().push((key, example.to_owned()));
        }
        value.and_then(|v| read(&v))
    }

    /// A section below this one; an empty one if the file does not have it.
    pub fn section(&self, key: &'static str) -> Self {
        self.get(key)
            .and_then(|v| v.section())
            .unwrap_or_else(|| Self::new(self.report, self.span.clone(), self.path_of(key), None))
    }

    /// The tables of an array of tables, or none.
    pub fn sections(&self, key: &'static str) -> Vec<Self> {
        let Some(value) = self.get(key) else { return Vec::new() };
        if matches!(value.raw, DeValue::Table(_)) {
            self.report.mistake_help(
                &value.span,
                format!("there may be several of `{key}`"),
                format!("write [[{}]] in double brackets", bare(&self.path_of(key))),
            );
            return Vec::new();
        }
        value.items().iter().filter_map(Value::section).collect()
    }

    /// What messages call it.
    fn place(&self) -> String {
        if self.path.is_empty() { "the plant file".to_owned() } else { quoted(&self.path) }
    }

    /// Keys of the file that nobody has asked for, each with the known key that it may mean.
    fn unknown(&self) -> Vec<(&'r Spanned<DeString<'r>>, Option<&'static str>)> {
        let mut known = self.known.borrow().clone();
        known.sort_unstable();
        let keys = self.table.map(|t| t.keys()).into_iter().flatten();
        keys.filter(|key| !known.contains(&key.get_ref().as_ref()))
            .map(|key| (key, nearest(key.get_ref(), known.iter().copied())))
            .collect()
    }

    /// Known keys that the file seems to mean by a misspelt one.
    pub fn misspelt(&self) -> Vec<&'static str> {
        self.unknown().into_iter().filter_map(|(_, near)| near).collect()
    }

    /// Notes the keys that nobody has asked for, and those that are missing.
    pub fn finish(self) {
        let misspelt = self.misspelt();
        for (key, example) in self.lacking.take() {
            if !misspelt.contains(&key) {
                self.report.missing(
                    &self.span,
                    format!("{} has no `{key}`", self.place()),
                    format!("add a line like {key} = {example}"),
                );
            }
        }
        for (key, near) in self.unknown() {
            let help = near.map_or_else(
                || {
                    let mut known = self.known.borrow().clone();
                    known.sort_unstable();
                    known.dedup();
                    format!("known here: {}", known.join(", "))
                },
                |near| format!("did you mean `{near}`?"),
            );
            let message = format!("`{}` is not a key of {}", key.get_ref(), self.place());
            self.report.mistake_help(&key.span(), message, help);
        }
    }
}

/// A path without the numbers of its lists.
fn bare(path: &str) -> String {
    path.split('[').map(|part| part.split_once(']').map_or(part, |(_, rest)| rest)).collect()
}

fn quoted(path: &str) -> String {
    format!("`{}`", bare(path))
}

impl<'r> Value<'r> {
    /// What messages call it.
    pub fn name(&self) -> String {
        quoted(&self.path)
    }
    /// Notes a mistake of this value.
    pub fn mistake(&self, message: impl Into<String>, help: impl Into<String>) {
        self.report.mistake_help(&self.span, message, help);
    }

    fn wrong_type(&self, wanted: &str) {
        let found = match self.raw {
            DeValue::String(_) => "a text",
            DeValue::Integer(_) | DeValue::Float(_) => "a number",
            DeValue::Boolean(_) => "true or false",
            DeValue::Datetime(_) => "a date",
            DeValue::Array(_) => "a list",
            DeValue::Table(_) => "a table",
        };
        let name = self.name();
        self.report.mistake(&self.span, format!("{name} is {found}, where {wanted} belongs"));
    }

    /// Whether it is a text.
    pub fn is_text(&self) -> bool {
        matches!(self.raw, DeValue::String(_))
    }
    /// Whether it is a list.
    pub fn is_list(&self) -> bool {
        matches!(self.raw, DeValue::Array(_))
    }

    /// A text as it stands.
    pub fn raw_text(&self) -> Option<&'r str> {
        if let DeValue::String(text) = self.raw {
            return Some(text);
        }
        self.wrong_type("a text in quotes");
        None
    }

    /// A text that is not empty, without blanks around it.
    pub fn text(&self) -> Option<&'r str> {
        let text = self.raw_text()?.trim();
        if text.is_empty() {
            self.report.mistake(&self.span, format!("{} is empty", self.name()));
            return None;
        }
        Some(text)
    }

    /// A text, or a number or date as it is written.
    pub fn text_or_number(&self) -> Option<String> {
        match self.raw {
            DeValue::Integer(i) => Some(i.to_string()),
            DeValue::Float(f) => Some(f.to_string()),
            DeValue::Datetime(d) => Some(d.to_string()),
            _ => self.text().map(str::to_owned),
        }
    }

    /// A finite number.
    pub fn number(&self) -> Option<f64> {
        let number = match self.raw {
            DeValue::Integer(i) => {
                i64::from_str_radix(i.as_str(), i.radix()).ok().map(|i| i as f64)
            }
            DeValue::Float(f) => f.as_str().parse().ok(),
            _ => {
                self.wrong_type("a number");
                return None;
            }
        };
        let finite = number.filter(|n: &f64| n.is_finite());
        if finite.is_none() {
            self.report.mistake(&self.span, format!("{} is not a finite number", self.name()));
        }
        finite
    }

    /// True or false.
    pub fn boolean(&self) -> Option<bool> {
        match self.raw {
            DeValue::Boolean(b) => Some(*b),
            _ => {
                self.wrong_type("true or false");
                None
            }
        }
    }

    /// A table.
    pub fn section(&self) -> Option<Section<'r>> {
        match self.raw {
            DeValue::Table(table) => {
                let (span, path) = (self.span.clone(), self.path.clone());
                Some(Section::new(self.report, span, path, Some(table)))
            }
            _ => {
                self.wrong_type("a table");
                None
            }
        }
    }

    /// The items of a list; none, and a mistake, for anything else.
    pub fn items(&self) -> Vec<Self> {
        self.list().unwrap_or_default()
    }

    /// The items of a list.
    pub fn list(&self) -> Option<Vec<Self>> {
        let DeValue::Array(array) = self.raw else {
            self.wrong_type("a list");
            return None;
        };
        let item = |(i, raw): (usize, &'r Spanned<DeValue<'r>>)| Self {
            report: self.report,
            span: raw.span(),
            path: format!("{}[{i}]", self.path),
            raw: raw.get_ref(),
        };
        Some(array.iter().enumerate().map(item).collect())
    }

    /// One of a few words.
    pub fn choice<T: Copy>(&self, words: &[(&str, T)]) -> Option<T> {
        let text = self.text()?;
        if let Some((_, meaning)) = words.iter().find(|(w, _)| *w == text) {
            return Some(*meaning);
        }
        let all: Vec<String> = words.iter().map(|(w, _)| format!("\"{w}\"")).collect();
        let help = match nearest(text, words.iter().map(|(w, _)| *w)) {
            Some(near) => format!("did you mean \"{near}\"?"),
            None => format!("write {}", all.join(" or ")),
        };
        self.mistake(format!("`{text}` is not a value of {}", self.name()), help);
        None
    }
}
