//! Bytes to lines, lines to fields, with bounded memory.
//!
//! A line end always ends a row, even inside quotes: readings hold no line breaks, and so a
//! stray quote costs one row and not the rest of the file. Only the header may span lines.
//! Fields follow RFC 4180 otherwise.

use super::refusal::Refusal;

/// Longest line, bytes.
pub(super) const LINE_BYTES_MAX: usize = 1_000_000;

/// One line without its end.
#[derive(Clone, Copy)]
pub(super) struct Line<'a> {
    pub text: &'a [u8],
    /// From 1.
    pub number: u64,
    /// Whether the file holds its line end.
    pub ended: bool,
}

impl Line<'_> {
    /// Whether it is empty but for spaces.
    pub fn is_blank(&self) -> bool {
        self.text.iter().all(|b| *b == b' ')
    }
}

/// Cuts a stream into lines at LF, CR LF or CR, wherever the chunks were cut.
#[derive(Default)]
pub(super) struct Lines {
    begun: Vec<u8>,
    after_cr: bool,
    ended: u64,
}

impl Lines {
    /// Hands over every line that ends in `bytes`.
    pub fn feed(
        &mut self,
        bytes: &[u8],
        mut each: impl FnMut(Line) -> Result<(), Refusal>,
    ) -> Result<(), Refusal> {
        let mut rest = bytes;
        loop {
            if self.after_cr && !rest.is_empty() {
                rest = rest.strip_prefix(b"\n").unwrap_or(rest);
                self.after_cr = false;
            }
            let Some(at) = line_end(rest) else { break };
            let (text, tail) = rest.split_at(at);
            self.check(text.len())?;
            self.after_cr = tail.first() == Some(&b'\r');
            rest = tail.get(1..).unwrap_or_default();
            self.ended += 1;
            let number = self.ended;
            if self.begun.is_empty() {
                each(Line { text, number, ended: true })?;
            } else {
                self.begun.extend_from_slice(text);
                each(Line { text: &self.begun, number, ended: true })?;
                self.begun.clear();
            }
        }
        self.check(rest.len())?;
        self.begun.extend_from_slice(rest);
        Ok(())
    }

    /// Hands over what stands after the last line end, if anything.
    pub fn finish(self, mut each: impl FnMut(Line) -> Result<(), Refusal>) -> Result<(), Refusal> {
        if self.begun.is_empty() {
            return Ok(());
        }
        each(Line { text: &self.begun, number: self.ended + 1, ended: false })
    }

    fn check(&self, more: usize) -> Result<(), Refusal> {
        if self.begun.len() + more <= LINE_BYTES_MAX {
            return Ok(());
        }
        let lost = if self.ended == 0 {
            " If the file has line ends, they were lost on the way: use --data-binary instead of -d."
        } else {
            ""
        };
        let line = self.ended + 1;
        Err(Refusal::new(format!(
            "Line {line} is longer than {LINE_BYTES_MAX} bytes; no export has such rows.{lost}"
        ))
        .at_line(line))
    }
}

/// Where the first line end stands. Whole blocks are tested at once, which the compiler turns
/// into vector instructions.
fn line_end(bytes: &[u8]) -> Option<usize> {
    const BLOCK: usize = 32;
    let ends = |b: &u8| (*b == b'\n') | (*b == b'\r');
    let clear = bytes
        .chunks_exact(BLOCK)
        .take_while(|block| !block.iter().fold(false, |any, b| any | ends(b)))
        .count();
    let from = clear * BLOCK;
    bytes.get(from..)?.iter().position(ends).map(|at| from + at)
}

/// The fields of one line.
#[derive(Clone, Copy)]
pub(super) struct Fields<'a> {
    text: &'a [u8],
    places: &'a [(u32, u32)],
}

impl<'a> Fields<'a> {
    /// How many there are; at least one.
    pub fn len(&self) -> usize {
        self.places.len()
    }
    /// A field without the spaces around it.
    #[inline]
    pub fn get(&self, index: usize) -> Option<&'a [u8]> {
        let (from, to) = *self.places.get(index)?;
        let field = self.text.get(from as usize..to as usize)?;
        // Nearly every field of an export is without spaces.
        match field {
            [first, .., last] if *first > b' ' && *last > b' ' => Some(field),
            _ => Some(field.trim_ascii()),
        }
    }
    /// All of them.
    pub fn iter(&self) -> impl Iterator<Item = &'a [u8]> {
        (0..self.len()).filter_map(|i| self.get(i))
    }
    /// A copy that outlives the line.
    pub fn keep(&self) -> KeptFields {
        KeptFields { text: self.text.to_vec(), places: self.places.to_vec() }
    }
}

/// Fields that outlive their line.
pub(super) struct KeptFields {
    text: Vec<u8>,
    places: Vec<(u32, u32)>,
}

