//! What the reader of a plant file says to what is wrong in it.

mod limits;

use std::path::Path;

use super::*;
use crate::base::HOUR_US;

/// The least that is a plant.
const LEAST: &str = r#"
[plant]
id = "p"
time_zone = "Europe/London"
[[source]]
id = "scada"
time = { column = "Time" }
[[train]]
id = "t1"
membrane_area = "100 m2"
filtration = "dead-end"
[train.tags]
transmembrane_pressure = { tag = "PDT-1", unit = "bar" }
permeate_flow = { tag = "FT-1", unit = "m3/h" }
state = { tag = "XS-1", filtration = ["1"], backwash = "2" }
"#;

fn mistakes(text: &str) -> Vec<Mistake> {
    match read(text, Path::new("")) {
        Ok(_) => Vec::new(),
        Err(mistakes) => mistakes,
    }
}

fn said(text: &str) -> String {
    mistakes(text).iter().map(|m| format!("{m}\n")).collect()
}

/// The least plant with one text replaced must give exactly one mistake, which says `wanted`.
fn check(from: &str, to: &str, wanted: &str) {
    assert!(LEAST.contains(from), "{from}");
    let text = LEAST.replacen(from, to, 1);
    let found = mistakes(&text);
    let all = said(&text);
    assert_eq!(found.len(), 1, "{to}:\n{all}");
    assert!(all.contains(wanted), "{to}: {all}");
}

#[test]
fn the_least_plant_is_taken_with_its_defaults_and_warnings() {
    let reading = read(LEAST, Path::new("dir")).unwrap();
    let plant = &reading.plant;
    assert_eq!(plant.name, "p");
    assert_eq!(plant.service.listen, "127.0.0.1:8420");
    assert_eq!(plant.service.database, Path::new("dir/washbell.db"));
    assert_eq!(plant.reference_temperature_degc, 20.0);
    assert_eq!(plant.retention_us, None);
    let source = &plant.sources[0];
    assert_eq!((source.every_us * 60, source.expected_every_us), (HOUR_US, HOUR_US));
    assert_eq!((source.delimiter, source.decimal), (b',', b'.'));
    assert_eq!(source.time.format, TimeFormat::Iso);
    assert_eq!(source.time.zone, plant.zone);
    let train = &plant.trains[0];
    assert_eq!(train.tmp_floor_pa, 3_000.0);
    assert_eq!(train.tmp_accuracy_pa, 1_000.0);
    assert_eq!((train.clean_duration_us, train.clean_notice_us), (8 * HOUR_US, 24 * HOUR_US));
    assert_eq!(train.limits.tmp_pa, HoldLimit { advisory: f64::INFINITY, clean: f64::INFINITY });
    assert_eq!(train.limits.permeability_loss, HoldLimit { advisory: 0.20, clean: 0.30 });
    assert_eq!(train.limits.deadband, 0.02);
    assert_eq!(train.limits.on_delay_us, 6 * HOUR_US);
    assert_eq!(train.limits.planning_horizon_us, 14 * 24 * HOUR_US);
    let warnings: String = reading.warnings.iter().map(|w| format!("{w}\n")).collect();
    for wanted in [
        "line 12, column 1: no tag is the train's temperature",
        "names the class of chemical only",
        "there is no loss until a clean is judged restored",
        "no TMP limit to clean by",
        "no approved integrity values",
    ] {
        assert!(warnings.contains(wanted), "{wanted}:\n{warnings}");
    }
    assert_eq!(reading.warnings.len(), 5, "{warnings}");
}

#[test]
fn keys_and_types() {
    check(
        "membrane_area =",
        "membrane_aera =",
        "line 10, column 1: `membrane_aera` is not a key of `train`; did you mean `membrane_area`?",
    );
    check(
        "membrane_area = \"100 m2\"",
        "",
        "line 8, column 1: `train` has no `membrane_area`; add a line like membrane_area = \"3200 m2\"",
    );
    check(
        "id = \"p\"",
        "id = \"p\"\ntime_zon = 1",
        "line 4, column 1: `time_zon` is not a key of `plant`; did you mean `time_zone`?",
    );
    check(
        "[plant]",
        "[outlok]\n[plant]",
        "`outlok` is not a key of the plant file; did you mean `outlook`?",
    );
    check(
        "\"100 m2\"",
        "100",
        "line 10, column 17: `train.membrane_area` is a number, where a table belongs",
    );
    check("\"p\"", "7", "`plant.id` is a number, where a text in quotes belongs");
    check("\"p\"", "\"\"", "`plant.id` is empty");
    check("\"p\"", "\"a/b\"", "`a/b` cannot be an id");
    check("Europe/London", "Europe/Londn", "did you mean `Europe/London`?");
    check("dead-end", "dead-ends", "did you mean \"dead-end\"?");
    check("[[source]]", "[source]", "write [[source]] in double brackets");
    check("permeate_flow", "permeate_flwo", "did you mean `permeate_flow`?");
}

