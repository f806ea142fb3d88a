use serde_json::json;

use super::super::fixture::{self, LMH_BAR, at};
use super::super::units::UnitSystem;
use super::*;
use crate::analysis::{Baseline, BaselineKind, Origin};
use crate::plant::StepClass;

const LMH: f64 = 1e-3 / 3600.0;

fn level_of(site: &Site, lmh_bar: f64, flux: f64, from: &str, to: &str) -> Level {
    Level {
        resistance_1_m: site.resistance_1_m(lmh_bar * LMH_BAR),
        half_width_1_m: 1e10,
        flux_m_s: flux * LMH,
        temperature_degc: 9.04,
        hours: 24,
        from: at(from),
        to: at(to),
    }
}

/// A clean that brought 138 back to 215 of 230.
fn run(site: &Site) -> Run {
    Run {
        train: site.train.id.clone(),
        start: at("2026-03-09T16:00"),
        clean_start: at("2026-03-09T08:00"),
        origin: Origin::Inferred,
        before: Some(level_of(site, 138.0, 61.8, "2026-03-08T08:00", "2026-03-09T08:00")),
        after: Some(level_of(site, 215.0, 60.0, "2026-03-09T17:00", "2026-03-11T00:00")),
        best: Some(Baseline {
            kind: BaselineKind::BestAfterClean,
            resistance_1_m: site.resistance_1_m(230.0 * LMH_BAR),
            at: Some(at("2025-11-20T16:00")),
        }),
        verdict: Verdict::PartlyRestored,
        verdict_known: Some(at("2026-03-11T00:00")),
        slope_1_m_per_m: None,
    }
}

#[test]
fn an_inferred_clean_shows_the_figures_behind_its_verdict() {
    let plant = fixture::plant();
    let site = Site::new(&plant, &plant.trains[0]);
    let units = Units::new(UnitSystem::Si);
    let view = inferred_cleaning(&plant.zone, &site, &units, &run(&site), at("2026-03-12T06:00"));
    let mut v = serde_json::to_value(view).unwrap();
    assert_eq!(v["figures"]["units"]["regained"].take(), json!("%"));
    assert_eq!(v["figures"]["unit_labels"]["best"].take(), json!("L/(m²·h·bar)"));
    let figures = v.as_object_mut().unwrap();
    let figures = figures.get_mut("figures").and_then(|f| f.as_object_mut()).unwrap();
    figures.remove("units");
    figures.remove("unit_labels");
    // Methods: from 138 to 215 of 230 reads 84 % in permeability and 90 % in resistance.
    assert_eq!(
        v,
        json!({
            "id": "uf-1-20260309T080000Z", "train": "uf-1",
            "start": "2026-03-09T08:00:00+00:00", "end": "2026-03-09T16:00:00+00:00",
            "kind": "clean_in_place", "origin": "inferred", "steps": [], "work_order": null,
            "reference": null, "recorded": null, "by": null, "verdict": "partly_restored",
            "known": "2026-03-11T00:00:00+00:00", "can_tell_from": null,
            "detail": "Partly restored: 85 to 95 % of the best permeability after a clean. It \
                       reached 93.5 %, and took back 89.5 % of the added resistance. The state of \
                       the train showed this clean; record what was done, if you know it.",
            "figures": {
                "before": {"permeability": 138.0, "interval": [137.5, 138.5],
                           "resistance": 2.6e12, "flux": 61.8, "temperature": 9.0,
                           "filtration_hours": 24, "from": "2026-03-08T08:00:00+00:00",
                           "to": "2026-03-09T08:00:00+00:00"},
                "after": {"permeability": 215.0, "interval": [213.7, 216.3],
                          "resistance": 1.67e12, "flux": 60.0, "temperature": 9.0,
                          "filtration_hours": 24, "from": "2026-03-09T17:00:00+00:00",
                          "to": "2026-03-11T00:00:00+00:00"},
                "best": 230.0, "best_baseline": "best_after_clean", "restored": 93.5,
                "regained": 89.5, "like_flux": true
            }
        })
    );
}

