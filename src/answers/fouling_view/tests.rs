use serde_json::json;

use super::super::fixture::{self, LMH_BAR, at};
use super::super::units::UnitSystem;
use super::*;
use crate::analysis::{Holds, Level, NoDates, Origin, Reason, Verdict};
use crate::plant::Phase;

/// A run that began with a clean to `lmh_bar`.
fn run(site: &Site, end: &str, known: &str, lmh_bar: f64, verdict: Verdict) -> Run {
    Run {
        train: site.train.id.clone(),
        start: at(end),
        clean_start: at(end).plus(-8 * crate::base::HOUR_US),
        origin: Origin::Inferred,
        before: None,
        after: Some(Level {
            resistance_1_m: site.resistance_1_m(lmh_bar * LMH_BAR),
            half_width_1_m: 1e10,
            flux_m_s: 1.7e-5,
            temperature_degc: 9.0,
            hours: 24,
            from: at(end),
            to: at(known),
        }),
        best: None,
        verdict,
        verdict_known: Some(at(known)),
        slope_1_m_per_m: None,
    }
}

fn cycle(site: &Site, start: &str, end: &str, r: [f64; 2]) -> Cycle {
    Cycle {
        train: site.train.id.clone(),
        start: at(start),
        end: at(end),
        decided: at(end),
        volume_m: 0.03,
        flux_m_s: 1.7e-5,
        temperature_degc: 9.0,
        start_resistance_1_m: Some(r[0]),
        start_half_width_1_m: None,
        end_resistance_1_m: Some(r[1]),
        end_tmp_pa: None,
        taken_off_before_1_m: None,
        preceded_by: Some(Phase::Backwash),
        followed_by: Some(Phase::Backwash),
        left_out: None,
    }
}

fn assessment(standing: &Standing) -> Assessment {
    Assessment {
        train: standing.train.clone(),
        day: at("2026-03-07T00:00"),
        as_of: at("2026-03-08T00:00"),
        run_start: standing.run_start,
        baseline: standing.baseline,
        run_days: 46,
        trend: Some(Trend {
            from: at("2026-02-15T00:00"),
            to: at("2026-03-08T00:00"),
            days: 21,
            slope_1_m_per_m: 1.2e10,
            slope_sd_1_m_per_m: 1e9,
            p: 0.000_312,
            level_1_m: 2.14e12,
            level_sd_1_m: 1e10,
            volume_per_day_m: 1.4,
        }),
        growth: None,
        growth_from: Some(GrowthFrom::OwnTrend),
        temperature_degc: Some(9.0),
        holds: Holds::default(),
        dates: standing.dates,
    }
}

#[test]
fn the_parts_of_the_resistance_and_its_outlook_are_told() {
    let plant = fixture::plant();
    let site = Site::new(&plant, &plant.trains[0]);
    let standing = fixture::standing(&site);
    let assessed = assessment(&standing);
    let runs = [
        run(&site, "2025-11-20T16:00", "2025-11-22T00:00", 240.0, Verdict::Restored),
        run(&site, "2026-01-20T16:00", "2026-01-22T00:00", 231.0, Verdict::Restored),
    ];
    let mut odd = cycle(&site, "2026-03-08T04:00", "2026-03-08T04:30", [9e12, 9e13]);
    odd.left_out = Some(Reason::Gap);
    let cycles = [
        cycle(&site, "2026-03-06T05:00", "2026-03-06T05:30", [9e12, 9e13]),
        cycle(&site, "2026-03-08T03:00", "2026-03-08T03:30", [2.14e12, 2.4e12]),
        odd,
        cycle(&site, "2026-03-08T05:00", "2026-03-08T05:30", [2.16e12, 2.4e12]),
    ];
    let case = FoulingCase {
        plant: &plant,
        site: &site,
        standing: &standing,
        assessment: Some(&assessed),
        runs: &runs,
        cycles: &cycles,
    };
    let v = serde_json::to_value(fouling_view(&Units::new(UnitSystem::Si), &case)).unwrap();
    // Resistances of 300, 240 and 231 L/(m2 h bar) at 1.001567 mPa s, worked by hand:
    // 3.6e11/(1.0015673e-3 k) = 1.19813e12, 1.49766e12 and 1.55601e12. Half widths: cleans 1e10;
    // cycles 1.96 x 1.2533 x 1.4826 x 1e10 / sqrt 2 = 2.575e10.
    assert_eq!(
        v,
        json!({
            "train": "uf-1", "as_of": "2026-03-08T06:00:00+00:00",
            "run_start": "2026-01-20T16:00:00+00:00",
            "units": {"permeability": "L/(m2.h.bar)", "resistance": "m-1", "resistances": "m-1",
                      "slope": "m-1.d-1", "loss_per_day": "%/d"},
            "unit_labels": {"permeability": "L/(m²·h·bar)", "resistance": "1/m",
                            "resistances": "1/m", "slope": "1/m per day",
                            "loss_per_day": "% per day"},
            "baselines": {
                "as_new": {"permeability": 300.0, "resistance": 1.2e12, "origin": "stated", "at": null},
                "after_clean": {"permeability": 231.0, "resistance": 1.56e12, "origin": "observed",
                                "at": "2026-01-20T16:00:00+00:00"},
                "best_after_clean": {"permeability": 240.0, "resistance": 1.5e12,
                                     "origin": "observed", "at": "2025-11-20T16:00:00+00:00"},
                "used": "after_clean"},
            "resistances": {
                "total": {"value": 2.4e12, "interval": [2.4e12, 2.4e12],
                          "observed": "2026-03-08T05:30:00+00:00"},
                "membrane": {"value": 1.2e12, "interval": null, "observed": null,
                             "detail": "As the plant file states it."},
                "irrecoverable": {"value": 3e11, "interval": [2.9e11, 3.68e11],
                                  "observed": "2025-11-20T16:00:00+00:00"},
                "membrane_and_irrecoverable": {"value": 1.5e12, "interval": [1.49e12, 1.57e12],
                                               "observed": "2025-11-20T16:00:00+00:00"},
                "chemically_reversible": {"value": 6.52e11, "interval": [5.58e11, 6.88e11],
                                          "observed": "2026-03-08T05:30:00+00:00"},
                "hydraulically_reversible": {"value": 2.5e11, "interval": [2.24e11, 2.76e11],
                                             "observed": "2026-03-08T05:30:00+00:00"}},
            "trend": {"from": "2026-02-15T00:00:00+00:00", "to": "2026-03-08T00:00:00+00:00",
                      "days": 21, "slope": 1.68e10, "slope_interval": [1.41e10, 1.95e10],
                      "loss_per_day": 0.79, "loss_per_day_interval": [0.66, 0.91],
                      "p": 0.00031, "significance": "significant"},
            "forecast": {
                "advisory": {"limit": "permeability_loss_advisory",
                             "p10": "2026-02-20T12:00:00+00:00", "p50": "2026-02-22T12:00:00+00:00",
                             "p90": "2026-02-24T12:00:00+00:00"},
                "clean": {"limit": "permeability_loss_clean", "p10": "2026-03-10T12:00:00+00:00",
                          "p50": "2026-03-12T12:00:00+00:00", "p90": "2026-03-15T12:00:00+00:00"},
                "growth_from": "own_trend"},
            "causes": []
        })
    );
}

