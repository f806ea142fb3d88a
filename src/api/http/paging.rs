//! Pages of lists: how many, from where, and where the next one is.

use axum::http::Uri;
use sha2::{Digest, Sha256};

use super::Failure;
use crate::answers::ProblemKind;

/// The place in a list from which a page begins. For clients it is opaque.
///
/// The text holds a check over the name of the list and the place, so that a cursor of another
/// list, or a mistyped one, is refused instead of beginning anywhere.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Cursor {
    /// The place: whatever the list orders by.
    pub place: String,
}

const CHECK: usize = 8;

/// Items of a page where no number is asked for.
pub const LIST_USUAL: u32 = 100;
/// Items of a page at most.
pub const LIST_MOST: u32 = 1_000;
/// Points of a page of a series where no number is asked for.
pub const SERIES_USUAL: u32 = 1_000;
/// Points of a page of a series at most.
pub const SERIES_MOST: u32 = 10_000;

impl Cursor {
    /// The cursor text of a place in a list.
    pub fn text(list: &str, place: &str) -> String {
        hex(&[check(list, place).as_slice(), place.as_bytes()].concat())
    }

    /// Reads a cursor that this list gave out; `None` where the request has none.
    ///
    /// # Errors
    /// If it is not one.
    pub fn parse(list: &str, text: Option<&str>) -> Result<Option<Self>, Failure> {
        let Some(text) = text else { return Ok(None) };
        let wrong = || {
            ProblemKind::BadRequest.problem(
                "`cursor` is not one that this list gave out; take it from `next` of the page \
                 before, or leave it away to begin.",
            )
        };
        let bytes = unhex(text).ok_or_else(wrong)?;
        let (head, place) = bytes.split_at_checked(CHECK).ok_or_else(wrong)?;
        let place = String::from_utf8(place.to_vec()).map_err(|_| wrong())?;
        if head != check(list, &place) {
            return Err(wrong().into());
        }
        Ok(Some(Self { place }))
    }

    /// The place as a number.
    ///
    /// # Errors
    /// If it is none, which no cursor given out is.
    pub fn number(&self) -> Result<i64, Failure> {
        self.place.parse().map_err(|_| {
            ProblemKind::BadRequest.problem("`cursor` is not one that this list gave out.").into()
        })
    }
}

fn check(list: &str, place: &str) -> Vec<u8> {
    let mut hash = Sha256::new();
    hash.update(list.as_bytes());
    hash.update([0]);
    hash.update(place.as_bytes());
    hash.finalize().iter().take(CHECK).copied().collect()
}

fn hex(bytes: &[u8]) -> String {
    bytes.iter().map(|b| format!("{b:02x}")).collect()
}

fn unhex(text: &str) -> Option<Vec<u8>> {
    if !text.is_ascii() || text.len() % 2 != 0 {
        return None;
    }
    (0..text.len()).step_by(2).map(|i| u8::from_str_radix(text.get(i..i + 2)?, 16).ok()).collect()
}

/// How many items a page holds.
///
/// # Errors
/// If none or more than `most` are asked for.
pub fn limit(asked: Option<u32>, usual: u32, most: u32) -> Result<u32, Failure> {
    let limit = asked.unwrap_or(usual);
    if (1..=most).contains(&limit) {
        return Ok(limit);
    }
    Err(ProblemKind::BadRequest.problem(format!("`limit` goes from 1 to {most}.")).into())
}

/// The address of the next page: this one's with another cursor.
pub fn next_address(uri: &Uri, cursor: &str) -> String {
    let query = uri.query().unwrap_or("");
    let kept = query.split('&').filter(|p| !p.is_empty() && !p.starts_with("cursor="));
    let pairs: Vec<&str> = kept.collect();
    let rest = pairs.iter().map(|p| format!("{p}&")).collect::<String>();
    format!("{}?{rest}cursor={cursor}", uri.path())
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn a_cursor_comes_back_and_no_other_does() {
        let text = Cursor::text("receipts", "0199-ü");
        let back = Cursor::parse("receipts", Some(&text)).unwrap().unwrap();
        assert_eq!(back.place, "0199-ü");
        assert!(Cursor::parse("cycles", Some(&text)).is_err());
        for i in 0..text.len() {
            let mut wrong: Vec<char> = text.chars().collect();
            wrong[i] = if wrong[i] == '0' { '1' } else { '0' };
            let wrong: String = wrong.into_iter().collect();
            assert!(Cursor::parse("receipts", Some(&wrong)).is_err(), "{wrong}");
        }
        for wrong in ["", "0", "zz", "ü", &text[2..]] {
            assert!(Cursor::parse("receipts", Some(wrong)).is_err(), "{wrong}");
        }
        assert_eq!(Cursor::parse("receipts", None).unwrap(), None);
    }

    #[test]
    fn the_next_address_keeps_the_question() {
        let uri: Uri = "/v1/receipts?source=a%26b&cursor=00&limit=2".parse().unwrap();
        assert_eq!(next_address(&uri, "ff"), "/v1/receipts?source=a%26b&limit=2&cursor=ff");
        assert_eq!(next_address(&"/v1/x".parse().unwrap(), "ff"), "/v1/x?cursor=ff");
        assert!(limit(Some(0), 100, 1000).is_err());
        assert!(limit(Some(1001), 100, 1000).is_err());
        assert_eq!(limit(None, 100, 1000).unwrap(), 100);
    }
}
