use super::{ChunkError, SCALES};
use crate::base::{CellValue, Column, Instant};

/// Reads one day of one tag back, strictly ascending in time, without lines.
///
/// # Errors
/// If the text was not written by [`encode`](super::encode); says where.
pub fn decode(text: &str) -> Result<Column, ChunkError> {
    let mut cursor = Cursor { text, bytes: text.as_bytes(), at: 0 };
    cursor.expect("{\"start\":")?;
    let start_us = cursor.int()?;
    let (unit_us, mut deltas) = if cursor.take(",\"step\":") {
        (cursor.int()?, None)
    } else {
        cursor.expect(",\"tick\":")?;
        (cursor.int()?, Some(Vec::new()))
    };
    let scale = if cursor.take(",\"scale\":") {
        let scale = cursor.int()? as f64;
        if !SCALES.contains(&scale) {
            return Err(cursor.wrong("a power of ten"));
        }
        Some(scale)
    } else {
        None
    };
    let words = if cursor.take(",\"words\":") { cursor.words()? } else { Vec::new() };
    if let Some(deltas) = &mut deltas {
        cursor.expect(",\"dt\":[")?;
        cursor.deltas(deltas)?;
    }
    cursor.expect(",\"v\":[")?;
    let mut column = Column { words, ..Column::default() };
    cursor.values(&mut column, start_us, unit_us, scale, deltas.as_deref())?;
    cursor.expect("}")?;
    if cursor.at != text.len() {
        return Err(cursor.wrong("the end"));
    }
    Ok(column)
}

struct Cursor<'a> {
    text: &'a str,
    bytes: &'a [u8],
    at: usize,
}

impl Cursor<'_> {
    fn wrong(&self, expected: &'static str) -> ChunkError {
        ChunkError::Malformed { at: self.at, expected }
    }
    fn peek(&self) -> u8 {
        self.bytes.get(self.at).copied().unwrap_or(0)
    }
    fn take(&mut self, literal: &str) -> bool {
        let found = self.bytes.get(self.at..).is_some_and(|b| b.starts_with(literal.as_bytes()));
        if found {
            self.at += literal.len();
        }
        found
    }
    fn expect(&mut self, literal: &'static str) -> Result<(), ChunkError> {
        if self.take(literal) { Ok(()) } else { Err(self.wrong(literal)) }
    }
    /// A whole number. Digits beyond what fits wrap: such a text is refused or read as a plain
    /// number by the caller, who sees what follows.
    fn int(&mut self) -> Result<i64, ChunkError> {
        let negative = self.peek() == b'-';
        if negative {
            self.at += 1;
        }
        let first = self.at;
        let mut v = 0i64;
        while let Some(digit @ b'0'..=b'9') = self.bytes.get(self.at) {
            v = v.wrapping_mul(10).wrapping_add(i64::from(digit - b'0'));
            self.at += 1;
        }
        if self.at == first {
            return Err(self.wrong("a number"));
        }
        Ok(if negative { v.wrapping_neg() } else { v })
    }
    fn words(&mut self) -> Result<Vec<String>, ChunkError> {
        let rest = self.text.get(self.at..).unwrap_or("");
        let mut read = serde_json::Deserializer::from_str(rest).into_iter::<Vec<String>>();
        match read.next() {
            Some(Ok(words)) => {
                self.at += read.byte_offset();
                Ok(words)
            }
            _ => Err(self.wrong("a list of words")),
        }
    }
    fn deltas(&mut self, out: &mut Vec<i64>) -> Result<(), ChunkError> {
        loop {
            out.push(self.int()?);
            if self.next_or_end()? {
                return Ok(());
            }
        }
    }
    /// Steps over a comma, or over the end of the list, and says whether it was the end.
    fn next_or_end(&mut self) -> Result<bool, ChunkError> {
        let end = match self.peek() {
            b',' => false,
            b']' => true,
            _ => return Err(self.wrong("a comma or the end of the list")),
        };
        self.at += 1;
        Ok(end)
    }
    fn values(
        &mut self,
        column: &mut Column,
        start_us: i64,
        unit_us: i64,
        scale: Option<f64>,
        deltas: Option<&[i64]>,
    ) -> Result<(), ChunkError> {
        let guess = deltas.map_or((self.bytes.len() - self.at) / 2, <[i64]>::len).min(1440);
        column.times.reserve(guess);
        column.values.reserve(guess);
        let listed = column.words.len();
        let (mut place, mut whole, mut us) = (0usize, 0i64, start_us);
        loop {
            if let Some(deltas) = deltas {
                let delta = deltas.get(place).ok_or(self.wrong("as many times as values"))?;
                us = us.wrapping_add(delta.wrapping_mul(unit_us));
            }
            let value = self.value(scale, &mut whole, listed)?;
            if let Some(value) = value {
                column.push(Instant::from_micros(us), value);
            }
            place += 1;
            if deltas.is_none() {
                us = us.wrapping_add(unit_us);
            }
            if self.next_or_end()? {
                break;
            }
        }
        if deltas.is_some_and(|d| d.len() != place) {
            return Err(self.wrong("as many values as times"));
        }
        Ok(())
    }
    fn value(
        &mut self,
        scale: Option<f64>,
        whole: &mut i64,
        listed: usize,
    ) -> Result<Option<CellValue>, ChunkError> {
        match self.peek() {
            b'-' | b'0'..=b'9' => {
                let first = self.at;
                let v = self.int()?;
                if !matches!(self.peek(), b',' | b']') {
                    return self.plain(first).map(Some);
                }
                let Some(scale) = scale else {
                    return self.word_at(v, listed).map(|w| Some(CellValue::Word(w)));
                };
                *whole = whole.wrapping_add(v);
                Ok(Some(CellValue::Number(*whole as f64 / scale)))
            }
            b'"' => {
                self.at += 1;
                let mark = self.peek();
                self.at += 1;
                let v = self.int()?;
                let word = self.word_at(v, listed)?;
                self.expect("\"")?;
                match mark {
                    b'b' => Ok(Some(CellValue::Bad(word))),
                    b'w' => Ok(Some(CellValue::Word(word))),
                    _ => Err(self.wrong("a word or a bad value")),
                }
            }
            _ => self.expect("null").map(|()| None),
        }
    }
    fn plain(&mut self, first: usize) -> Result<CellValue, ChunkError> {
        while !matches!(self.peek(), b',' | b']' | 0) {
            self.at += 1;
        }
        let v = self.text.get(first..self.at).and_then(|t| t.parse::<f64>().ok());
        match v {
            Some(v) if v.is_finite() => Ok(CellValue::Number(v)),
            _ => Err(self.wrong("a finite number")),
        }
    }
    fn word_at(&self, v: i64, listed: usize) -> Result<u32, ChunkError> {
        match u32::try_from(v) {
            Ok(w) if (w as usize) < listed => Ok(w),
            _ => Err(self.wrong("the place of a listed word")),
        }
    }
}
