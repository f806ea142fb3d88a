use serde_json::json;

use super::super::fixture::{self, LMH_BAR, at};
use super::super::permeability_csv::permeability_csv;
use super::super::units::UnitSystem;
use super::*;

const LMH: f64 = 1e-3 / 3600.0;

fn hour(site: &Site, start: &str) -> Hour {
    let r = |lmh_bar: f64| site.resistance_1_m(lmh_bar * LMH_BAR);
    Hour {
        train: site.train.id.clone(),
        start: at(start),
        end: at(start).plus(HOUR_US),
        steady: Some(Steady {
            resistance_1_m: r(231.06),
            resistance_min_1_m: r(236.9),
            resistance_max_1_m: r(226.0),
            flux_m_s: 61.8 * LMH,
            tmp_pa: 33_560.0,
            temperature_degc: 11.3,
        }),
        start_resistance_1_m: Some(r(236.2)),
        start_half_width_1_m: Some(1e10),
        starts: 2,
        end_tmp_max_pa: Some(36_000.0),
        samples: 52,
        expected: 60,
        filtration_s: 3480.0,
        volume_m: 0.06,
        mostly: Phase::Filtration,
        quality: Quality::Good,
        reasons: Vec::new(),
    }
}

fn unusable(site: &Site, start: &str) -> Hour {
    Hour {
        steady: None,
        start_resistance_1_m: None,
        samples: 0,
        quality: Quality::Bad,
        reasons: vec![Reason::NoPressure, Reason::UnsteadyFlow],
        ..hour(site, start)
    }
}

#[test]
fn a_series_by_the_hour_is_that_of_the_interface() {
    let plant = fixture::plant();
    let site = Site::new(&plant, &plant.trains[0]);
    let units = Units::new(UnitSystem::Si);
    let mut idle = hour(&site, "2026-03-02T07:00");
    idle.filtration_s = 0.0;
    let hours = [hour(&site, "2026-03-02T05:00"), unusable(&site, "2026-03-02T06:00"), idle];
    let points = hour_points(&plant.zone, &site, &units, &hours);
    let as_of = Some(at("2026-03-02T08:00"));
    let view = permeability_view(&plant, &site, &units, SeriesStep::Hour, as_of, points, None);
    assert_eq!(
        serde_json::to_value(&view).unwrap(),
        json!({
            "train": "uf-1", "as_of": "2026-03-02T08:00:00+00:00", "reference_temperature": 20.0,
            "temperature_law": "iapws", "step": "PT1H",
            "units": {"permeability": "L/(m2.h.bar)", "flux": "L/(m2.h)", "tmp": "bar",
                      "temperature": "Cel", "reference_temperature": "Cel", "resistance": "m-1"},
            "unit_labels": {"permeability": "L/(m²·h·bar)", "flux": "L/(m²·h)", "tmp": "bar",
                            "temperature": "°C", "reference_temperature": "°C", "resistance": "1/m"},
            "points": [
                {"time": "2026-03-02T05:00:00+00:00", "permeability": 231.1,
                 "permeability_min": 226.0, "permeability_max": 236.9,
                 "permeability_start_of_cycle": 236.2, "flux": 61.8, "tmp": 0.336,
                 "temperature": 11.3, "resistance": 1.56e12, "samples": 52, "coverage": 0.87,
                 "quality": "good"},
                {"time": "2026-03-02T06:00:00+00:00", "permeability": null,
                 "permeability_min": null, "permeability_max": null,
                 "permeability_start_of_cycle": null, "flux": null, "tmp": null,
                 "temperature": null, "resistance": null, "samples": 0, "coverage": 0.0,
                 "quality": "bad", "reasons": ["no_pressure", "unsteady_flow"]}
            ],
            "next": null
        })
    );
    assert_eq!(
        permeability_csv(&view),
        "time,permeability [L/(m2.h.bar)],permeability_min [L/(m2.h.bar)],\
         permeability_max [L/(m2.h.bar)],permeability_start_of_cycle [L/(m2.h.bar)],\
         flux [L/(m2.h)],tmp [bar],temperature [Cel],resistance [m-1],samples,coverage,quality,\
         reasons\r\n\
         2026-03-02T05:00:00+00:00,231.1,226,236.9,236.2,61.8,0.336,11.3,1560000000000,52,0.87,good,\r\n\
         2026-03-02T06:00:00+00:00,,,,,,,,,0,0,bad,no_pressure unsteady_flow\r\n"
    );
}

