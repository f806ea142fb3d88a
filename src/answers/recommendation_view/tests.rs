use serde_json::json;

use super::super::fixture::{self, at, dates};
use super::super::units::UnitSystem;
use super::*;
use crate::advice::{Action, AdvisedStep, ClearsWhen, Closed, ClosedWhy, Decision, Urgency, Why};
use crate::analysis::{BaselineKind, Reason, Verdict};
use crate::base::TrainId;
use crate::plant::{Step, StepClass};

fn evidence(finding: FindingKind, limit_kind: Option<LimitKind>, value: f64) -> Evidence {
    Evidence {
        finding,
        limit_kind,
        value,
        limit: Some(0.3),
        measure: Measure::Share,
        baseline: Some(BaselineKind::AfterClean),
        from: at("2026-01-20T16:00"),
        to: at("2026-03-08T00:00"),
        dates: Some(dates("2026-03-10", "2026-03-12", "2026-03-15")),
        verdict: None,
        reasons: Vec::new(),
    }
}

fn recommendation() -> Recommendation {
    let acid = Step {
        class: StepClass::Acid,
        chemical: None,
        concentration: None,
        ph: None,
        temperature_degc: None,
        duration_us: None,
        volume_m3: None,
        verified: None,
    };
    Recommendation {
        id: "r1".to_owned(),
        train: TrainId::new("uf-1"),
        action: Action::CleanInPlace,
        urgency: Urgency::ThisWeek,
        raised: at("2026-03-01T07:00"),
        as_of: at("2026-03-08T06:00"),
        clean_by: Some(dates("2026-03-10", "2026-03-12", "")),
        start_by: Some(at("2026-03-09T04:00")),
        evidence: vec![evidence(
            FindingKind::PermeabilityLimitAhead,
            Some(LimitKind::LossClean),
            0.274,
        )],
        clears_when: ClearsWhen::CleanedOrLimitFar,
        steps: vec![AdvisedStep { step: acid, why: Why::MineralFouling }],
        steps_from: StepsFrom::GeneralPractice,
        decisions: vec![Decision {
            act: Act::Accept,
            by: "night shift".to_owned(),
            at: at("2026-03-08T06:30"),
            reason: "in the plan".to_owned(),
            until: None,
        }],
        silent_until: None,
        work_order: Some(41),
        closed: None,
    }
}

#[test]
fn a_recommendation_is_that_of_the_interface() {
    let plant = fixture::plant();
    let units = Units::new(UnitSystem::Si);
    let view = recommendation_view(&plant, &plant.trains[0], &units, &recommendation());
    let mut v = serde_json::to_value(view).unwrap();
    let cautions = v["cautions"].take();
    assert_eq!(
        v,
        json!({
            "id": "r1", "train": "uf-1", "action": "clean_in_place", "state": "open",
            "urgency": "this_week", "raised": "2026-03-01T07:00:00+00:00",
            "as_of": "2026-03-08T06:00:00+00:00",
            "clean_by": {"p10": "2026-03-10T12:00:00+00:00", "p50": "2026-03-12T12:00:00+00:00",
                         "p90": null},
            "start_by": "2026-03-09T04:00:00+00:00",
            "evidence": [{"finding": "permeability_limit_ahead", "value": 27.4, "unit": "%",
                          "unit_label": "%", "limit": 30.0, "baseline": "after_clean",
                          "from": "2026-01-20T16:00:00+00:00", "to": "2026-03-08T00:00:00+00:00",
                          "detail": "Permeability at the start of a cycle has lost 27.4 % against \
                                     the last clean that restored it; the clean limit of 30 %: most \
                                     likely Thursday 12 March, one chance in ten before Tuesday \
                                     10 March."}],
            "clears_when": "A clean in place is seen or recorded, or the early date of the limit \
                            moves out well past the planning horizon.",
            "steps": [{"class": "acid",
                       "why": "Iron, manganese, aluminium and calcium yield to it."}],
            "steps_from": "general_practice", "cautions": null, "work_order": "WO 41",
            "decisions": [{"act": "accept", "by": "night shift",
                           "at": "2026-03-08T06:30:00+00:00", "reason": "in the plan"}],
            "silent_until": null, "closed": null
        })
    );
    let cautions: Vec<&str> =
        cautions.as_array().unwrap().iter().filter_map(|c| c.as_str()).collect();
    assert!(cautions.iter().any(|c| c.contains("chlorine gas")));
    assert!(cautions.iter().any(|c| c.contains("drinking water")));
    assert!(cautions.last().is_some_and(|c| c.contains("starts a pump")));
}

