use serde_json::json;

use super::super::fixture::{self, LMH_BAR, at};
use super::super::units::UnitSystem;
use super::*;
use crate::analysis::{Baseline, BaselineKind, Verdict};
use crate::base::Span;
use crate::orders::{
    ActKind, Actuals, Annotation, ByHand, CancelledWhy, External, IntegrityTest, Note, OrderState,
    Role, SignOff, Task, by_hand,
};
use crate::plant::{Plant, Step, StepClass, VerifiedRinse};

fn chemical(class: StepClass) -> Step {
    Step {
        class,
        chemical: None,
        concentration: None,
        ph: None,
        temperature_degc: None,
        duration_us: None,
        volume_m3: None,
        verified: None,
    }
}

/// Two steps: 12 m3 of 0.1 % and a rinse.
fn steps() -> Vec<Step> {
    let check = VerifiedRinse {
        ph_range: Some((6.0, 9.0)),
        free_chlorine_max_mg_l: Some(0.5),
        ph: None,
        free_chlorine_mg_l: None,
        by: None,
    };
    vec![
        Step {
            chemical: Some("sodium hydroxide".to_owned()),
            concentration: Some("0.1 %".to_owned()),
            volume_m3: Some(12.0),
            ..chemical(StepClass::Alkali)
        },
        Step { verified: Some(check), ..chemical(StepClass::Rinse) },
    ]
}

fn order(plant: &Plant) -> WorkOrder {
    let asked = ByHand {
        task: Task::CleanInPlace,
        by: "shift A".to_owned(),
        reason: Some("before the cold spell.".to_owned()),
        steps: Some(steps()),
        needed_by: Some(at("2026-03-12T12:00")),
        window: Some(Span::new(at("2026-03-10T07:00"), at("2026-03-10T15:00"))),
    };
    by_hand(&plant.trains[0], asked, None, None, 41, at("2026-03-08T07:00")).unwrap()
}

fn view(plant: &Plant, order: &WorkOrder, system: UnitSystem) -> serde_json::Value {
    let site = Site::new(plant, &plant.trains[0]);
    let view = work_order_view(&plant.zone, &site, &Units::new(system), order);
    serde_json::to_value(view).unwrap()
}

#[test]
fn a_draft_is_what_a_crew_can_work_from() {
    let plant = fixture::plant();
    let mut v = view(&plant, &order(&plant), UnitSystem::Si);
    let mut list = |name: &str| {
        let taken = v[name].take();
        let words: Vec<String> = serde_json::from_value(taken).unwrap();
        assert!(words.iter().all(|w| w.ends_with('.')), "{name}: {words:?}");
        words
    };
    assert_eq!(list("isolation").len(), 5);
    assert_eq!(list("preconditions").len(), 7);
    assert!(list("hazards").iter().any(|h| h.contains("burn skin and eyes")));
    assert!(list("permits").iter().any(|p| p.contains("Lock-out")));
    assert!(list("ppe").iter().any(|p| p.contains("eye wash")));
    assert!(list("cautions").iter().any(|c| c.contains("chlorine gas")));
    assert!(list("acceptance").iter().any(|c| c.contains("integrity test")));
    assert_eq!(
        v,
        json!({
            "number": "WO 41", "train": "uf-1", "state": "draft", "asset": "MT-0101",
            "location": "UF train 1", "kind": "clean_in_place",
            "task": "Clean the train in place. shift A asks for it: before the cold spell. Needed by \
                     Thursday 12 March 12:00: start by Wednesday 11 March 04:00.",
            "requested_by": "shift A", "request": "before the cold spell.",
            "raised": "2026-03-08T07:00:00+00:00", "evidence": [],
            "needed_by": "2026-03-12T12:00:00+00:00", "start_by": "2026-03-11T04:00:00+00:00",
            "window": {"from": "2026-03-10T07:00:00+00:00", "to": "2026-03-10T15:00:00+00:00"},
            "hours_out": 8.0,
            "steps": [
                {"class": "alkali", "chemical": "sodium hydroxide", "concentration": "0.1 %",
                 "volume": "12 m³", "active": "12 kg"},
                {"class": "rinse",
                 "verified": {"ph_range": [6.0, 9.0], "free_chlorine_max": "0.5 mg/L"},
                 "check": "Rinse until pH reads 6 to 9 and free chlorine at most 0.5 mg/L; write \
                           down what was read and who read it."}
            ],
            "isolation": null, "preconditions": null, "hazards": null, "permits": null,
            "ppe": null, "cautions": null, "procedure_revision": null, "acceptance": null,
            "started": null, "actuals": null, "result": null, "integrity_test": null,
            "sign_offs": [], "annotations": [], "rejected_why": null, "cancelled": null,
            "recommendation": null, "cleaning": null, "external": null,
            "actions": ["approve", "reject", "cancel"]
        })
    );
    assert_eq!(view(&plant, &order(&plant), UnitSystem::Us)["steps"][0]["active"], "26.5 lb");
}

