use serde_json::{Value, json};

use super::*;
use crate::base::HOUR_US;

fn read(body: Value) -> (Step, Vec<ProblemError>) {
    let body: StepBody = serde_json::from_value(body).unwrap();
    let mut faults = Faults::default();
    let step = step(&mut faults, "/steps/0", &body);
    (step, faults.0)
}

#[test]
fn quantities_are_read_with_their_units() {
    let (step, faults) = read(json!({
        "class": "alkali", "chemical": "sodium hydroxide", "concentration": "0.1 %", "ph": 11.5,
        "temperature": "95 °F", "duration": "PT4H", "volume": "12 m3"
    }));
    assert_eq!(faults, []);
    assert_eq!((step.class, step.ph), (StepClass::Alkali, Some(11.5)));
    assert_eq!(step.concentration.as_deref(), Some("0.1 %"));
    assert!((step.temperature_degc.unwrap() - 35.0).abs() < 1e-9);
    assert_eq!((step.duration_us, step.volume_m3), (Some(4 * HOUR_US), Some(12.0)));
    let (step, faults) = read(json!({"class": "acid", "duration": "30 min", "ph": "2.5"}));
    assert_eq!((step.duration_us, step.ph, faults.len()), (Some(HOUR_US / 2), Some(2.5), 0));
}

#[test]
fn a_class_left_out_is_that_of_the_name() {
    for (body, class) in [
        (json!({"chemical": "citric acid"}), StepClass::Acid),
        (json!({"chemical": "NaOCl 12 %"}), StepClass::Hypochlorite),
        (json!({"chemical": "blue drum"}), StepClass::Other),
        (json!({"verified": {"ph": 7.1}}), StepClass::Rinse),
        (json!({"chemical": "sodium hypochlorite", "class": "acid"}), StepClass::Acid),
        (json!({}), StepClass::Other),
    ] {
        assert_eq!(read(body.clone()).0.class, class, "{body}");
    }
}

#[test]
fn readings_of_a_rinse_are_kept_apart_from_what_passes() {
    let of = |verified: Value| read(json!({"class": "rinse", "verified": verified}));
    let (step, faults) = of(json!({"ph": 7.2, "free_chlorine": 0.1, "by": "shift A"}));
    let v = step.verified.unwrap();
    assert_eq!((v.ph, v.free_chlorine_mg_l, v.ph_range), (Some(7.2), Some(0.1), None));
    assert_eq!((v.by.as_deref(), faults.len()), (Some("shift A"), 0));
    for planned in [
        json!({"ph": "6 .. 9", "free_chlorine_max": "0.5 mg/L"}),
        json!({"ph_range": [6.0, 9.0], "free_chlorine_max": 0.5}),
    ] {
        let v = of(planned).0.verified.unwrap();
        assert_eq!((v.ph_range, v.free_chlorine_max_mg_l), (Some((6.0, 9.0)), Some(0.5)));
        assert_eq!((v.ph, v.free_chlorine_mg_l), (None, None));
    }
}

#[test]
fn what_cannot_be_read_is_named_by_its_place() {
    for (body, pointer) in [
        (json!({"concentration": "strong"}), "/steps/0/concentration"),
        (json!({"concentration": 5}), "/steps/0/concentration"),
        (json!({"temperature": 35}), "/steps/0/temperature"),
        (json!({"temperature": "35 bar"}), "/steps/0/temperature"),
        (json!({"temperature": "3500 degC"}), "/steps/0/temperature"),
        (json!({"duration": "a while"}), "/steps/0/duration"),
        (json!({"duration": "P1M"}), "/steps/0/duration"),
        (json!({"volume": "-3 m3"}), "/steps/0/volume"),
        (json!({"ph": 15}), "/steps/0/ph"),
        (json!({"verified": {"ph": "neutral"}}), "/steps/0/verified/ph"),
        (json!({"verified": {"ph_range": [9.0, 6.0]}}), "/steps/0/verified/ph_range"),
        (json!({"verified": {"free_chlorine": "none"}}), "/steps/0/verified/free_chlorine"),
    ] {
        let (_, faults) = read(body.clone());
        assert_eq!(faults.len(), 1, "{body}: {faults:?}");
        assert_eq!(faults[0].pointer.as_deref(), Some(pointer));
        assert!(!faults[0].detail.is_empty());
    }
}
