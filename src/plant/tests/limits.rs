//! Limits and procedures that do not fit together.

use super::*;

#[test]
fn limits_stand_in_their_order() {
    let top = |lines: &str| format!("[limits]\n{lines}\n[plant]");
    check(
        "[plant]",
        &top("permeability_loss_advisory = \"40 %\""),
        "line 3, column 30: the advisory loss of 40 % lies beyond the clean limit of 30 %",
    );
    check(
        "[plant]",
        &top("tmp_advisory = \"1.3 bar\"\ntmp_clean = \"1.2 bar\""),
        "the advisory TMP of 1.3 bar lies beyond the clean limit of 1.2 bar",
    );
    check("[plant]", &top("deadband = \"25 %\""), "would never let it go");
    check(
        "[plant]",
        &top("tmp_clean = \"0.02 bar\""),
        "the TMP floor of 0.03 bar lies above a TMP limit",
    );
    // Each alone is right; the train's own limit falls under the plant's advisory one.
    let own = LEAST.replace("[plant]", &top("tmp_advisory = \"0.9 bar\"\ntmp_clean = \"1.2 bar\""))
        + "[train.limits]\ntmp_clean = \"0.8 bar\"\n";
    assert!(
        said(&own).contains("line 20, column 13: the advisory TMP of 0.9 bar"),
        "{}",
        said(&own)
    );
}

#[test]
fn no_procedure_lets_hypochlorite_meet_acid() {
    let rinse =
        "{ class = \"rinse\", verified = { ph = \"6 .. 9\", free_chlorine_max = \"0.5 mg/L\" } }";
    let with = |steps: &str| {
        format!(
            "{LEAST}[train.membrane_limits]\nph = \"2 .. 11\"\ntemperature = \"40 degC\"\nfree_chlorine = \"500 mg/L\"\n[[procedure]]\nkind = \"clean_in_place\"\nsteps = [{steps}, {rinse}]\n"
        )
    };
    let hypo = "{ class = \"hypochlorite\", concentration = \"0.04 %\", ph = 10.8 }";
    let acid = "{ class = \"acid\", ph = 2.3, temperature = \"35 degC\" }";
    assert_eq!(said(&with(&format!("{hypo}, {rinse}, {acid}"))), "");
    for (steps, wanted) in [
        (format!("{hypo}, {acid}"), "acid follows hypochlorite with no rinse between them"),
        (format!("{hypo}, {{ class = \"rinse\" }}, {acid}"), "acid follows hypochlorite"),
        (format!("{acid}, {{ class = \"other\" }}"), "other follows acid"),
        (acid.replace("acid", "acidic"), "did you mean \"acid\"?"),
        (
            "{ class = \"alkali\", chemical = \"sodium hypochlorite\" }".to_owned(),
            "`sodium hypochlorite` is of class hypochlorite, not alkali",
        ),
        (
            "{ class = \"acid\", chemical = \"citric acid and bleach\" }".to_owned(),
            "mixes hypochlorite and acid",
        ),
        (
            "{ class = \"acid\", concentration = \"1 bar\" }".to_owned(),
            "write a strength like `0.1 %`",
        ),
        (
            "{ class = \"acid\", verified = { ph = \"6 .. 9\" } }".to_owned(),
            "says nothing without class = \"rinse\"",
        ),
        (
            "{ class = \"rinse\", verified = { ph = \"9 .. 6\" } }".to_owned(),
            "is not a range of pH",
        ),
    ] {
        let found = said(&with(&steps));
        assert!(found.contains(wanted) && found.lines().count() == 1, "{steps}:\n{found}");
    }
}

#[test]
fn a_procedure_beyond_the_membrane_is_warned_of_and_held_to_its_limits() {
    let file = format!(
        "{LEAST}[train.membrane_limits]\nph = \"2 .. 11\"\ntemperature = \"40 degC\"\nfree_chlorine = \"500 mg/L\"\n[[procedure]]\nkind = \"clean_in_place\"\nsteps = [{{ class = \"hypochlorite\", concentration = \"600 mg/L\", ph = 11.5, temperature = \"45 degC\" }}]\n"
    );
    let reading = read(&file, std::path::Path::new("")).unwrap();
    let warned: Vec<&str> = reading.warnings.iter().map(|w| w.message.as_str()).collect();
    for wanted in [
        "pH 11.5 is outside the membrane's 2 to 11 of t1",
        "600 mg/L free chlorine is above the membrane's 500 mg/L of t1",
        "45 °C is above the membrane's 40 °C of t1",
    ] {
        assert!(warned.contains(&wanted), "{warned:?}");
    }
    let train = &reading.plant.trains[0];
    let (step, held) =
        super::super::within(&train.procedures[0].steps[0], &train.membrane_limits.unwrap());
    assert!(held);
    assert_eq!((step.ph, step.concentration.as_deref()), (Some(11.0), Some("500 mg/L")));
    assert_eq!(step.temperature_degc.map(f64::round), Some(40.0));
}
