//! Any bytes, cut anywhere: no panic, the same result, every cell accounted for.

use proptest::prelude::*;

use super::*;

/// Rows that are mostly sound, around the repeated hour, with faults mixed in.
fn export() -> impl Strategy<Value = Vec<u8>> {
    let cell = prop_oneof![
        4 => "[0-9]{1,3}\\.[0-9]{1,3}",
        1 => Just("Bad".to_owned()),
        1 => Just(String::new()),
        1 => "[-,\"x.;]{0,4}",
    ];
    let stamp = prop_oneof![
        6 => (0..4u8, 0..60u8).prop_map(|(h, m)| format!("2026-10-25 0{h}:{m:02}:00")),
        1 => "[0-9: -]{0,6}",
    ];
    let row = (stamp, cell.clone(), cell, prop_oneof![Just("\n"), Just("\r\n"), Just("\r")])
        .prop_map(|(t, a, b, end)| format!("{t},{a},{b}{end}"));
    proptest::collection::vec(row, 0..400).prop_map(|rows| {
        let mut text = format!("Timestamp,PT-101,XS-101\n{}", rows.concat());
        text.pop();
        text.into_bytes()
    })
}

fn check_any_split(bytes: &[u8], cuts: &[usize]) -> Result<(), TestCaseError> {
    let case = Case::new().received("2026-11-05T00:00:00Z");
    let whole = case.parse(&[bytes]);
    let mut cuts: Vec<usize> = cuts.iter().map(|c| c % (bytes.len() + 1)).collect();
    cuts.sort_unstable();
    let mut chunks = Vec::new();
    let mut from = 0;
    for cut in cuts {
        chunks.push(&bytes[from..cut]);
        from = cut;
    }
    chunks.push(&bytes[from..]);
    prop_assert_eq!(&case.parse(&chunks), &whole);
    if let Ok((batch, s)) = whole {
        prop_assert_eq!(s.cells, s.good + s.bad + s.missing + s.rejected);
        prop_assert_eq!(s.cells, s.rows * batch.tags.len() as u64);
        prop_assert_eq!(batch.cells() as u64, s.good + s.bad);
        for column in &batch.columns {
            prop_assert_eq!(column.times.len(), column.values.len());
            prop_assert_eq!(column.times.len(), column.lines.len());
        }
    }
    Ok(())
}

proptest! {
    #[test]
    fn any_bytes_in_any_chunks(
        bytes in proptest::collection::vec(any::<u8>(), 0..300),
        cuts in proptest::collection::vec(any::<usize>(), 0..8),
    ) {
        check_any_split(&bytes, &cuts)?;
        // Past the header, where the rows are read.
        let mut export = b"Timestamp,PT-101,XS-101\n2026-03-02 05:00:00,1,2\n".to_vec();
        export.extend(bytes);
        check_any_split(&export, &cuts)?;
    }

    #[test]
    fn any_export_in_any_chunks(
        bytes in export(),
        cuts in proptest::collection::vec(any::<usize>(), 0..20),
    ) {
        check_any_split(&bytes, &cuts)?;
    }
}
