//! Quantities as people write them: a number and a unit.

use super::units::names;
use super::{Dimension, Unit, nearest, unit_by_name, unit_by_ucum};

/// A quantity read from a text.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Quantity {
    /// In the internal unit of its dimension.
    pub value_si: f64,
    /// The unit it was written in.
    pub unit: Unit,
}

/// Why a text is not the quantity asked for.
#[derive(Clone, Debug, PartialEq, Eq, thiserror::Error)]
#[error("{message}")]
pub struct QuantityError {
    /// What is wrong.
    pub message: String,
    /// What to write instead.
    pub help: Option<String>,
}

/// Reads a quantity such as `0.9 bar`, `20 %` or `68 °F`, of the dimension asked for. A pH needs
/// no unit.
///
/// # Errors
/// If it does not begin with a finite number, has no unit, or one that is unknown or measures
/// something else.
pub fn parse_quantity(text: &str, dimension: Dimension) -> Result<Quantity, QuantityError> {
    let fail = |message: String, help: String| Err(QuantityError { message, help: Some(help) });
    let like = || format!("write {} like `{}`", dimension.in_words(), dimension.example());
    let text = text.trim();
    let (number, rest) = split_number(text);
    let Some(value) = number.parse::<f64>().ok().filter(|v| v.is_finite()) else {
        return fail(format!("`{text}` does not begin with a number"), like());
    };
    let name = rest.trim();
    if name.is_empty() {
        if let (Dimension::Ph, Some(unit)) = (dimension, unit_by_ucum("[pH]")) {
            return Ok(Quantity { value_si: value, unit });
        }
        return fail(format!("`{text}` has no unit"), like());
    }
    let Some(unit) = unit_by_name(name) else {
        if rest.starts_with(',') || name.starts_with(|c: char| c.is_ascii_digit()) {
            let help = "write the number with a decimal point and without separators, like 3200.5";
            return fail(format!("`{text}` is not one number"), help.to_owned());
        }
        return fail(format!("`{name}` is not a known unit"), unit_help(name, dimension));
    };
    if unit.dimension != dimension {
        return fail(
            format!(
                "`{text}` is {}, where {} belongs",
                unit.dimension.in_words(),
                dimension.in_words()
            ),
            like(),
        );
    }
    let value_si = unit.to_si(value);
    if !value_si.is_finite() {
        return fail(format!("`{text}` is too large"), like());
    }
    Ok(Quantity { value_si, unit })
}

/// What to write instead of a unit that is not known.
pub fn unit_help(name: &str, dimension: Dimension) -> String {
    let bare = name.trim_end_matches(['g', 'a']);
    if bare.len() < name.len() && dimension == Dimension::Pressure && unit_by_name(bare).is_some() {
        return format!(
            "write `{bare}`; that a tag is gauge or absolute is said by pressure = \"gauge\" or \"absolute\""
        );
    }
    let known: Vec<String> =
        names().filter(|(_, u)| u.dimension == dimension).map(|(n, _)| n).collect();
    match nearest(name, known.iter().map(String::as_str)) {
        Some(unit) => format!("did you mean `{unit}`?"),
        None => format!("write {} like `{}`", dimension.in_words(), dimension.example()),
    }
}

/// The longest leading decimal number, and what follows it.
fn split_number(text: &str) -> (&str, &str) {
    let bytes = text.as_bytes();
    let digits = |mut at: usize| {
        while bytes.get(at).is_some_and(u8::is_ascii_digit) {
            at += 1;
        }
        at
    };
    let mut end = usize::from(matches!(bytes.first(), Some(b'+' | b'-')));
    end = digits(end);
    if bytes.get(end) == Some(&b'.') {
        end = digits(end + 1);
    }
    if matches!(bytes.get(end), Some(b'e' | b'E')) {
        let sign = usize::from(matches!(bytes.get(end + 1), Some(b'+' | b'-')));
        let exponent = digits(end + 1 + sign);
        if exponent > end + 1 + sign {
            end = exponent;
        }
    }
    text.split_at(end)
}

#[cfg(test)]
mod tests {
    use proptest::prelude::*;

    use super::*;

    fn si(text: &str, dimension: Dimension) -> f64 {
        parse_quantity(text, dimension).unwrap_or_else(|e| panic!("{e}")).value_si
    }

    #[test]
    fn numbers_and_units_are_read() {
        assert_eq!(si("0.9 bar", Dimension::Pressure), 90_000.0);
        assert_eq!(si("20 %", Dimension::Share), 0.2);
        assert_eq!(si("20%", Dimension::Share), 0.2);
        assert_eq!(si("-0.4 m", Dimension::Length), -0.4);
        assert_eq!(si("1.4e12 1/m", Dimension::Resistance), 1.4e12);
        assert_eq!(si("11.5", Dimension::Ph), 11.5);
        assert_eq!(si("5 years", Dimension::Time), 5.0 * 365.25 * 86_400.0);
        assert!((si("68 °F", Dimension::Temperature) - 20.0).abs() < 1e-12);
    }

    #[test]
    fn errors_say_what_to_write() {
        for (text, dimension, message, help) in [
            ("bar", Dimension::Pressure, "does not begin with a number", "0.9 bar"),
            ("0.9", Dimension::Pressure, "no unit", "0.9 bar"),
            ("0.9 baar", Dimension::Pressure, "`baar` is not a known unit", "did you mean `bar`?"),
            ("5 psig", Dimension::Pressure, "not a known unit", "write `psi`; that a tag"),
            ("200 m3/h", Dimension::Area, "is a flow, where an area belongs", "3200 m2"),
            ("0,9 bar", Dimension::Pressure, "not one number", "decimal point"),
            ("3 200 m2", Dimension::Area, "not one number", "without separators"),
            ("1e999 bar", Dimension::Pressure, "does not begin with a number", "0.9 bar"),
        ] {
            let e = parse_quantity(text, dimension).unwrap_err();
            assert!(e.message.contains(message), "{text}: {}", e.message);
            assert!(e.help.as_ref().is_some_and(|h| h.contains(help)), "{text}: {:?}", e.help);
        }
    }

    proptest! {
        #[test]
        fn any_text_is_read_or_refused(text in "\\PC{0,24}") {
            if let Ok(q) = parse_quantity(&text, Dimension::Pressure) {
                prop_assert!(q.value_si.is_finite());
            }
        }

        #[test]
        fn what_is_printed_is_read_back(value in -1e9_f64..1e9) {
            prop_assert_eq!(si(&format!("{value} Pa"), Dimension::Pressure), value);
        }
    }
}
