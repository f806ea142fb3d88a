//! A wide export, fed in chunks of any size.

use std::collections::BTreeMap;

use super::body::Body;
use super::cells::Kind;
use super::layout::{read_header, tags_of};
use super::refusal::{Refusal, foreign};
use super::rows::{LINE_BYTES_MAX, Line, Lines, Splitter, has_odd_quotes};
use super::stamp::Clock;
use super::{Batch, Summary};
use crate::base::{Instant, Tag};
use crate::plant::{Layout, Plant, Source, TimeFormat};

/// Bytes looked at before the first line is read. They are gathered first, so that the answer
/// does not hang on how the body was cut.
const HEAD_BYTES: usize = 4_096;
const LINE_ENDS_LOST: &str =
    "The line ends were lost on the way. With curl, use --data-binary instead of -d, or -T.";

/// Reads one export file of the wide layout: a column a tag, UTF-8.
///
/// After a refusal nothing of the file may be kept, and the parser is of no further use.
pub struct Parser {
    head: Option<Vec<u8>>,
    lines: Lines,
    reader: Reader,
}

struct Reader {
    source: Source,
    tags: BTreeMap<Tag, Kind>,
    received: Instant,
    newest_known: Option<Instant>,
    splitter: Splitter,
    header: Vec<u8>,
    quote_open: bool,
    body: Option<Body>,
}

impl Parser {
    /// For a file of `source` that came in at `received`. `newest_known` is the newest reading
    /// of that source in the store: a repeated hour without its other pass may continue it.
    pub fn new(
        plant: &Plant,
        source: &Source,
        received: Instant,
        newest_known: Option<Instant>,
    ) -> Self {
        let reader = Reader {
            source: source.clone(),
            tags: tags_of(plant, source),
            received,
            newest_known,
            splitter: Splitter::default(),
            header: Vec::new(),
            quote_open: false,
            body: None,
        };
        Self { head: Some(Vec::new()), lines: Lines::default(), reader }
    }

    /// Reads on and adds what was read to `out`.
    ///
    /// # Errors
    /// If the body is no such export.
    pub fn feed(&mut self, bytes: &[u8], out: &mut Batch) -> Result<(), Refusal> {
        let mut rest = bytes;
        if let Some(head) = &mut self.head {
            let (first, tail) = rest.split_at(rest.len().min(HEAD_BYTES - head.len()));
            head.extend_from_slice(first);
            if head.len() < HEAD_BYTES {
                return Ok(());
            }
            rest = tail;
            self.open(out)?;
        }
        self.lines.feed(rest, |line| self.reader.line(line, out))
    }

    /// Reads what is left and says what became of every cell.
    ///
    /// # Errors
    /// If the body is no such export, or no row of it could be read.
    pub fn finish(mut self, out: &mut Batch) -> Result<Summary, Refusal> {
        self.open(out)?;
        self.lines.finish(|line| self.reader.line(line, out))?;
        self.reader.finish(out)
    }

    /// Judges the first bytes, then reads them.
    fn open(&mut self, out: &mut Batch) -> Result<(), Refusal> {
        let Some(head) = self.head.take() else { return Ok(()) };
        let text = head.strip_prefix(b"\xef\xbb\xbf").unwrap_or(&head);
        if let Some(refusal) = foreign(text) {
            return Err(refusal);
        }
        if matches!(self.reader.source.layout, Layout::Long { .. }) {
            return Err(Refusal::new(format!(
                "Source `{}` has layout = \"long\", and a row a reading is not read by this version. Export a column a tag and set layout = \"wide\".",
                self.reader.source.id
            )));
        }
        if line_ends_lost(text, &self.reader.source)? {
            return Err(Refusal::new(LINE_ENDS_LOST).at_line(1));
        }
        self.lines.feed(text, |line| self.reader.line(line, out))
    }
}

/// Whether the body begins without a line end, and a name of the header runs into a stamp.
fn line_ends_lost(head: &[u8], source: &Source) -> Result<bool, Refusal> {
    // A number at the end of a name is no sign of a stamp.
    if matches!(source.time.format, TimeFormat::Serial | TimeFormat::Unix)
        || head.iter().any(|b| matches!(b, b'\n' | b'\r'))
    {
        return Ok(false);
    }
    let mut clock = Clock::new(&source.time, source.decimal)?;
    let mut ends_in_stamp = |field: &[u8]| {
        let field = field.trim_ascii().strip_suffix(b"\"").unwrap_or(field).trim_ascii();
        // Stamps are shorter than 64 bytes; a longer tail need not be tried.
        let first = field.len().saturating_sub(64).max(1);
        (first..field.len()).any(|at| field.get(at..).is_some_and(|t| clock.read(t).is_some()))
    };
    Ok(head.split(|b| *b == source.delimiter).skip(1).any(&mut ends_in_stamp))
}

impl Reader {
    fn line(&mut self, line: Line, out: &mut Batch) -> Result<(), Refusal> {
        if let Some(body) = &mut self.body {
            if !line.is_blank() {
                let fields = self.splitter.split(line.text, self.source.delimiter);
                body.row(fields, &line, out);
            }
            return Ok(());
        }
        if self.header.is_empty() && line.is_blank() {
            return Ok(());
        }
        self.header.extend_from_slice(line.text);
        if self.header.len() > LINE_BYTES_MAX {
            return Err(Refusal::new("A quote in the header is not closed.").at_line(1));
        }
        self.quote_open ^= has_odd_quotes(line.text);
        if line.ended && self.quote_open {
            self.header.push(b'\n');
            return Ok(());
        }
        let header = read_header(&self.header, &self.source, &self.tags);
        if !line.ended {
            let only = match header {
                Ok(_) => "The body is one line, a header without rows.".to_owned(),
                Err(refusal) => refusal.detail,
            };
            return Err(Refusal::new(format!(
                "{only} If the file has more lines, use --data-binary instead of -d."
            ))
            .at_line(1));
        }
        let clock = Clock::new(&self.source.time, self.source.decimal)?;
        out.tags = Vec::new();
        let body = Body::new(header?, clock, &self.source, self.received, self.newest_known);
        self.body = Some(body);
        Ok(())
    }

    fn finish(self, out: &mut Batch) -> Result<Summary, Refusal> {
        match self.body {
            Some(body) => body.finish(out),
            None => Err(Refusal::new("A quote in the header is not closed.").at_line(1)),
        }
    }
}
