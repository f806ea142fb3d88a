//! Wide exports with the defects that exports have, a case each.

use super::*;

#[test]
fn a_plain_export() {
    let summary = Case::new().check(
        "\u{feff} timestamp ,PT-101,FT-900,\"TT-001\",XS-101\r\n2026-03-02 05:00:00,1.25,7,4.5,Filter\r\n\r\n2026-03-02 05:01:00,\"1.50\",7, 4.6 ,3\r\n",
        &["PT-101: 05:00=1.25 05:01=1.5", "TT-001: 05:00=4.5 05:01=4.6", "XS-101: 05:00='Filter' 05:01=3"],
        [6, 0, 0, 0],
        &[],
    );
    assert_eq!(summary.unmapped_columns, ["FT-900"]);
    assert_eq!(summary.notes, ["The file has no column for PT-201."]);
    assert_eq!(summary.to, Some(Instant::parse("2026-03-02T05:01:00Z").unwrap()));
}

#[test]
fn semicolons_and_decimal_commas() {
    let mut case = Case::new();
    case.source.delimiter = b';';
    case.source.decimal = b',';
    case.source.time.format = TimeFormat::Strptime("%d.%m.%Y %H:%M".to_owned());
    case.check(
        "Timestamp;PT-101\r02.03.2026 05:00;1,25\r02.03.2026 05:01;1.25\r02.03.2026 05:02;-9999,0\r",
        &["PT-101: 05:00=1.25 05:02=!-9999,0"],
        [1, 1, 0, 1],
        &[(3, "PT-101", "decimal point")],
    );
}

#[test]
fn quality_as_text_and_substitutes() {
    Case::new().check(
        "Timestamp,PT-101,XS-101\n2026-03-02 05:00:00,bad,none\n2026-03-02 05:01:00,-9999.0,No Data\n2026-03-02 05:02:00,---,\n2026-03-02 05:03:00,#N/A,idle\n",
        &["PT-101: 05:00=!bad 05:01=!-9999.0 05:02=!--- 05:03=!#N/A", "XS-101: 05:00='none' 05:01=!No Data 05:03='idle'"],
        [2, 5, 1, 0],
        &[],
    );
}

#[test]
fn what_cannot_be_read_is_named_cell_by_cell() {
    let summary = Case::new().check(
        pt(&[
            "2026-03-02 05:00:00,1.2.3",
            "2026-03-02 05:01:00,inf",
            "2026-03-02 05:02:00,\"1,234.5\"",
            "2026-03-02 05:03:00,\"12,5\"",
            "2026-03-02 05:04:00,",
            "2026-03-02 05:05:00,1",
        ]),
        &["PT-101: 05:05=1"],
        [1, 0, 1, 4],
        &[
            (2, "PT-101", "not a number"),
            (3, "PT-101", "finite"),
            (4, "PT-101", "thousands"),
            (5, "PT-101", "decimal comma"),
        ],
    );
    assert_eq!(summary.rejections[0].value, "1.2.3");
}

#[test]
fn ragged_and_unfinished_rows() {
    Case::new().check(
        "Timestamp,PT-101,PT-201\n2026-03-02 05:00:00,1,2,\n2026-03-02 05:01:00,1,2,5\n2026-03-02 05:02:00,1\n2026-03-02 05:03:00\n2026-03-02 05:04:00,1,2.\n2026-03-02 05:05:00,1",
        &["PT-101: 05:00=1 05:02=1 05:04=1", "PT-201: 05:00=2 05:04=2"],
        [5, 0, 0, 7],
        &[
            (3, "", "decimal comma"),
            (4, "PT-201", "2 of 3 columns"),
            (5, "PT-101", "1 of 3 columns"),
            (7, "", "unfinished"),
        ],
    );
    // Without its line end, a last line counts if it is whole.
    Case::new().check(
        "Timestamp,PT-101\n2026-03-02 05:00:00,1",
        &["PT-101: 05:00=1"],
        [1, 0, 0, 0],
        &[],
    );
}

#[test]
fn a_stray_quote_costs_one_row() {
    Case::new().check(
        pt(&["2026-03-02 05:00:00,\"1", "2026-03-02 05:01:00,2", "2026-03-02 05:02:00,3\""]),
        &["PT-101: 05:00=1 05:01=2"],
        [2, 0, 0, 1],
        &[(4, "PT-101", "not a number")],
    );
    // A name in the header may span lines.
    Case::new().check(
        "Timestamp,PT-101,\"Flow\nm3/h\"\n2026-03-02 05:00:00,1,2\n2026-03-02 05:01:00,x,2\n",
        &["PT-101: 05:00=1"],
        [1, 0, 0, 1],
        &[(4, "PT-101", "not a number")],
    );
}

#[test]
fn repeated_and_unordered_rows_are_handed_over_as_they_stand() {
    Case::new().check(
        pt(&["2026-03-02 05:01:00,2", "2026-03-02 05:00:00,1", "2026-03-02 05:01:00,2.5"]),
        &["PT-101: 05:01=2 05:00=1 05:01=2.5"],
        [3, 0, 0, 0],
        &[],
    );
}

#[test]
fn times_that_cannot_be() {
    Case::new().check(
        "Timestamp,PT-101,PT-201\n2026-03-02 06:20:00,1,1\n2026-03-02 06:20:01,1,1\n1970-01-01 00:00:00,1,\n02/03/2026 05:00,1,1\n,1,1\n",
        &["PT-101: 06:20=1", "PT-201: 06:20=1"],
        [2, 0, 0, 8],
        &[
            (3, "Timestamp", "in the future"),
            (4, "Timestamp", "before 1990"),
            (5, "Timestamp", "does not fit %Y"),
            (6, "Timestamp", "does not fit"),
        ],
    );
}