#[test]
fn units_and_ranges() {
    check("100 m2", "100 m3/h", "is a flow, where an area belongs; write an area like `3200 m2`");
    check("100 m2", "-3 m2", "is not above zero");
    check("\"m3/h\"", "\"bar\"", "`bar` is the unit of a pressure, where that of a flow belongs");
    check("unit = \"bar\"", "unit = \"barg\"", "write `bar`; that a tag is gauge or absolute");
    check(
        "id = \"t1\"",
        "id = \"t1\"\ntmp_floor = \"3 bar\"",
        "`train.tmp_floor` is out of range; it is from 0 to 1 bar",
    );
    check(
        "id = \"t1\"",
        "id = \"t1\"\nclean_duration = \"8 bar\"",
        "is a pressure, where a time belongs",
    );
    check(
        "id = \"p\"",
        "id = \"p\"\nreference_temperature = \"80 degC\"",
        "it is from 0 to 60 degC",
    );
    check("[plant]", "[limits]\npermeability_loss_clean = \"120 %\"\n[plant]", "below 100 %");
    check(
        "[plant]",
        "[integrity]\nalcr = 0.2\nvcf = 1.0\nhold_up_volume = \"900 L\"\ndesign_flow = \"245 m3/h\"\n[plant]",
        "at least 1",
    );
    check(
        "[plant]",
        "[outlook]\ntemperature = [{ month = 13, value = \"4 degC\" }]\n[plant]",
        "it is from 1 to 12",
    );
    check(
        "id = \"p\"",
        "id = \"p\"\ntemperature_law = \"warmish\"",
        "`warmish` is no temperature law",
    );
    check("[plant]", "[service]\nlisten = \"8420\"\n[plant]", "write it like 127.0.0.1:8420");
}

#[test]
fn sources_and_times() {
    check(
        "[[train]]",
        "[[source]]\nid = \"scada\"\ntime = { column = \"T\" }\n[[train]]",
        "line 9, column 6: there is a source `scada` already",
    );
    check(
        "{ column = \"Time\" }",
        "{ column = \"Time\", format = \"%Y-%m-%d\" }",
        "holds no time of day",
    );
    check(
        "{ column = \"Time\" }",
        "{ column = \"Time\", format = \"%H:%M\" }",
        "holds no whole date",
    );
    check(
        "{ column = \"Time\" }",
        "{ column = \"Time\", format = \"%Y-%m-%d %H:%M %K\" }",
        "`%K` is not a directive",
    );
    check(
        "{ column = \"Time\" }",
        "{ column = \"Time\", format = \"ios\" }",
        "not a form of time stamp",
    );
    check(
        "id = \"scada\"",
        "id = \"scada\"\ndecimal = \",\"",
        "cannot be marked by the same character",
    );
    check(
        "id = \"scada\"",
        "id = \"scada\"\nevery = \"2 h\"",
        "rows are further apart than exports",
    );
    check(
        "id = \"scada\"",
        "id = \"scada\"\nmax_hold = \"15 min\"",
        "says nothing without between = \"hold\"",
    );
    check(
        "id = \"p\"",
        "id = \"p\"\nshifts = [\"06:00\", \"25:00\"]",
        "`25:00` is not a time of day",
    );
    check("id = \"p\"", "id = \"p\"\nshifts = [\"14:00\", \"06:00\"]", "the shifts do not ascend");
    check("id = \"p\"", "id = \"p\"\nshifts = []", "at least one shift");
    check(
        "\"100 m2\"",
        "[{ from = \"2026-02-01\", area = \"1 m2\" }, { from = \"2026-01-01\", area = \"2 m2\" }]",
        "the dates of `train.membrane_area` do not ascend",
    );
    check("\"100 m2\"", "[{ from = \"2026-02-30\", area = \"1 m2\" }]", "means its local midnight");
    let tab =
        LEAST.replace("id = \"scada\"", "id = \"scada\"\ndelimiter = \"\\t\"\ndecimal = \",\"");
    assert_eq!(read(&tab, Path::new("")).unwrap().plant.sources[0].delimiter, b'\t');
}

