//! One cell: a number, a word, a mark of bad quality, nothing, or something that is none of
//! these.

/// What kind of values a tag has.
#[derive(Clone, Debug, PartialEq)]
pub(super) enum Kind {
    /// Numbers only.
    Number,
    /// Numbers or words as they are; the plant file names these.
    State(Vec<String>),
}

/// What a cell holds.
#[derive(Clone, Debug, PartialEq)]
pub(super) enum Cell<'a> {
    /// Nothing.
    Missing,
    /// A finite number.
    Number(f64),
    /// A state in words.
    Word(&'a [u8]),
    /// A mark of bad quality, as the list spells it.
    Bad(&'a str),
    /// None of these, and why.
    Rejected(&'static str),
}

/// Words by which exports mark a value that is none: common practice, no source. Words that
/// may be a state of a plant (off, idle, offline, standby) are left out, and a word that the
/// plant file names as a state is a state.
const QUALITY_WORDS: [&str; 34] = [
    "bad",
    "bad data",
    "bad quality",
    "bad input",
    "no reply",
    "no response",
    "uncertain",
    "questionable",
    "doubtful",
    "no data",
    "nodata",
    "no value",
    "no good",
    "invalid",
    "n/a",
    "na",
    "#n/a",
    "#na",
    "#value!",
    "#ref!",
    "#div/0!",
    "#num!",
    "#name?",
    "nan",
    "null",
    "nil",
    "none",
    "(null)",
    "error",
    "#error",
    "comm fail",
    "comm failure",
    "timeout",
    "stale",
];

/// Different words a column may hold; real ones hold a handful.
pub(super) const WORDS_MAX: usize = 1_000;
pub(super) const TOO_MANY_WORDS: &str =
    "a word, and the column has held 1,000 different ones already";
const NOT_FINITE: &str = "not a finite number";

/// Reads cells by the settings of one source.
pub(super) struct CellReader {
    decimal: u8,
    bad_numbers: Vec<f64>,
    bad_words: Vec<String>,
}

impl CellReader {
    /// For a source's decimal sign and its marks of bad quality.
    pub fn new(decimal: u8, bad_values: &[String]) -> Self {
        let bad_words: Vec<String> = bad_values.iter().map(|b| b.trim().to_owned()).collect();
        let number_of =
            |b: &String| number(b.as_bytes(), decimal).or_else(|| number(b.as_bytes(), b'.'));
        Self { decimal, bad_numbers: bad_words.iter().filter_map(number_of).collect(), bad_words }
    }

    /// Reads a cell that has no spaces around it.
    #[inline]
    pub fn read<'a>(&'a self, text: &'a [u8], kind: &Kind) -> Cell<'a> {
        if text.is_empty() {
            return Cell::Missing;
        }
        if let Kind::State(named) = kind
            && named.iter().any(|n| n.as_bytes().eq_ignore_ascii_case(text))
        {
            return number(text, self.decimal).map_or(Cell::Word(text), Cell::Number);
        }
        match number(text, self.decimal) {
            Some(value) => self.judge(value),
            None => self.read_word(text, kind),
        }
    }

    /// Whether a number that could be read is one that marks bad quality.
    #[inline]
    fn judge(&self, value: f64) -> Cell<'_> {
        // The lists are short and the values are marks, so equality is meant.
        if let Some(at) = self.bad_numbers.iter().position(|b| *b == value) {
            return Cell::Bad(self.bad_number_word(self.bad_numbers[at]));
        }
        if value.is_finite() { Cell::Number(value) } else { Cell::Rejected(NOT_FINITE) }
    }

    fn bad_number_word(&self, value: f64) -> &str {
        let same = |b: &&String| {
            [self.decimal, b'.'].iter().any(|d| number(b.as_bytes(), *d) == Some(value))
        };
        self.bad_words.iter().find(same).map_or("", String::as_str)
    }

    #[cold]
    fn read_word<'a>(&'a self, text: &'a [u8], kind: &Kind) -> Cell<'a> {
        let listed = self.bad_words.iter().map(String::as_str).chain(QUALITY_WORDS);
        for word in listed {
            if word.as_bytes().eq_ignore_ascii_case(text) {
                return Cell::Bad(word);
            }
        }
        if let Some(filler) =
            ["-", "?", "*", "#", "."].iter().find(|f| text.iter().all(|b| f.as_bytes() == [*b]))
        {
            return Cell::Bad(filler);
        }
        match kind {
            Kind::State(_) => Cell::Word(text),
            Kind::Number => Cell::Rejected(why_no_number(text, self.decimal)),
        }
    }
}

/// Reads a number with the given decimal sign; infinite where it is beyond the range.
#[inline]
pub(super) fn number(text: &[u8], decimal: u8) -> Option<f64> {
    // Powers of ten up to 22 and integers up to 2^53 are exact in an f64, so one division is
    // correctly rounded: the same value as the long way, and sooner.
    const POWERS: [f64; 16] =
        [1e0, 1e1, 1e2, 1e3, 1e4, 1e5, 1e6, 1e7, 1e8, 1e9, 1e10, 1e11, 1e12, 1e13, 1e14, 1e15];
    let (negative, digits) = match text {
        [b'-', rest @ ..] => (true, rest),
        [b'+', rest @ ..] => (false, rest),
        _ => (false, text),
    };
    if digits.len() > 16 {
        return number_of_any_length(text, decimal);
    }
    let (mut value, mut count, mut point) = (0u64, 0usize, None);
    for byte in digits {
        let digit = byte.wrapping_sub(b'0');
        if digit < 10 {
            value = value * 10 + u64::from(digit);
            count += 1;
        } else if *byte == decimal && point.is_none() {
            point = Some(count);
        } else {
            return number_of_any_length(text, decimal);
        }
    }
    if count == 0 {
        return None;
    }
    if count > 15 {
        return number_of_any_length(text, decimal);
    }
    let scale = POWERS[point.map_or(0, |p| count - p).min(15)];
    let size = value as f64 / scale;
    Some(if negative { -size } else { size })
}

#[cold]
fn number_of_any_length(text: &[u8], decimal: u8) -> Option<f64> {
    let plain = |b: &u8| b.is_ascii_digit() || *b == decimal || b"+-eE".contains(b);
    if text.len() > 400 || !text.iter().all(plain) {
        return None;
    }
    let text = str::from_utf8(text).ok()?;
    if decimal == b'.' {
        text.parse().ok()
    } else {
        text.replace(char::from(decimal), ".").parse().ok()
    }
}

/// What a cell of a numeric tag is instead of a number, so that the cause can be put right.
fn why_no_number(text: &[u8], decimal: u8) -> &'static str {
    let is = |word: &str| text.eq_ignore_ascii_case(word.as_bytes());
    let unsigned = text.strip_prefix(b"-").or(text.strip_prefix(b"+")).unwrap_or(text);
    if ["inf", "infinity"].iter().any(|w| unsigned.eq_ignore_ascii_case(w.as_bytes())) || is("∞")
    {
        return NOT_FINITE;
    }
    let other = if decimal == b'.' { b',' } else { b'.' };
    if grouped(unsigned, decimal) {
        return "not a number: it has a thousands separator; export without, or check the decimal sign";
    }
    if number(text, other).is_some() {
        return if decimal == b'.' {
            "not a number: it has a decimal comma, the plant file says decimal = \".\""
        } else {
            "not a number: it has a decimal point, the plant file says decimal = \",\""
        };
    }
    let digits = text
        .iter()
        .position(|b| !(b.is_ascii_digit() || b"+-".contains(b) || *b == decimal))
        .unwrap_or(text.len());
    let (front, back) = text.split_at(digits);
    if number(front, decimal).is_some() && !back.iter().any(u8::is_ascii_digit) {
        return "not a number: a unit or a remark follows it; export the number alone";
    }
    "not a number"
}

