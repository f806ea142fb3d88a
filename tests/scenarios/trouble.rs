//! Instruments that fail: no hour may show a number that it has no right to.

use washbell::analysis::{Hour, Quality, Reason};
use washbell::base::{HOUR_US, Instant, Span, Zone};
use washbell::sim::{Fault, Noise, Recipe, Sensor, SensorFault, Wrong};

use crate::runner::{Listener, Runner, Seen, Tamper, What};
use crate::score::{Score, Within};

const SEEDS: [u64; 5] = [701, 702, 703, 704, 705];

fn at(hour: i64) -> Instant {
    Instant::parse("2026-03-02T00:00:00Z").unwrap().plus(hour * HOUR_US)
}

/// Six hours from 10:00 of the second day.
fn spell() -> Span {
    Span::new(at(34), at(40))
}

fn recipe(seed: u64) -> Recipe {
    let mut recipe = Recipe::plain(seed, Zone::utc(), at(0), 1);
    recipe.noise = Noise::usual();
    recipe
}

fn without(gone: What, what: What, time: Instant, value: f64) -> Option<f64> {
    (what != gone || !spell().contains(time)).then_some(value)
}

fn no_thermometer(_: usize, time: Instant, what: What, value: f64) -> Option<f64> {
    without(What::Temperature, what, time, value)
}

fn no_flow(_: usize, time: Instant, what: What, value: f64) -> Option<f64> {
    without(What::Flow, what, time, value)
}

fn no_pressure(_: usize, time: Instant, what: What, value: f64) -> Option<f64> {
    without(What::PermeatePressure, what, time, value)
}

fn unknown_code(_: usize, time: Instant, what: What, value: f64) -> Option<f64> {
    Some(if what == What::State && spell().contains(time) { 17.0 } else { value })
}

fn wrong(sensor: Sensor, wrong: Wrong) -> Fault {
    Fault::Sensor(SensorFault { sensor, span: spell(), wrong })
}

struct Case {
    name: &'static str,
    fault: Option<fn() -> Fault>,
    tamper: Option<Tamper>,
    reason: Reason,
}

const CASES: [Case; 8] = [
    Case {
        name: "thermometer missing",
        fault: None,
        tamper: Some(no_thermometer),
        reason: Reason::NoTemperature,
    },
    Case { name: "flow missing", fault: None, tamper: Some(no_flow), reason: Reason::NoFlow },
    Case {
        name: "permeate pressure missing",
        fault: None,
        tamper: Some(no_pressure),
        reason: Reason::NoPressure,
    },
    Case {
        name: "state code not named",
        fault: None,
        tamper: Some(unknown_code),
        reason: Reason::UnknownState,
    },
    Case {
        name: "TMP under the floor",
        fault: Some(|| wrong(Sensor::FeedPressure, Wrong::Offset(-28_500.0))),
        tamper: None,
        reason: Reason::TmpUnderFloor,
    },
    Case {
        name: "flow frozen",
        fault: Some(|| wrong(Sensor::PermeateFlow, Wrong::Frozen)),
        tamper: None,
        reason: Reason::Frozen,
    },
    Case {
        name: "feed pressure frozen",
        fault: Some(|| wrong(Sensor::FeedPressure, Wrong::Frozen)),
        tamper: None,
        reason: Reason::Frozen,
    },
    Case {
        name: "permeate pressure frozen",
        fault: Some(|| wrong(Sensor::PermeatePressure, Wrong::Frozen)),
        tamper: None,
        reason: Reason::Frozen,
    },
];

#[derive(Default)]
struct Hours(Vec<Hour>);

impl Listener for Hours {
    fn hour(&mut self, seen: &Seen) {
        self.0.extend(seen.hour.cloned());
    }
}

pub fn scores() -> Vec<Score> {
    let mut out = Vec::new();
    let mut spoilt = 0;
    let mut others = 0;
    for case in &CASES {
        let (mut silent, mut of) = (0, 0);
        for seed in SEEDS {
            let mut recipe = recipe(seed);
            recipe.trains[0].faults.extend(case.fault.map(|f| f()));
            let mut runner = Runner::new(recipe);
            runner.tamper = case.tamper;
            let mut hours = Hours::default();
            runner.days(3, &mut hours);
            for hour in &hours.0 {
                let told = hour.quality != Quality::Good && hour.reasons.contains(&case.reason);
                if spell().contains(hour.start) {
                    of += 1;
                    silent += usize::from(!told);
                } else if hour.start >= spell().to.plus(HOUR_US) {
                    others += 1;
                    spoilt += usize::from(hour.quality != Quality::Good);
                }
            }
        }
        out.push(
            Score::new("6 h of trouble", case.name, silent as f64, "hours not told", of)
                .must(Within::AtMost(0.0)),
        );
    }
    out.push(
        Score::new("6 h of trouble", "hours after it that are not good", spoilt as f64, "", others)
            .must(Within::AtMost(0.0)),
    );
    out
}