#[test]
fn us_units_reach_every_number() {
    let plant = fixture::plant();
    let site = Site::new(&plant, &plant.trains[0]);
    let units = Units::new(UnitSystem::Us);
    let points = hour_points(&plant.zone, &site, &units, &[hour(&site, "2026-03-02T05:00")]);
    let view = permeability_view(&plant, &site, &units, SeriesStep::Hour, None, points, None);
    let v = serde_json::to_value(&view).unwrap();
    assert_eq!(v["as_of"], json!(null));
    assert_eq!(v["reference_temperature"], json!(68.0));
    assert_eq!(v["units"]["permeability"], json!("[gal_us]/([sft_i].d.[psi])"));
    assert_eq!(v["unit_labels"]["flux"], json!("gfd"));
    let p = &v["points"][0];
    // 231.06 / 24.62368, 61.8 / 1.697743, 0.3356 bar / 0.06894757.
    assert_eq!(p["permeability"], json!(9.384));
    assert_eq!(p["flux"], json!(36.4));
    assert_eq!(p["tmp"], json!(4.87));
    assert_eq!(p["temperature"], json!(52.3));
    assert_eq!(p["resistance"], json!(1.56e12));
}

#[test]
fn a_day_takes_its_range_from_its_hours() {
    let plant = fixture::plant();
    let site = Site::new(&plant, &plant.trains[0]);
    let units = Units::new(UnitSystem::Si);
    let mut wide = hour(&site, "2026-03-02T05:00");
    if let Some(s) = wide.steady.as_mut() {
        s.resistance_max_1_m = site.resistance_1_m(200.0 * LMH_BAR);
        s.tmp_pa = 40_000.0;
    }
    let other_day = hour(&site, "2026-03-03T00:00");
    let hours = [wide, hour(&site, "2026-03-02T06:00"), other_day];
    let day = Day {
        train: site.train.id.clone(),
        start: at("2026-03-02T00:00"),
        end: at("2026-03-03T00:00"),
        resistance_1_m: Some(site.resistance_1_m(236.2 * LMH_BAR)),
        half_width_1_m: None,
        start_hours: 2,
        coarse: true,
        steady_resistance_1_m: Some(site.resistance_1_m(231.0 * LMH_BAR)),
        flux_m_s: Some(61.8 * LMH),
        temperature_degc: Some(11.3),
        end_tmp_max_pa: None,
        end_tmp_pa: None,
        laid_down_1_m: None,
        taken_off_1_m: None,
        volume_m: 0.12,
        filtration_s: 6960.0,
        coverage: 0.867,
        cycles: 4,
        cycles_left_out: 0,
        quality: Quality::Uncertain,
        reasons: vec![Reason::Coarse],
    };
    let idle = Day { filtration_s: 0.0, ..day.clone() };
    let points = day_points(&plant.zone, &site, &units, &[day, idle], &hours);
    assert_eq!(
        serde_json::to_value(&points).unwrap(),
        json!([{"time": "2026-03-02T00:00:00+00:00", "permeability": 231.0,
                "permeability_min": 200.0, "permeability_max": 236.9,
                "permeability_start_of_cycle": null, "flux": 61.8, "tmp": 0.368,
                "temperature": 11.3, "resistance": 1.56e12, "samples": 104, "coverage": 0.87,
                "quality": "uncertain", "reasons": ["coarse"]}])
    );
}

#[test]
fn minutes_say_what_counted() {
    let plant = fixture::plant();
    let site = Site::new(&plant, &plant.trains[0]);
    let units = Units::new(UnitSystem::Si);
    let every_us = 20 * crate::base::SECOND_US;
    let from = at("2026-03-02T05:00");
    // Before the span, three readings of a good minute, three of one just begun, one of backwash.
    let times: Vec<Instant> = (-1..7).map(|i| from.plus(i * every_us)).collect();
    let n = times.len();
    let mut phases = vec![Phase::Filtration; n];
    phases[7] = Phase::Backwash;
    let r = site.resistance_1_m(231.0 * LMH_BAR);
    let mut reason = vec![None; n];
    reason[4..7].fill(Some(Reason::JustStarted));
    reason[3] = Some(Reason::UnsteadyFlow);
    let samples = Samples {
        times,
        phases,
        flow_m3_s: vec![0.05; n],
        flux_m_s: vec![61.8 * LMH; n],
        tmp_pa: vec![33_560.0; n],
        temperature_degc: vec![11.3; n],
        frozen: vec![false; n],
        every_us,
        unknown_codes: Default::default(),
    };
    let normalised = Normalised { resistance_1_m: vec![r; n], reason };
    let span = Span::new(from, from.plus(HOUR_US));
    let points = minute_points(&plant.zone, &site, &units, &samples, &normalised, span);
    let told: Vec<_> = points
        .iter()
        .map(|p| (p.time.as_str(), p.permeability, p.samples, p.coverage, p.quality.as_str()))
        .collect();
    assert_eq!(
        told,
        [
            ("2026-03-02T05:00:00+00:00", Some(231.0), 2, 0.67, "uncertain"),
            ("2026-03-02T05:01:00+00:00", None, 0, 0.0, "bad"),
        ]
    );
    assert_eq!(points[1].reasons, ["just_started"]);
    assert_eq!(SeriesStep::of_us(MINUTE_US).map(SeriesStep::code), Some("PT1M"));
    assert_eq!(SeriesStep::of_us(2 * MINUTE_US), None);
}