/// Whether the text is a number in groups of three digits.
fn grouped(unsigned: &[u8], decimal: u8) -> bool {
    let whole = unsigned.split(|b| *b == decimal).next().unwrap_or_default();
    // A no-break space, wide or narrow, stands in two or three bytes.
    let text = String::from_utf8_lossy(whole);
    let mut groups = text.split(['.', ',', '\'', '’', ' ', '\u{a0}', '\u{202f}']);
    let digits = |g: &str| !g.is_empty() && g.bytes().all(|b| b.is_ascii_digit());
    let first = groups.next().is_some_and(|g| g.len() <= 3 && digits(g));
    let rest: Vec<&str> = groups.collect();
    first && !rest.is_empty() && rest.iter().all(|g| g.len() == 3 && digits(g))
}

#[cfg(test)]
mod tests {
    use proptest::prelude::*;

    use super::*;

    fn reader(decimal: u8) -> CellReader {
        CellReader::new(decimal, &["Bad".into(), "Kein Wert".into(), "-9999".into(), "1e30".into()])
    }

    #[test]
    fn numbers_follow_the_declared_decimal() {
        for (text, decimal, expected) in [
            ("12.5", b'.', Some(12.5)),
            ("-0.125", b'.', Some(-0.125)),
            ("+3", b'.', Some(3.0)),
            (".5", b'.', Some(0.5)),
            ("5.", b'.', Some(5.0)),
            ("1.2e-3", b'.', Some(0.0012)),
            ("12,5", b',', Some(12.5)),
            ("0.1234567890123456789", b'.', Some(0.123_456_789_012_345_68)),
            ("12,5", b'.', None),
            ("12.5", b',', None),
            ("1.2.3", b'.', None),
            ("1-2", b'.', None),
            ("", b'.', None),
            ("-", b'.', None),
            (".", b'.', None),
            ("0x10", b'.', None),
        ] {
            assert_eq!(number(text.as_bytes(), decimal), expected, "{text}");
        }
    }