#[test]
fn what_cannot_be_told_is_null_with_its_reason() {
    let mut plant = fixture::plant();
    plant.trains[0].as_new_permeability = None;
    let site = Site::new(&plant, &plant.trains[0]);
    let mut standing = fixture::standing(&site);
    standing.baseline = None;
    standing.dates = [None; 4];
    standing.no_dates = Some(NoDates::YoungRun);
    let mut assessed = assessment(&standing);
    // The run that the trend is of has ended since.
    assessed.run_start = Some(at("2025-11-20T16:00"));
    let case = FoulingCase {
        plant: &plant,
        site: &site,
        standing: &standing,
        assessment: Some(&assessed),
        runs: &[],
        cycles: &[],
    };
    let v = serde_json::to_value(fouling_view(&Units::new(UnitSystem::Si), &case)).unwrap();
    assert_eq!(
        v["baselines"],
        json!({"as_new": null, "after_clean": null, "best_after_clean": null, "used": null})
    );
    assert_eq!(v["trend"], json!(null));
    let none = json!({"limit": null, "p10": null, "p50": null, "p90": null});
    assert_eq!(
        v["forecast"],
        json!({"advisory": none, "clean": none, "growth_from": null,
               "detail": "There are no dates, because five whole days of filtration are needed for \
                          a trend and have not passed."})
    );
    for (part, words) in [
        ("total", "No cycle of the last day"),
        ("membrane", "as_new_permeability"),
        ("irrecoverable", "as_new_permeability"),
        ("membrane_and_irrecoverable", "No clean has been judged"),
        ("chemically_reversible", "No clean has been judged"),
        ("hydraulically_reversible", "No cycle of the last day"),
    ] {
        let p = &v["resistances"][part];
        assert_eq!((&p["value"], &p["observed"]), (&json!(null), &json!(null)), "{part}");
        assert!(p["detail"].as_str().is_some_and(|d| d.contains(words)), "{part}: {p}");
    }
}

#[test]
fn a_clean_better_than_new_is_pointed_out() {
    let plant = fixture::plant();
    let site = Site::new(&plant, &plant.trains[0]);
    let standing = fixture::standing(&site);
    let runs = [run(&site, "2026-01-20T16:00", "2026-01-22T00:00", 310.0, Verdict::Restored)];
    let case = FoulingCase {
        plant: &plant,
        site: &site,
        standing: &standing,
        assessment: None,
        runs: &runs,
        cycles: &[],
    };
    let view = fouling_view(&Units::new(UnitSystem::Us), &case);
    let part = view.resistances.irrecoverable;
    assert!(part.value.is_some_and(|v| v < 0.0));
    assert!(part.detail.is_some_and(|d| d.contains("better than as_new_permeability")));
    // 310 / 24.62368.
    assert_eq!(view.baselines.best_after_clean.and_then(|b| b.permeability), Some(12.59));
}
