//! The example plant files, and what becomes of a plant file full of mistakes.

use std::path::{Path, PathBuf};

use proptest::prelude::*;
use washbell::base::{Instant, unit_by_ucum};
use washbell::plant::{Mistake, Reading, Role, effective, read};

fn example(name: &str) -> String {
    let path = Path::new(env!("CARGO_MANIFEST_DIR")).join("config").join(name);
    std::fs::read_to_string(&path).unwrap_or_else(|e| panic!("{}: {e}", path.display()))
}

fn taken(text: &str) -> Reading {
    read(text, Path::new("/srv/plant")).unwrap_or_else(|mistakes| {
        let lines: Vec<String> = mistakes.iter().map(Mistake::to_string).collect();
        panic!("{}", lines.join("\n"))
    })
}

fn close(a: f64, b: f64) {
    assert!((a - b).abs() <= 1e-6 * b.abs(), "{a} is not {b}");
}

#[test]
fn the_example_in_si_units_is_taken_without_a_warning() {
    let reading = taken(&example("dead-end.toml"));
    assert_eq!(reading.warnings, []);
    let plant = &reading.plant;
    assert_eq!(plant.service.database, PathBuf::from("/srv/plant/washbell.db"));
    assert_eq!(plant.shifts, [(6, 0), (14, 0), (22, 0)]);
    let [one, two] = plant.trains.as_slice() else { panic!("two trains") };
    // 14 April 2026 begins at 23:00 UTC of the day before: it is summer time in London.
    let changed = Instant::parse("2026-04-13T23:00:00Z").unwrap();
    assert_eq!(one.area_at(changed.plus(-1)), 3200.0);
    assert_eq!(one.area_at(changed), 2920.0);
    close(one.limits.tmp_pa.clean, 1.1e5);
    close(two.limits.tmp_pa.clean, 1.2e5);
    close(one.limits.tmp_pa.advisory, 0.9e5);
    close(one.limits.permeability_loss.clean, 0.30);
    close(one.as_new_permeability.unwrap(), 300.0 / 3.6e6 / 1e5);
    assert_eq!(two.signals_of(Role::PermeatePressure).count(), 2);
    assert_eq!(one.procedures, two.procedures);
    assert_eq!(one.procedures[0].steps.len(), 4);
}

#[test]
fn the_example_in_us_units_means_the_same_kinds_of_things() {
    let plant = taken(&example("dead-end-us.toml")).plant;
    let [a, b] = plant.trains.as_slice() else { panic!("two trains") };
    close(a.area_at(Instant::from_micros(0)), 34_400.0 * 0.092_903_04);
    close(a.limits.tmp_pa.clean, 17.0 * 6_894.757_293_168);
    close(plant.reference_temperature_degc, 20.0);
    close(a.membrane_limits.unwrap().temperature_degc.unwrap(), 40.0);
    let lmh_bar = unit_by_ucum("L/(m2.h.bar)").unwrap();
    close(lmh_bar.from_si(a.as_new_permeability.unwrap()), 12.2 * 24.623_68);
    let meter = b.signals_of(Role::PermeateFlow).next().unwrap();
    assert_eq!(meter.tag.as_str(), "FIT-210");
    assert_eq!(b.procedures[0].steps.len(), 2);
    assert!(a.procedures.is_empty());
}

#[test]
fn check_can_print_what_everything_ended_up_as() {
    let reading = taken(&example("dead-end.toml"));
    let settings = effective(&reading);
    let of = |key: &str| {
        let found = settings.iter().find(|s| s.key == key).unwrap_or_else(|| panic!("{key}"));
        (found.value.as_str(), found.defaulted)
    };
    assert_eq!(of("plant.reference_temperature"), ("20 °C", true));
    assert_eq!(of("plant.name"), ("Harrow Fen Water Works", false));
    assert_eq!(of("source.scada.every"), ("1 min", true));
    assert_eq!(of("train.uf-1.tmp_floor"), ("0.03 bar", true));
    assert_eq!(of("train.uf-1.clean_notice"), ("24 h", true));
    assert_eq!(of("train.uf-1.limits.tmp_clean"), ("1.1 bar", false));
    assert_eq!(of("train.uf-2.limits.tmp_clean"), ("1.2 bar", false));
    assert_eq!(of("train.uf-2.limits.planning_horizon"), ("14 d", true));
    assert_eq!(of("train.uf-2.as_new_permeability"), ("300 L/(m²·h·bar)", false));
    assert_eq!(of("retention.readings"), ("for ever", true));
}

#[test]
fn comments_layout_units_and_defaults_spelt_out_do_not_change_the_revision() {
    let text = example("dead-end.toml");
    let plant = taken(&text).plant;
    let same = text
        .lines()
        .map(|l| {
            l.strip_prefix("# clean_duration")
                .map_or(l.to_owned(), |r| format!("clean_duration{r}"))
        })
        .collect::<Vec<_>>()
        .join("\n\n")
        .replace("\"0.9 bar\"", "\"90 kPa\"");
    assert_ne!(same, text);
    let other_folder = read(&same, Path::new("/elsewhere")).unwrap().plant;
    assert_eq!(other_folder.revision, plant.revision);
    assert_eq!(other_folder.mapping, plant.mapping);
    assert_eq!(plant.revision.len(), 64);

    let limit = taken(&text.replace("\"0.9 bar\"", "\"0.8 bar\"")).plant;
    assert_ne!(limit.revision, plant.revision);
    assert_eq!(limit.mapping, plant.mapping);
    let tag = taken(&text.replace("FT-201", "FT-202")).plant;
    assert_ne!(tag.revision, plant.revision);
    assert_ne!(tag.mapping, plant.mapping);
}

proptest! {
    #[test]
    fn any_text_is_taken_or_refused(text in any::<String>()) {
        let _ = read(&text, Path::new(""));
    }

    #[test]
    fn any_damage_to_an_example_is_taken_or_refused_with_places_inside(
        at in 0_usize..6_000, length in 0_usize..40, put in "[\\[\\]{}=\"'#., \n\\w%é]{0,6}",
    ) {
        let mut text = example("dead-end.toml");
        let mut from = at.min(text.len());
        while !text.is_char_boundary(from) { from -= 1; }
        let mut to = (from + length).min(text.len());
        while !text.is_char_boundary(to) { to -= 1; }
        text.replace_range(from..to, &put);
        let read = read(&text, Path::new(""));
        if let Ok(reading) = &read {
            // Whatever is taken is whole: nothing stands in for what could not be read.
            prop_assert!(!reading.plant.id.is_empty() && !reading.plant.trains.is_empty());
            for train in &reading.plant.trains {
                prop_assert!(!train.id.as_str().is_empty() && !train.area_m2.is_empty());
                prop_assert!(train.area_m2.iter().all(|a| a.value > 0.0));
                prop_assert!(train.signals_of(Role::PermeateFlow).next().is_some());
                prop_assert!(train.signals_of(Role::State).next().is_some());
                for signal in train.signals.iter() {
                    prop_assert_eq!(signal.unit.map(|u| u.dimension), signal.role.dimension());
                    prop_assert!(reading.plant.source(&signal.source).is_some());
                }
            }
        }
        if let Err(mistakes) = read {
            prop_assert!(!mistakes.is_empty());
            let lines = text.split('\n').count();
            for m in mistakes {
                prop_assert!(m.line >= 1 && m.line <= lines && m.column >= 1, "{}", m);
                prop_assert!(m.span.start <= m.span.end && m.span.end <= text.len(), "{}", m);
            }
        }
    }
}