    #[test]
    fn marks_of_bad_quality_are_told_from_faults() {
        let reader = reader(b'.');
        let read = |text: &'static str| reader.read(text.as_bytes(), &Kind::Number);
        for bad in [
            "BAD",
            "kein wert",
            "-9999",
            "-9999.0",
            "-9.999e3",
            "1e30",
            "No reply",
            "---",
            "-",
            "?",
            "####",
            "#N/A",
            "NaN",
            "null",
            "Uncertain",
        ] {
            assert!(matches!(read(bad), Cell::Bad(_)), "{bad}: {:?}", read(bad));
        }
        for (text, word) in [
            ("1.2.3", "not a number"),
            ("inf", "finite"),
            ("-Infinity", "finite"),
            ("1e400", "finite"),
            ("1,234.5", "thousands"),
            ("1 234", "thousands"),
            ("1,234", "thousands"),
            ("12,5", "decimal comma"),
            ("12.5 kPa", "unit"),
            ("filtration", "not a number"),
        ] {
            let Cell::Rejected(why) = read(text) else { panic!("{text}: {:?}", read(text)) };
            assert!(why.contains(word), "{text}: {why}");
        }
        assert_eq!(read(""), Cell::Missing);
    }

    #[test]
    fn states_are_numbers_or_words_and_the_plant_file_has_the_last_say() {
        let reader = reader(b'.');
        let kind = Kind::State(vec!["Filter".into(), "none".into(), "-9999".into()]);
        assert_eq!(reader.read(b"3", &kind), Cell::Number(3.0));
        assert_eq!(reader.read(b"Backwash", &kind), Cell::Word(b"Backwash"));
        assert_eq!(reader.read(b"None", &kind), Cell::Word(b"None"));
        assert_eq!(reader.read(b"-9999", &kind), Cell::Number(-9999.0));
        assert_eq!(reader.read(b"No data", &kind), Cell::Bad("no data"));
    }

    proptest! {
        /// The standard library is the judge of the short way.
        #[test]
        fn a_number_is_what_the_standard_library_reads(text in "[-+]?[0-9]{0,17}(\\.[0-9]{0,17})?") {
            prop_assert_eq!(number(text.as_bytes(), b'.'), text.parse::<f64>().ok());
        }
    }
}
