//! Mistakes of a plant file, each with its place.

use std::cell::RefCell;
use std::collections::BTreeSet;
use std::fmt;
use std::ops::Range;

/// Something in the plant file that is wrong, and where.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Mistake {
    /// Bytes of the text it is about.
    pub span: Range<usize>,
    /// Line, from 1.
    pub line: usize,
    /// Column in characters, from 1.
    pub column: usize,
    /// What is wrong.
    pub message: String,
    /// What to write instead, where that can be told.
    pub help: Option<String>,
}

impl fmt::Display for Mistake {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        write!(f, "line {}, column {}: {}", self.line, self.column, self.message)?;
        self.help.as_ref().map_or(Ok(()), |help| write!(f, "; {help}"))
    }
}

/// What has been found while a file is read. Mistakes and warnings pile up; reading goes on.
pub(super) struct Report<'t> {
    text: &'t str,
    /// Lines with a fault of syntax: what was recovered from them is not judged.
    broken_lines: BTreeSet<usize>,
    mistakes: RefCell<Vec<Mistake>>,
    warnings: RefCell<Vec<Mistake>>,
    stated: RefCell<BTreeSet<String>>,
}

/// What a finished report holds.
pub(super) struct Findings {
    /// In the order of the file.
    pub mistakes: Vec<Mistake>,
    /// In the order of the file.
    pub warnings: Vec<Mistake>,
    /// Paths of the settings that the file states.
    pub stated: BTreeSet<String>,
}

impl<'t> Report<'t> {
    /// A report on `text`, which begins with its faults of syntax.
    pub fn new(text: &'t str, syntax: &[toml::de::Error]) -> Self {
        let mut report = Self {
            text,
            broken_lines: BTreeSet::new(),
            mistakes: RefCell::default(),
            warnings: RefCell::default(),
            stated: RefCell::default(),
        };
        let faults: Vec<Mistake> = syntax
            .iter()
            .map(|e| report.at(e.span().unwrap_or(0..0), e.message().to_owned(), None))
            .collect();
        report.broken_lines = faults.iter().map(|m| m.line).collect();
        report.mistakes = RefCell::new(faults);
        report
    }

    /// Notes a mistake.
    pub fn mistake(&self, span: &Range<usize>, message: impl Into<String>) {
        self.push(span, message.into(), None);
    }
    /// Notes a mistake and what to write instead.
    pub fn mistake_help(
        &self,
        span: &Range<usize>,
        message: impl Into<String>,
        help: impl Into<String>,
    ) {
        self.push(span, message.into(), Some(help.into()));
    }
    /// Notes that something required is missing; not where faults of syntax may have hidden it.
    pub fn missing(
        &self,
        span: &Range<usize>,
        message: impl Into<String>,
        help: impl Into<String>,
    ) {
        if self.broken_lines.is_empty() {
            self.push(span, message.into(), Some(help.into()));
        }
    }
    /// Notes something that is allowed and has a consequence the reader should know.
    pub fn warn(&self, span: &Range<usize>, message: impl Into<String>, help: Option<String>) {
        let warning = self.at(span.clone(), message.into(), help);
        self.warnings.borrow_mut().push(warning);
    }
    /// Notes that the file states a setting.
    pub fn stated(&self, path: String) {
        self.stated.borrow_mut().insert(path);
    }
    /// All that was found, in the order of the file.
    pub fn finish(self) -> Findings {
        let in_order = |found: RefCell<Vec<Mistake>>| {
            let mut found = found.into_inner();
            found.sort_by_key(|m| m.span.start);
            found
        };
        Findings {
            mistakes: in_order(self.mistakes),
            warnings: in_order(self.warnings),
            stated: self.stated.into_inner(),
        }
    }

    fn push(&self, span: &Range<usize>, message: String, help: Option<String>) {
        let mistake = self.at(span.clone(), message, help);
        let mut mistakes = self.mistakes.borrow_mut();
        if !self.broken_lines.contains(&mistake.line) && !mistakes.contains(&mistake) {
            mistakes.push(mistake);
        }
    }

    fn at(&self, span: Range<usize>, message: String, help: Option<String>) -> Mistake {
        let before = self.text.get(..span.start).unwrap_or(self.text);
        let line_start = before.rfind('\n').map_or(0, |at| at + 1);
        let column = before.get(line_start..).map_or(0, |l| l.chars().count()) + 1;
        Mistake { line: before.matches('\n').count() + 1, column, span, message, help }
    }
}