#[test]
fn the_skipped_hour() {
    let summary = Case::new().received("2026-03-29T06:00:00Z").check(
        pt(&["2026-03-29 00:59:00,1", "2026-03-29 01:30:00,2", "2026-03-29 02:00:00,3"]),
        &["PT-101: 00:59=1 01:00=3"],
        [2, 0, 0, 1],
        &[(3, "Timestamp", "skipped_hour")],
    );
    assert_eq!(summary.skipped_hour_rows, 1);
}

#[test]
fn the_repeated_hour() {
    // The clock in London shows 01:00 to 01:59 twice on 25 October 2026, from 00:00Z and 01:00Z.
    let both = pt(&[
        "2026-10-25 00:59:00,0",
        "2026-10-25 01:00:00,1",
        "2026-10-25 01:59:00,2",
        "2026-10-25 01:00:00,3",
        "2026-10-25 01:59:00,4",
        "2026-10-25 02:00:00,5",
    ]);
    let all = "PT-101: 23:59=0 00:00=1 00:59=2 01:00=3 01:59=4 02:00=5";
    let later = || Case::new().received("2026-11-05T00:00:00Z");
    let summary = later().check(&both, &[all], [6, 0, 0, 0], &[]);
    assert_eq!(summary.repeated_hour_rows, 4);

    let lone = pt(&["2026-10-25 01:00:00,1", "2026-10-25 01:59:00,2"]);
    let case = |at: &str| Case::new().received(at);
    case("2026-10-25T01:03:00Z").check(&lone, &["PT-101: 00:00=1 00:59=2"], [2, 0, 0, 0], &[]);
    case("2026-10-25T02:03:00Z").check(&lone, &["PT-101: 01:00=1 01:59=2"], [2, 0, 0, 0], &[]);

    let mut old = later();
    old.newest_known = Some(Instant::parse("2026-10-25T00:59:00Z").unwrap());
    old.check(&lone, &["PT-101: 01:00=1 01:59=2"], [2, 0, 0, 0], &[]);
    old.newest_known = None;
    old.check(
        &lone,
        &["PT-101: "],
        [0, 0, 0, 2],
        &[(2, "Timestamp", "repeated_hour"), (3, "Timestamp", "repeated_hour")],
    );
    // What the file itself holds goes before what is stored.
    old.newest_known = Some(Instant::parse("2026-10-25T00:59:00Z").unwrap());
    let continued = pt(&["2026-10-25 00:59:00,0", "2026-10-25 01:00:00,1"]);
    old.check(&continued, &["PT-101: 23:59=0 00:00=1"], [2, 0, 0, 0], &[]);

    for (rule, expected) in [
        (RepeatedHour::Earlier, "PT-101: 23:59=0 00:00=1 00:59=2 00:00=3 00:59=4 02:00=5"),
        (RepeatedHour::Later, "PT-101: 23:59=0 01:00=1 01:59=2 01:00=3 01:59=4 02:00=5"),
    ] {
        let mut case = later();
        case.source.time.repeated_hour = rule;
        case.check(&both, &[expected], [6, 0, 0, 0], &[]);
    }
    let mut strict = later();
    strict.source.time.repeated_hour = RepeatedHour::Reject;
    let lines = [3, 4, 5, 6].map(|line| (line, "Timestamp", "repeated_hour"));
    strict.check(&both, &["PT-101: 23:59=0 02:00=5"], [2, 0, 0, 4], &lines);
}

#[test]
fn unused_columns_may_share_a_name() {
    Case::new().check(
        "Timestamp,PT-101,Quality,PT-201,Quality,\n2026-03-02 05:00:00,1,192,2,192,\n",
        &["PT-101: 05:00=1", "PT-201: 05:00=2"],
        [2, 0, 0, 0],
        &[],
    );
}

#[test]
fn rejections_and_words_are_bounded() {
    let rows: Vec<String> = (0..3_000).map(|i| format!("2026-03-02 05:00:00,x{i},w{i}")).collect();
    let text = format!("Timestamp,PT-101,XS-101\n{}\n", rows.join("\n"));
    let (batch, summary) = Case::new().parse(&[text.as_bytes()]).unwrap();
    assert_eq!(summary.rejections.len(), REJECTIONS_LISTED_MAX);
    assert_eq!(summary.rejections_total, 5_000);
    assert_eq!((summary.good, summary.rejected), (1_000, 5_000));
    assert_eq!(batch.columns[1].words.len(), 1_000);
}

#[test]
fn a_batch_can_be_taken_away_at_any_time() {
    let text = "Timestamp,PT-101,XS-101\n2026-03-02 05:00:00,1,A\n2026-03-02 05:01:00,2,A\n";
    let case = Case::new();
    let mut parser = Parser::new(&plant(), &case.source, case.received, None);
    let (mut batch, mut taken) = (Batch::default(), Vec::new());
    let pad = format!("{text}{}", " \n".repeat(4_096));
    for byte in pad.as_bytes() {
        parser.feed(&[*byte], &mut batch).unwrap();
        if batch.cells() > 0 {
            taken.push(batch.take());
            assert_eq!(batch.cells(), 0);
        }
    }
    parser.finish(&mut batch).unwrap();
    assert_eq!(taken.iter().map(Batch::cells).sum::<usize>(), 4);
    for part in taken {
        assert_eq!(part.tags.len(), 2);
        assert_eq!(part.columns[1].words.len(), usize::from(!part.columns[1].is_empty()));
    }
}