#[test]
fn a_closed_one_says_why() {
    let plant = fixture::plant();
    let mut r = recommendation();
    r.closed = Some(Closed { at: at("2026-07-01T06:00"), why: ClosedWhy::Cleaned });
    r.work_order = None;
    r.clean_by = None;
    let units = Units::new(UnitSystem::Si);
    let v =
        serde_json::to_value(recommendation_view(&plant, &plant.trains[0], &units, &r)).unwrap();
    assert_eq!(v["state"], json!("closed"));
    assert_eq!(
        v["closed"],
        json!({"at": "2026-07-01T07:00:00+01:00", "why": "cleaned", "detail": "The train was cleaned."})
    );
    assert_eq!((&v["work_order"], &v["clean_by"]), (&json!(null), &json!(null)));
}

#[test]
fn evidence_is_told_in_the_units_asked_for() {
    let zone = fixture::plant().zone;
    let si = Units::new(UnitSystem::Si);
    let us = Units::new(UnitSystem::Us);
    let loss = evidence(FindingKind::PermeabilityLoss, Some(LimitKind::LossAdvisory), 0.236);
    let tmp = Evidence {
        limit: Some(1.2e5),
        measure: Measure::Pressure,
        baseline: None,
        ..evidence(FindingKind::TmpHigh, Some(LimitKind::TmpClean), 1.25e5)
    };
    let ahead = Evidence {
        finding: FindingKind::TmpLimitAhead,
        dates: Some(dates("2026-03-07", "", "")),
        ..tmp.clone()
    };
    let verdict = Evidence {
        limit: None,
        verdict: Some(Verdict::NotRestored),
        baseline: Some(BaselineKind::BestAfterClean),
        ..evidence(FindingKind::CleanVerdict, None, 0.781)
    };
    let unusable = Evidence {
        limit: None,
        measure: Measure::Count,
        baseline: None,
        reasons: vec![Reason::NoPressure],
        ..evidence(FindingKind::CannotNormalise, None, 1.0)
    };
    for (e, units, value, unit, words) in [
        (
            &loss,
            &si,
            23.6,
            "%",
            "Permeability at the start of a cycle has lost 23.6 % against the last clean that \
             restored it; it has been past the advisory limit of 30 % since Tuesday 20 January \
             16:00.",
        ),
        (
            &tmp,
            &si,
            1.25,
            "bar",
            "TMP at the end of a cycle is 1.25 bar; it has been past the clean limit of 1.2 bar \
             since Tuesday 20 January 16:00.",
        ),
        (
            &ahead,
            &us,
            18.13,
            "[psi]",
            "TMP at the end of a cycle is 18.13 psi; the clean limit of 17.4 psi: more likely \
             than not further off than 180 days, one chance in ten already.",
        ),
        (
            &verdict,
            &si,
            78.1,
            "%",
            "After the last clean, permeability reached 78.1 % of the best after a clean in twelve \
             months. Not restored: less than 85 % of the best permeability after a clean.",
        ),
        (
            &unusable,
            &si,
            1.0,
            "1",
            "Hours of filtration could not be used in the last day: There is no usable reading of \
             a pressure.",
        ),
    ] {
        let view = evidence_view(&zone, units, e);
        assert_eq!((view.value, view.unit.as_str()), (Some(value), unit));
        assert_eq!(view.detail, words);
    }
}
