//! Bodies that are not taken at all.

use super::*;

#[test]
fn what_is_no_export_is_refused_with_the_remedy() {
    let case = Case::new();
    case.check_refused("", &["empty"]);
    case.check_refused("\r\n \r\n", &["empty"]);
    case.check_refused(b"\xff\xfeT\0i\0", &["UTF-16 is not read by this version"]);
    case.check_refused("<html><body>Log in</body></html>", &["HTML"]);
    case.check_refused("Timestamp,PT-101\n", &["header without rows"]);
    case.check_refused("Timestamp,PT-101", &["one line", "--data-binary"]);
    case.check_refused("Time,PT-101\n1,2\n", &["`Timestamp`", "Time, PT-101"]);
    case.check_refused(
        "Timestamp;PT-101\n2026-03-02 05:00:00;1\n",
        &["a semicolon", "a comma", "delimiter = \";\""],
    );
    case.check_refused("Timestamp\tPT-101\n", &["a tab", "delimiter = \"\\t\""]);
    case.check_refused(
        "Timestamp,pt-101,X\n2026-03-02 05:00:00,1,2\n",
        &["No column is a tag", "pt-101, X", "capitals"],
    );
    case.check_refused("Timestamp,PT-101,X,PT-101\n", &["Columns 2 and 4", "`PT-101`"]);
    case.check_refused("Timestamp,PT-101,TIMESTAMP\n", &["Columns 1 and 3"]);
    case.check_refused(
        pt(&["02/03/2026,1", "03/03/2026,1"]),
        &["None of the 2 rows", "Line 2", "02/03/2026"],
    );
    case.check_refused("Timestamp,PT-101,\"X\n2026-03-02 05:00:00,1\n", &["quote"]);
    case.check_refused(
        "Timestamp,PT-101,PT-2012026-03-02 05:00:00,1,22026-03-02 05:01:00,1,2",
        &["line ends were lost", "--data-binary instead of -d"],
    );
    case.check_refused(
        format!("Timestamp,{}\n", "X,".repeat(100_000)),
        &["100002 columns", "4096"],
    );
    case.check_refused(format!("Timestamp,\"PT-101{}", "\n".repeat(3_000_000)), &["quote"]);
    case.check_refused("7".repeat(5_000_000), &["longer than", "--data-binary"]);
    let mut long = Case::new();
    long.source.layout = Layout::Long {
        tag_column: "Tag".to_owned(),
        value_column: "Value".to_owned(),
        unit_column: None,
        quality_column: None,
        good: Vec::new(),
    };
    long.check_refused("Timestamp,Tag,Value\n", &["long"]);
}
