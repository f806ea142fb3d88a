//! Why a body was not taken at all, in words for the person who has to put it right at night.

use std::fmt;

/// A delivery that is not taken. Whatever was handed over before it must be dropped.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Refusal {
    /// What is wrong and what to do, in sentences.
    pub detail: String,
    /// Line of the file, the header being line 1, where one is to blame.
    pub line: Option<u64>,
    /// Column, where one is to blame.
    pub column: Option<String>,
}

impl Refusal {
    pub(super) fn new(detail: impl Into<String>) -> Self {
        Self { detail: detail.into(), line: None, column: None }
    }
    pub(super) fn at_line(mut self, line: u64) -> Self {
        self.line = Some(line);
        self
    }
    pub(super) fn at_column(mut self, column: &str) -> Self {
        self.column = Some(shown(column.as_bytes()));
        self
    }
}

impl fmt::Display for Refusal {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        f.write_str(&self.detail)
    }
}

impl std::error::Error for Refusal {}

/// The text as a person can read it: at most 80 characters, bytes that are not UTF-8 marked.
pub(super) fn shown(text: &[u8]) -> String {
    // A character has at most four bytes, so 320 hold 80 of them.
    let head = &text[..text.len().min(320)];
    String::from_utf8_lossy(head).trim().chars().take(80).collect()
}

/// A delimiter as the plant file would name it.
pub(super) fn delimiter_name(delimiter: u8) -> &'static str {
    match delimiter {
        b',' => "a comma",
        b';' => "a semicolon",
        b'\t' => "a tab",
        b'|' => "a bar",
        b' ' => "a space",
        _ => "another sign",
    }
}

/// What the first bytes of a body look like, if not like a text with columns.
///
/// The signatures are those of RFC 1952 (gzip), RFC 8878 (zstd) and the ZIP application note;
/// the others are common practice, no source.
pub(super) fn foreign(head: &[u8]) -> Option<Refusal> {
    let text = head.trim_ascii_start();
    let starts = |signature: &[u8]| head.starts_with(signature);
    let detail = if text.is_empty() {
        "The body is empty. Check that the export was written before it was posted."
    } else if starts(&[0xff, 0xfe]) || starts(&[0xfe, 0xff]) {
        "The body is UTF-16, and UTF-16 is not read by this version. Export as UTF-8, or convert it: iconv -f UTF-16 -t UTF-8."
    } else if starts(&[0x1f, 0x8b]) {
        "The body is gzip data. Post it with the header Content-Encoding: gzip, or unpack it first."
    } else if starts(&[0x28, 0xb5, 0x2f, 0xfd]) {
        "The body is zstd data. Post it with the header Content-Encoding: zstd, or unpack it first."
    } else if starts(b"PK\x03\x04") || starts(&[0xd0, 0xcf, 0x11, 0xe0]) {
        "The body is a workbook or a zip archive. Export as CSV text instead."
    } else if starts(b"%PDF") {
        "The body is a PDF. Export as CSV text instead."
    } else if head.contains(&0) {
        "The body holds zero bytes: it is UTF-16 or no text at all. Export as CSV text in UTF-8."
    } else if text.starts_with(b"<") {
        "The body looks like HTML or XML, perhaps a login or error page. Open the export and look at it; CSV text is expected."
    } else if text.starts_with(b"{") || text.starts_with(b"[") {
        "The body looks like JSON. Post it to /v1/readings; CSV text is expected here."
    } else {
        return None;
    };
    Some(Refusal::new(detail))
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn what_is_not_an_export_is_named() {
        for (head, word) in [
            (&b""[..], "empty"),
            (b" \r\n\n", "empty"),
            (b"\xff\xfeT\0i\0", "UTF-16"),
            (b"\x1f\x8b\x08\0", "gzip"),
            (b"\x28\xb5\x2f\xfd", "zstd"),
            (b"PK\x03\x04\x14", "workbook"),
            (b"T\0i\0m\0", "zero bytes"),
            (b"\n <!DOCTYPE html>", "HTML"),
            (b"{\"readings\": []}", "JSON"),
        ] {
            let refusal = foreign(head).unwrap();
            assert!(refusal.detail.contains(word), "{word}: {}", refusal.detail);
        }
        assert_eq!(foreign(b"Timestamp,PT-101\n"), None);
    }

    #[test]
    fn long_and_broken_text_is_cut_and_marked() {
        assert_eq!(shown("µ".repeat(500).as_bytes()).chars().count(), 80);
        assert_eq!(shown(b" 12\xb0C "), "12\u{fffd}C");
    }
}