#[test]
fn a_done_order_shows_what_was_done_and_what_it_was_worth() {
    let plant = fixture::plant();
    let site = Site::new(&plant, &plant.trains[0]);
    let mut order = order(&plant);
    order.state = OrderState::Done;
    order.actuals = Some(Actuals {
        start: at("2026-03-10T07:10"),
        end: at("2026-03-10T14:50"),
        steps: vec![chemical(StepClass::Alkali)],
        waste_m3: Some(40.0),
        staff_hours: Some(12.5),
        notes: None,
    });
    order.outcome = Some(Outcome {
        verdict: Verdict::PartlyRestored,
        known: at("2026-03-12T00:00"),
        restored_share: Some(0.935),
        regained_share: Some(0.895),
        like_flux: Some(true),
        before: None,
        after: None,
        best: Some(Baseline {
            kind: BaselineKind::BestAfterClean,
            resistance_1_m: site.resistance_1_m(230.0 * LMH_BAR),
            at: None,
        }),
    });
    order.sign_offs.push(SignOff {
        role: Role::Operator,
        act: ActKind::Complete,
        by: "shift B".to_owned(),
        at: at("2026-03-10T15:00"),
        note: None,
    });
    let span = Span::new(at("2026-03-10T07:12"), at("2026-03-10T14:51"));
    order
        .annotations
        .push(Annotation { at: at("2026-03-10T15:00"), note: Note::SeenCleaned(span) });
    order.integrity_test =
        Some(IntegrityTest { passed: true, at: at("2026-03-10T15:30"), by: "shift B".to_owned() });
    order.external =
        Some(External { system: "maintenance".to_owned(), number: "77".to_owned(), url: None });
    let v = view(&plant, &order, UnitSystem::Si);
    assert_eq!(
        v["actuals"],
        json!({"start": "2026-03-10T07:10:00+00:00", "end": "2026-03-10T14:50:00+00:00",
               "steps": [{"class": "alkali"}], "waste": "40 m³", "staff_hours": 12.5,
               "notes": null})
    );
    let result = &v["result"];
    assert_eq!(result["verdict"], "partly_restored");
    assert_eq!(result["known"], "2026-03-12T00:00:00+00:00");
    assert_eq!(
        result["detail"],
        "Partly restored: 85 to 95 % of the best permeability after a clean. It reached 93.5 %, \
         and took back 89.5 % of the added resistance."
    );
    assert_eq!(result["figures"]["best"], 230.0);
    assert_eq!(
        v["sign_offs"],
        json!([{"role": "operator", "act": "complete", "by": "shift B",
                "at": "2026-03-10T15:00:00+00:00", "note": null}])
    );
    assert_eq!(
        v["annotations"][0]["detail"],
        "The train was seen cleaned from Tuesday 10 March 07:12 to Tuesday 10 March 14:51 while \
         the order was open."
    );
    assert_eq!(v["integrity_test"]["passed"], true);
    assert_eq!(v["external"], json!({"system": "maintenance", "number": "77", "url": null}));
    assert_eq!(v["actions"], json!(["verify"]));
}

#[test]
fn a_cancelled_order_says_why() {
    let plant = fixture::plant();
    let mut order = order(&plant);
    order.state = OrderState::Cancelled;
    for (why, code, words) in [
        (CancelledWhy::Person("no crew".to_owned()), "person", "no crew"),
        (
            CancelledWhy::CleanedUnconfirmed,
            "cleaned_unconfirmed",
            "The train was seen cleaned, and nobody completed the order.",
        ),
    ] {
        order.cancelled_why = Some(why);
        let v = view(&plant, &order, UnitSystem::Si);
        assert_eq!(v["cancelled"], json!({"why": code, "detail": words}));
        assert_eq!(v["actions"], json!([]));
    }
}