impl KeptFields {
    /// To look at them.
    pub fn fields(&self) -> Fields<'_> {
        Fields { text: &self.text, places: &self.places }
    }
    /// Bytes they take.
    pub fn bytes(&self) -> usize {
        self.text.len() + self.places.len() * size_of::<(u32, u32)>()
    }
}

/// Cuts lines into fields; keeps its buffers from line to line.
#[derive(Default)]
pub(super) struct Splitter {
    unquoted: Vec<u8>,
    places: Vec<(u32, u32)>,
}

impl Splitter {
    /// The fields of a line of at most `LINE_BYTES_MAX` bytes.
    pub fn split<'a>(&'a mut self, line: &'a [u8], delimiter: u8) -> Fields<'a> {
        self.places.clear();
        let mut from = 0;
        for (at, byte) in line.iter().enumerate() {
            if *byte == delimiter {
                self.places.push((from, at as u32));
                from = at as u32 + 1;
            } else if *byte == b'"' {
                return self.split_quoted(line, delimiter);
            }
        }
        self.places.push((from, line.len() as u32));
        Fields { text: line, places: &self.places }
    }

    fn split_quoted(&mut self, line: &[u8], delimiter: u8) -> Fields<'_> {
        self.places.clear();
        self.unquoted.clear();
        let (mut from, mut quoted, mut at_start) = (0, false, true);
        let mut bytes = line.iter().peekable();
        while let Some(byte) = bytes.next() {
            if quoted {
                if *byte != b'"' {
                    self.unquoted.push(*byte);
                } else if bytes.next_if(|b| **b == b'"').is_some() {
                    self.unquoted.push(b'"');
                } else {
                    quoted = false;
                }
            } else if *byte == delimiter {
                self.places.push((from, self.unquoted.len() as u32));
                from = self.unquoted.len() as u32;
                at_start = true;
                continue;
            } else if *byte == b'"' && at_start {
                quoted = true;
            } else {
                self.unquoted.push(*byte);
            }
            at_start = false;
        }
        self.places.push((from, self.unquoted.len() as u32));
        Fields { text: &self.unquoted, places: &self.places }
    }
}

/// Whether a line opens a quote that it does not close, or the other way round.
pub(super) fn has_odd_quotes(text: &[u8]) -> bool {
    text.iter().filter(|b| **b == b'"').count() % 2 == 1
}

#[cfg(test)]
mod tests {
    use proptest::prelude::*;

    use super::*;

    fn lines(chunks: &[&[u8]]) -> Vec<(u64, String, bool)> {
        let mut found = Vec::new();
        let mut lines = Lines::default();
        let mut each = |l: Line| {
            found.push((l.number, String::from_utf8_lossy(l.text).into_owned(), l.ended));
            Ok(())
        };
        for chunk in chunks {
            lines.feed(chunk, &mut each).unwrap();
        }
        lines.finish(each).unwrap();
        found
    }

    #[test]
    fn all_three_line_ends_count_once() {
        let expected: Vec<_> = [(1, "a", true), (2, "", true), (3, "b", true), (4, "c", false)]
            .map(|(n, t, e)| (n, t.to_owned(), e))
            .into();
        assert_eq!(lines(&[b"a\n\nb\nc"]), expected);
        assert_eq!(lines(&[b"a\r\n\r\nb\r\nc"]), expected);
        assert_eq!(lines(&[b"a\r\rb\rc"]), expected);
        assert_eq!(lines(&[b"a\r", b"\n\r", b"", b"\nb", b"\r\n", b"c"]), expected);
    }

    #[test]
    fn an_endless_line_is_refused() {
        let mut lines = Lines::default();
        let chunk = [b'7'; 65_536];
        let refusal = (0..100).find_map(|_| lines.feed(&chunk, |_| Ok(())).err()).unwrap();
        assert!(refusal.detail.contains("--data-binary"), "{}", refusal.detail);
        assert!(lines.begun.len() <= LINE_BYTES_MAX);
    }

    proptest! {
        /// The csv-core crate, which reads RFC 4180 too, is the judge.
        #[test]
        fn fields_are_those_of_csv_core(line in "[ab,;\" ]{1,40}") {
            let mut splitter = Splitter::default();
            let fields = splitter.split(line.as_bytes(), b',');
            let ours: Vec<Vec<u8>> = fields.iter().map(<[u8]>::to_vec).collect();

            let mut reader = csv_core::Reader::new();
            let (mut text, mut ends) = ([0u8; 256], [0usize; 64]);
            let (_, _, n, m) = reader.read_record(line.as_bytes(), &mut text, &mut ends);
            let (_, _, _, k) = reader.read_record(b"", &mut text[n..], &mut ends[m..]);
            let mut from = 0;
            let theirs: Vec<Vec<u8>> = ends[..m + k]
                .iter()
                .map(|to| {
                    let field = text[from..*to].trim_ascii().to_vec();
                    from = *to;
                    field
                })
                .collect();
            prop_assert_eq!(ours, theirs);
        }
    }
}