#[test]
fn tags_refer_to_what_there_is() {
    check(
        "tag = \"FT-1\",",
        "tag = \"FT-1\", source = \"scda\",",
        "there is no source `scda`; did you mean `scada`?",
    );
    check(
        "tag = \"FT-1\",",
        "tag = \"FT-1\", serves = [\"t1\", \"t2\"],",
        "there is no train `t2` to serve",
    );
    check("tag = \"FT-1\",", "tag = \"FT-1\", serves = [],", "the meter of `t1` does not serve it");
    check(
        "backwash = \"2\"",
        "backwash = [\"2\", \"1.0\"]",
        "state `1.0` means filtration already",
    );
    check("filtration = [\"1\"], ", "", "no code of the state tag means filtration");
    check("transmembrane_pressure =", "feed_pressure =", "no tag is the train's permeate_pressure");
    check(
        "transmembrane_pressure = { tag = \"PDT-1\", unit = \"bar\" }",
        "feed_pressure = { tag = \"P\", unit = \"bar\" }\npermeate_pressure = { tag = \"P\", unit = \"bar\" }",
        "`P` is feed_pressure and permeate_pressure of one train",
    );
    check(
        "state = {",
        "temperature = { tag = \"PDT-1\", unit = \"degC\" }\nstate = {",
        "`PDT-1` is in bar for `t1` and in °C here",
    );
    let second = LEAST.replace("PDT-1", "PDT-2");
    let (_, train) = second.split_once("[[train]]").unwrap();
    let twice = format!("{LEAST}[[train]]{train}");
    assert!(
        said(&twice).starts_with("line 17, column 6: there is a train `t1` already"),
        "{}",
        said(&twice)
    );
    let tags = said(LEAST.split_once("[train.tags]").unwrap().0);
    assert!(tags.starts_with("line 8, column 1: `train` has no `tags`"), "{tags}");
}

#[test]
fn a_tag_may_be_a_text_alone_and_its_unit_is_then_said() {
    let text = LEAST.replace("{ tag = \"FT-1\", unit = \"m3/h\" }", "\"FT-1\"");
    let reading = read(&text, Path::new("")).unwrap();
    let flow = reading.plant.trains[0].signals_of(Role::PermeateFlow).next().unwrap();
    assert_eq!(flow.unit.map(|u| u.ucum), Some("m3/h"));
    let warned = reading.warnings.iter().any(|w| w.message.contains("taken in m³/h"));
    assert!(warned, "{:?}", reading.warnings);
}

#[test]
fn what_this_version_does_not_work_is_refused_by_name() {
    check(
        "\"dead-end\"",
        "\"cross-flow\"\nloop = \"feed-and-bleed\"",
        "cross-flow trains are not worked by this version",
    );
    check(
        "id = \"scada\"",
        "id = \"scada\"\nlayout = \"long\"\ntag_column = \"T\"\nvalue_column = \"V\"",
        "long layout",
    );
    check(
        "id = \"scada\"",
        "id = \"scada\"\nvalues = \"mean\"\ninterval = \"15 min\"\nstamp = \"end\"",
        "exports of means",
    );
    check(
        "id = \"scada\"",
        "id = \"scada\"\nbetween = \"hold\"\nmax_hold = \"15 min\"",
        "exports of changes only",
    );
    check(
        "{ column = \"Time\" }",
        "{ column = \"Time\", like = \"31/12/2026 23:59:00\" }",
        "a format by example",
    );
    check(
        "filtration = \"dead-end\"",
        "filtration = \"dead-end\"\ndrive = \"submerged\"",
        "submerged membranes are not worked",
    );
    check(
        "state = { tag = \"XS-1\", filtration = [\"1\"], backwash = \"2\" }",
        "",
        "no tag is the train's state, and this version does not infer it",
    );
}

#[test]
fn all_mistakes_are_said_at_once_in_the_order_of_the_file_with_their_places() {
    let text = "[plant]\n\
        id = \"p\"\n\
        time_zone = \"Mars/Olympus\"\n\
        colour = \"blue\"\n\
        [[source]]\n\
        id = \"scada\"\n\
        time = { column = \"Zeit é\", format = \"%Q\", zone = \"x\" }\n\
        [[train]]\n\
        id = \"t 1\"\n\
        membrane_area = \"3200\"\n\
        [train.tags]\n\
        permeate_flow = { tag = \"FT-1\", unit = \"m3/hh\" }\n";
    let places: Vec<_> =
        mistakes(text).iter().map(|m| (m.line, m.column, m.message.clone())).collect();
    let heads: Vec<_> = places.iter().map(|(l, c, m)| (*l, *c, m.as_str())).collect();
    assert_eq!(
        heads.iter().map(|(l, c, _)| (*l, *c)).collect::<Vec<_>>(),
        [
            (3, 13),
            (4, 1),
            (7, 38),
            (7, 44),
            (8, 1),
            (9, 6),
            (10, 17),
            (11, 1),
            (11, 1),
            (11, 1),
            (12, 40)
        ],
        "{heads:#?}"
    );
    assert!(heads.iter().any(|(_, _, m)| m.contains("`train` has no `filtration`")));
    assert!(heads.iter().any(|(_, _, m)| m.contains("no tag is the train's state")));
}

#[test]
fn a_fault_of_syntax_hides_no_other_mistake_and_makes_none() {
    let text = LEAST.replace("id = \"t1\"", "id = \"t1").replace("100 m2", "100 bar");
    let found = mistakes(&text);
    assert_eq!(found[0].line, 9, "{}", said(&text));
    assert!(said(&text).contains("`100 bar` is a pressure"), "{}", said(&text));
    assert!(!said(&text).contains("has no"), "{}", said(&text));
}