#[test]
fn a_verdict_is_not_shown_before_it_was_known() {
    let plant = fixture::plant();
    let site = Site::new(&plant, &plant.trains[0]);
    let units = Units::new(UnitSystem::Si);
    let steps = [Step {
        class: StepClass::Acid,
        chemical: Some("citric acid".to_owned()),
        concentration: Some("1.5 %".to_owned()),
        ph: Some(2.5),
        temperature_degc: None,
        duration_us: None,
        volume_m3: None,
        verified: None,
    }];
    let mut clean = RecordedCleaning {
        id: "c1",
        train: &site.train.id,
        start: at("2026-03-09T08:00"),
        end: at("2026-03-09T15:45"),
        kind: Phase::CleanInPlace,
        steps: &steps,
        work_order: Some("WO 41"),
        reference: None,
        recorded: at("2026-03-09T18:00"),
        by: Some("day shift"),
    };
    let run = run(&site);
    let as_of = at("2026-03-09T20:00");
    let view = recorded_cleaning(&plant.zone, &site, &units, &clean, Some(&run), as_of);
    let mut v = serde_json::to_value(view).unwrap();
    let figures = v["figures"].take();
    assert_eq!(figures["after"], json!(null));
    assert_eq!(figures["restored"], json!(null));
    assert_eq!(figures["before"]["permeability"], json!(138.0));
    assert_eq!(
        v,
        json!({
            "id": "c1", "train": "uf-1", "start": "2026-03-09T08:00:00+00:00",
            "end": "2026-03-09T15:45:00+00:00", "kind": "clean_in_place", "origin": "recorded",
            "steps": [{"class": "acid", "chemical": "citric acid", "concentration": "1.5 %", "ph": 2.5}],
            "work_order": "WO 41", "reference": null, "recorded": "2026-03-09T18:00:00+00:00",
            "by": "day shift", "verdict": "cannot_tell_yet", "known": null,
            "can_tell_from": "2026-03-11T00:00:00+00:00",
            "detail": "It cannot be told yet what the clean was worth: that needs 24 hours of \
                       filtration after the return, at the earliest by the end of Tuesday 10 March.",
            "figures": null
        })
    );
    // A train that stood still since: the earliest moment moves on with the data.
    let late = recorded_cleaning(
        &plant.zone,
        &site,
        &units,
        &clean,
        Some(&Run { verdict_known: None, ..run.clone() }),
        at("2026-03-20T06:00"),
    );
    assert_eq!(
        serde_json::to_value(late.can_tell_from).unwrap(),
        json!("2026-03-21T00:00:00+00:00")
    );
    clean.kind = Phase::MaintenanceClean;
    let other = recorded_cleaning(&plant.zone, &site, &units, &clean, None, as_of);
    assert_eq!((other.verdict, other.detail.as_str()), (None, "Only cleans in place are judged."));
    clean.kind = Phase::CleanInPlace;
    let unmet = recorded_cleaning(&plant.zone, &site, &units, &clean, None, as_of);
    assert_eq!(unmet.verdict.as_deref(), Some("cannot_tell_yet"));
}

#[test]
fn unlike_flux_and_a_missing_baseline_are_said() {
    let plant = fixture::plant();
    let site = Site::new(&plant, &plant.trains[0]);
    let units = Units::new(UnitSystem::Us);
    let mut run = run(&site);
    run.after = run.after.map(|l| Level { flux_m_s: 40.0 * LMH, ..l });
    let as_of = at("2026-03-12T06:00");
    let view = inferred_cleaning(&plant.zone, &site, &units, &run, as_of);
    assert!(view.detail.contains("differs by more than 15 %"), "{}", view.detail);
    // 230 / 24.62368.
    assert_eq!(view.figures.and_then(|f| f.best), Some(9.341));
    run.best = None;
    run.verdict = Verdict::CannotTellYet;
    let view = inferred_cleaning(&plant.zone, &site, &units, &run, as_of);
    assert!(view.detail.contains("no stated permeability"), "{}", view.detail);
    assert_eq!(view.can_tell_from, None);
    assert!(view.known.is_some());
}
