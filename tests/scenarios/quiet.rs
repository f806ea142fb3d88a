//! What is no reason to clean: cold, a plant in good order, an area told, clocks set back, an
//! outage.

use washbell::advice::Action;
use washbell::base::{DAY_US, HOUR_US, Instant, Span, Zone};
use washbell::sim::{ColdSnap, Fault, Noise, PlannedClean, Recipe, TemperatureRecipe};

use crate::runner::{Nobody, Runner, Tamper};
use crate::score::{Score, Within};

const SEEDS: [u64; 5] = [301, 302, 303, 304, 305];
const TRAINS: u32 = 2;
const DAYS: i64 = 24;

fn at(day: i64, hour: i64) -> Instant {
    Instant::parse("2025-10-12T23:00:00Z").unwrap().plus(day * DAY_US + hour * HOUR_US)
}

/// Two trains, cleaned on the second and third day, that reach their limit some ten weeks later.
fn recipe(seed: u64) -> Recipe {
    let mut recipe = Recipe::plain(seed, Zone::named("Europe/London").unwrap(), at(0, 0), TRAINS);
    recipe.noise = Noise::usual();
    recipe.temperature = TemperatureRecipe { daily_sd_k: 0.3, ..TemperatureRecipe::steady(9.0) };
    for (n, train) in recipe.trains.iter_mut().enumerate() {
        train.rate_per_m_day = 0.9e10;
        train.wander_sd = 0.25;
        train.cold_effect = 0.25;
        train.r_chemical_per_m = 3e11;
        let clean = PlannedClean::by_procedure(at(1 + n as i64, 8), 0.96, &format!("c-{n}"));
        train.cleans.push(clean);
    }
    recipe
}

fn snap(recipe: &mut Recipe) {
    recipe.temperature.cold_snaps.push(ColdSnap {
        from: at(12, 0),
        depth_k: 6.0,
        fall_days: 4.0,
        stay_days: 5.0,
        rise_days: 5.0,
    });
}

fn area(recipe: &mut Recipe) {
    recipe.trains[0].faults.push(Fault::AreaLost(at(12, 0), 240.0));
}

/// The train's area with its date, as people would write it down.
fn area_told(text: String) -> String {
    let dated = "membrane_area = [{ from = \"2025-10-13\", area = \"4160 m2\" }, \
                 { from = \"2025-10-25\", area = \"3920 m2\" }]";
    text.replacen("membrane_area = \"4160 m2\"", dated, 1)
}

fn outage(_: usize, time: Instant, _: crate::runner::What, value: f64) -> Option<f64> {
    (!Span::new(at(12, 5), at(12, 7)).contains(time)).then_some(value)
}

struct Case {
    name: &'static str,
    change: fn(&mut Recipe),
    file: fn(String) -> String,
    tamper: Option<Tamper>,
}

fn same(text: String) -> String {
    text
}

const CASES: [Case; 4] = [
    Case { name: "cold snap, 9 to 3 degC in 4 d", change: snap, file: same, tamper: None },
    Case { name: "20 d after a clean, clocks set back", change: |_| {}, file: same, tamper: None },
    Case { name: "area told in the plant file", change: area, file: area_told, tamper: None },
    Case { name: "outage of 2 h", change: |_| {}, file: same, tamper: Some(outage) },
];

pub fn scores() -> Vec<Score> {
    let mut out = Vec::new();
    let mut busiest = 0;
    for case in &CASES {
        let mut raised = 0;
        for seed in SEEDS {
            let mut recipe = recipe(seed);
            (case.change)(&mut recipe);
            let mut runner = Runner::with_file(recipe, case.file);
            runner.tamper = case.tamper;
            runner.days(DAYS, &mut Nobody);
            for train in 0..TRAINS as usize {
                let after = at(2 + train as i64, 0);
                let cleans = runner.raised(train, Action::CleanInPlace);
                raised += cleans.iter().filter(|t| **t > after).count();
                busiest = busiest.max(runner.busiest_week(train, after));
            }
        }
        let cases = SEEDS.len() * TRAINS as usize;
        out.push(
            Score::new("no reason to clean", case.name, raised as f64, "cleans asked for", cases)
                .must(Within::AtMost(0.0)),
        );
    }
    let cases = CASES.len() * SEEDS.len() * TRAINS as usize;
    out.push(
        Score::new(
            "no reason to clean",
            "most recommendations of a train in a week",
            busiest as f64,
            "",
            cases,
        )
        .must(Within::AtMost(1.0)),
    );
    out
}
