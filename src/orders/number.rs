//! Numbers of work orders as people say them.

/// A number as it is spoken: `WO 41`.
pub fn spoken(number: i64) -> String {
    format!("WO {number}")
}

/// The number of a text such as `WO 41`, `wo-41` or `41`.
pub fn number_of(text: &str) -> Option<i64> {
    let text = text.trim();
    let rest = match text.get(..2) {
        Some(start) if start.eq_ignore_ascii_case("WO") => text.get(2..)?,
        _ => text,
    };
    let digits = rest.trim_start_matches([' ', '-', '_']);
    let number = digits.parse::<u32>().ok().filter(|n| *n > 0)?;
    digits.starts_with(|c: char| c.is_ascii_digit()).then_some(i64::from(number))
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn a_number_is_read_as_it_is_spoken() {
        for text in ["WO 41", "wo 41", "WO41", "WO-41", " 41 "] {
            assert_eq!(number_of(text), Some(41), "{text}");
        }
        assert_eq!(number_of(&spoken(7)), Some(7));
        for text in ["", "WO", "WO -1 x", "0", "+41", "wörk"] {
            assert_eq!(number_of(text), None, "{text}");
        }
    }
}
