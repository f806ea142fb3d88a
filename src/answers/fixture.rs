//! The invented plant of this floor's tests.

use std::path::PathBuf;

use crate::analysis::{Baseline, BaselineKind, Dates, Holds, Loss, Site, Standing};
use crate::base::{DAY_US, HOUR_US, Instant, MINUTE_US, SourceId, Tag, TrainId, Zone};
use crate::plant::{
    Dated, Drive, Filtration, HoldLimit, Layout, Limits, Plant, PressureKind, RepeatedHour, Role,
    Service, Signal, Source, TimeColumn, TimeFormat, Train, Values,
};
use crate::science::TemperatureLaw;

/// One L/(m2.h.bar) in m/(s.Pa).
pub const LMH_BAR: f64 = 1e-3 / 3600.0 / 1e5;

/// A moment of UTC, written to the minute.
pub fn at(text: &str) -> Instant {
    Instant::parse(&format!("{text}:00Z")).unwrap()
}

pub fn plant() -> Plant {
    let zone = Zone::named("Europe/London").unwrap();
    Plant {
        id: "harrow-fen".to_owned(),
        name: "Harrow Fen Water Works".to_owned(),
        zone: zone.clone(),
        reference_temperature_degc: 20.0,
        temperature_law: TemperatureLaw::Iapws,
        shifts: vec![(6, 0), (14, 0), (22, 0)],
        service: Service { listen: "127.0.0.1:0".to_owned(), database: PathBuf::from("w.db") },
        sources: vec![Source {
            id: SourceId::new("scada"),
            layout: Layout::Wide,
            time: TimeColumn {
                column: "Timestamp".to_owned(),
                format: TimeFormat::Iso,
                zone,
                repeated_hour: RepeatedHour::ByOrder,
            },
            values: Values::Instant,
            hold_us: None,
            every_us: MINUTE_US,
            expected_every_us: HOUR_US,
            delimiter: b',',
            decimal: b'.',
            bad_values: Vec::new(),
        }],
        trains: vec![train()],
        outlook_temperature: Vec::new(),
        retention_us: None,
        revision: "r1".to_owned(),
        mapping: "m1".to_owned(),
    }
}

pub fn train() -> Train {
    Train {
        id: TrainId::new("uf-1"),
        name: "UF train 1".to_owned(),
        asset: Some("MT-0101".to_owned()),
        area_m2: vec![Dated { from: Instant::from_micros(i64::MIN), value: 3200.0 }],
        filtration: Filtration::DeadEnd,
        drive: Drive::Pressurised,
        as_new_permeability: Some(300.0 * LMH_BAR),
        after_clean_permeability: None,
        drinking_water: true,
        clean_duration_us: 8 * HOUR_US,
        clean_notice_us: 24 * HOUR_US,
        tmp_floor_pa: 3e3,
        tmp_accuracy_pa: 1e3,
        signals: [
            (Role::FeedPressure, "PT-101"),
            (Role::PermeatePressure, "PT-103"),
            (Role::PermeateFlow, "FT-101"),
            (Role::Temperature, "TT-101"),
        ]
        .into_iter()
        .map(|(role, tag)| signal(role, tag))
        .collect(),
        limits: Limits {
            permeability_loss: HoldLimit { advisory: 0.2, clean: 0.3 },
            tmp_pa: HoldLimit { advisory: f64::INFINITY, clean: 1.2e5 },
            on_delay_us: 6 * HOUR_US,
            deadband: 0.02,
            planning_horizon_us: 14 * DAY_US,
        },
        membrane_limits: None,
        procedures: Vec::new(),
        integrity: None,
    }
}

fn signal(role: Role, tag: &str) -> Signal {
    Signal {
        role,
        source: SourceId::new("scada"),
        tag: Tag::new(tag),
        from: Instant::from_micros(i64::MIN),
        unit: None,
        pressure: PressureKind::Gauge,
        elevation_m: 0.0,
        serves: Vec::new(),
        max_hold_us: None,
        states: Vec::new(),
    }
}

/// P10, P50 and P90 at noon of three days.
pub fn dates(p10: &str, p50: &str, p90: &str) -> Dates {
    let noon = |day: &str| (!day.is_empty()).then(|| at(&format!("{day}T12:00")));
    Dates { p10: noon(p10), p50: noon(p50), p90: noon(p90) }
}

/// A train in the middle of a run: 27.4 % lost of 231 L/(m2.h.bar), its limit three days off.
pub fn standing(site: &Site) -> Standing {
    Standing {
        train: site.train.id.clone(),
        as_of: at("2026-03-08T06:00"),
        run_start: Some(at("2026-01-20T16:00")),
        baseline: Some(Baseline {
            kind: BaselineKind::AfterClean,
            resistance_1_m: site.resistance_1_m(231.0 * LMH_BAR),
            at: Some(at("2026-01-20T16:00")),
        }),
        loss: Some(Loss { share: 0.274, low: 0.262, high: 0.287, hour: at("2026-03-08T05:00") }),
        end_tmp_pa: Some((4.12e4, at("2026-03-08T05:00"))),
        holds: Holds::default(),
        dates: [
            Some(dates("2026-02-20", "2026-02-22", "2026-02-24")),
            Some(dates("2026-03-10", "2026-03-12", "2026-03-15")),
            None,
            Some(dates("", "", "")),
        ],
        no_dates: None,
        run_days: 46,
        assessed: Some(at("2026-03-08T00:00")),
        in_clean: None,
        clean: None,
        earlier_verdicts: Vec::new(),
        growth_from: None,
        troubles: Vec::new(),
    }
}
