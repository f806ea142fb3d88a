use proptest::prelude::*;

use super::*;
use crate::base::{CellValue, Column, DAY_US, Instant, MINUTE_US, SECOND_US};

const START_US: i64 = 1_772_409_600_000_000;

fn grid(values: &[CellValue], words: &[&str]) -> Column {
    let mut column =
        Column { words: words.iter().map(|w| (*w).to_owned()).collect(), ..Column::default() };
    for (i, v) in values.iter().enumerate() {
        column.push(Instant::from_micros(START_US + i as i64 * MINUTE_US), *v);
    }
    column
}

/// A value with its word spelled out, numbers by their bits.
fn spelled(column: &Column) -> Vec<(i64, String)> {
    let text = |v: &CellValue| match *v {
        CellValue::Number(v) => format!("{:x}", v.to_bits()),
        CellValue::Word(w) => format!("word {}", column.word(w)),
        CellValue::Bad(w) => format!("bad {}", column.word(w)),
    };
    column.times.iter().map(|t| t.micros()).zip(column.values.iter().map(text)).collect()
}

fn check(column: &Column) -> String {
    let text = encode(column).unwrap();
    let back = decode(&text).unwrap();
    assert_eq!(spelled(&back), spelled(column), "{text}");
    assert_eq!(encode(&back).unwrap(), text, "the text depends on the content only");
    text
}

use CellValue::{Bad, Number, Word};

#[test]
fn a_regular_day_is_steps_of_whole_numbers() {
    let text = check(&grid(&[Number(0.312), Number(0.316), Number(0.315), Number(0.3)], &[]));
    assert_eq!(
        text,
        r#"{"start":1772409600000000,"step":60000000,"scale":1000,"v":[312,4,-1,-15]}"#
    );
}

#[test]
fn a_hole_in_the_grid_is_null_and_odd_times_are_distances() {
    let mut column = grid(&[Number(1.0); 6], &[]);
    column.times.remove(3);
    column.values.remove(3);
    assert!(check(&column).ends_with(r#""v":[1,0,0,null,0,0]}"#));
    let mut odd = Column::default();
    for s in [0, 61, 119] {
        odd.push(Instant::from_micros(START_US + s * SECOND_US), Number(2.5));
    }
    assert!(check(&odd).contains(r#""tick":1000000,"scale":10,"dt":[0,61,58]"#));
}

#[test]
fn words_bad_values_and_values_without_a_scale_stand_beside_numbers() {
    let text =
        check(&grid(&[Number(1.5), Bad(0), Word(1), Number(-0.0), Number(1.6)], &["Bad", "RUN"]));
    assert!(text.ends_with(r#""scale":10,"words":["Bad","RUN"],"v":[15,"b0","w1",-0.0,1]}"#));
    let text = check(&grid(&[Word(1), Word(1), Bad(2), Word(0)], &["a\"b", "RUN", "é,]"]));
    assert!(text.ends_with(r#""words":["RUN","é,]","a\"b"],"v":[0,0,"b1",2]}"#));
}

#[test]
fn one_exotic_value_does_not_cost_the_others_digits() {
    let mut values = vec![Number(0.25); 40];
    values[7] = Number(0.123_456_789);
    values[9] = Number(1e300);
    let text = check(&grid(&values, &[]));
    assert!(text.contains("\"scale\":100,") && text.contains("0.123456789"), "{text}");
}

#[test]
fn what_cannot_be_written_or_read_is_refused() {
    assert_eq!(encode(&Column::default()), Err(ChunkError::NotAscending));
    let mut twice = grid(&[Number(1.0), Number(2.0)], &[]);
    twice.times[1] = twice.times[0];
    assert_eq!(encode(&twice), Err(ChunkError::NotAscending));
    assert_eq!(encode(&grid(&[Number(1.0), Number(f64::NAN)], &[])), Err(ChunkError::Value(1)));
    assert_eq!(encode(&grid(&[Bad(3)], &["x"])), Err(ChunkError::Value(0)));
    for text in [
        "",
        "{}",
        r#"{"start":1,"step":1,"scale":7,"v":[1]}"#,
        r#"{"start":1,"step":1,"scale":10,"v":[1}"#,
        r#"{"start":1,"step":1,"scale":10,"v":[1]}x"#,
        r#"{"start":1,"step":1,"scale":10,"v":["b0"]}"#,
        r#"{"start":1,"tick":1,"scale":10,"dt":[0],"v":[1,1]}"#,
        r#"{"start":1,"tick":1,"scale":10,"dt":[0,1],"v":[1]}"#,
        r#"{"start":1,"step":1,"scale":10,"v":[1e999]}"#,
        r#"{"start":1,"step":1,"v":[0]}"#,
    ] {
        assert!(matches!(decode(text), Err(ChunkError::Malformed { .. })), "{text}");
    }
}

fn any_value() -> impl Strategy<Value = CellValue> {
    prop_oneof![
        6 => (-2_000_000i64..2_000_000, 0usize..6).prop_map(|(v, p)| Number(v as f64 / SCALES[p])),
        2 => any::<f64>().prop_filter("finite", |v| v.is_finite()).prop_map(Number),
        1 => prop::sample::select(vec![-0.0, 0.0, 1e300, -1e300, 5e-324, f64::MIN_POSITIVE,
            f64::MAX, 9_007_199_254_740_993.0, 4_503_599_627_370_497.5, 0.1 + 0.2]).prop_map(Number),
        1 => (0u32..4).prop_map(Word),
        1 => (0u32..4).prop_map(Bad),
    ]
}

proptest! {
    #[test]
    fn any_day_comes_back_bit_for_bit(
        values in prop::collection::vec(any_value(), 1..80),
        gaps in prop::collection::vec(prop_oneof![
            Just(MINUTE_US), Just(MINUTE_US), Just(MINUTE_US), Just(2 * MINUTE_US), 1i64..DAY_US / 80,
        ], 80),
        words in prop::collection::vec("\\PC{0,6}", 4),
    ) {
        let mut column = Column { words, ..Column::default() };
        let mut us = START_US;
        for (v, gap) in values.iter().zip(&gaps) {
            us += gap;
            column.push(Instant::from_micros(us), *v);
        }
        check(&column);
    }

    #[test]
    fn damaged_text_is_refused_or_read_but_never_panics(at in 0usize..90, byte in 32u8..127) {
        let column = grid(&[Number(1.5), Bad(0), Word(1), Number(-0.0), Number(1.6)], &["B", "R"]);
        let mut bytes = encode(&column).unwrap().into_bytes();
        if let Some(b) = bytes.get_mut(at) {
            *b = byte;
        }
        let _ = decode(std::str::from_utf8(&bytes).unwrap());
        let _ = decode(std::str::from_utf8(&bytes[..at.min(bytes.len())]).unwrap());
    }
}
