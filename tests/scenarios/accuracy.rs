//! Hourly permeability, the start of cycle and the loss, held against the truth.

use washbell::base::{DAY_US, Instant, Zone};
use washbell::plant::Phase;
use washbell::sim::{self, Noise, PlannedClean, Recipe, TemperatureRecipe, TrainTruth};

use crate::runner::{Closed, Listener, Runner, Seen};
use crate::score::{Score, Within, median, quantile};

const SEEDS: [u64; 5] = [101, 102, 103, 104, 105];
const DAYS: i64 = 14;

fn start() -> Instant {
    Instant::parse("2025-11-03T00:00:00Z").unwrap()
}

/// Two trains that foul, in water that cools.
fn recipe(seed: u64, noise: Noise) -> Recipe {
    let mut recipe = Recipe::plain(seed, Zone::utc(), start(), 2);
    recipe.noise = noise;
    recipe.temperature = TemperatureRecipe::seasonal();
    for train in &mut recipe.trains {
        train.wander_sd = 0.2;
        train.cold_effect = 0.25;
    }
    // The second one has run for a month and is cleaned, so that a measured baseline counts too.
    recipe.trains[1].r_chemical_per_m = 4.2e11;
    let clean = PlannedClean::by_procedure(start().plus(2 * DAY_US), 0.96, "c-1");
    recipe.trains[1].cleans.push(clean);
    recipe
}

/// Errors, in per cent and in points.
#[derive(Default)]
struct Errors {
    permeability: Vec<f64>,
    start: Vec<f64>,
    day: Vec<f64>,
    loss_stated: Vec<f64>,
    loss_measured: Vec<f64>,
}

impl Listener for Errors {
    fn hour(&mut self, seen: &Seen) {
        if let (Some(steady), Some(truth)) =
            (seen.hour.and_then(|h| h.steady), hourly_resistance(seen.truths))
        {
            // Permeability goes with one over resistance.
            self.permeability.push(100.0 * (truth / steady.resistance_1_m - 1.0).abs());
        }
        let fresh = seen.standing.loss.filter(|l| Some(l.hour) == seen.hour.map(|h| h.start));
        if let (Some(loss), Some(last)) = (fresh, seen.truths.last()) {
            let error = 100.0 * (loss.share - last.loss());
            let own = seen
                .standing
                .baseline
                .is_some_and(|b| b.kind == washbell::analysis::BaselineKind::AfterClean);
            if own { &mut self.loss_measured } else { &mut self.loss_stated }.push(error);
        }
    }

    fn day(&mut self, closed: &Closed) {
        for cycle in &closed.rows.cycles {
            let truth = closed.truths.iter().find(|t| t.at == cycle.start);
            if let (Some(r), Some(truth)) = (cycle.start_resistance_1_m, truth) {
                self.start.push(100.0 * (r / truth.start_of_cycle_per_m - 1.0));
            }
        }
        let starts: Vec<f64> = starts(closed.truths);
        if let Some(r) = closed.rows.day.as_ref().and_then(|d| d.resistance_1_m) {
            self.day.push(100.0 * (r / median(&starts) - 1.0));
        }
    }
}

/// Median resistance over the minutes of filtration after the fifth of each cycle, when flow has
/// been steady for long enough to count, from signals without noise and with the plant's own
/// viscosity, 1/m.
fn hourly_resistance(truths: &[TrainTruth]) -> Option<f64> {
    let settled_m = 5.0 * 60.0 * 59.0 / 3.6e6;
    let values: Vec<f64> = truths
        .iter()
        .filter(|t| t.phase == Phase::Filtration && t.cycle_volume_m > settled_m)
        .map(|t| t.tmp_pa / (sim::viscosity_pa_s(t.temperature_degc) * t.flux_m_s))
        .collect();
    (!values.is_empty()).then(|| median(&values))
}

fn starts(truths: &[TrainTruth]) -> Vec<f64> {
    let mut out: Vec<f64> = truths.iter().map(|t| t.start_of_cycle_per_m).collect();
    out.dedup();
    out
}

fn run(noise: Noise, rounded: bool) -> Errors {
    let mut errors = Errors::default();
    for seed in SEEDS {
        let mut runner = Runner::new(recipe(seed, noise));
        runner.rounded = rounded;
        runner.days(DAYS, &mut errors);
    }
    errors
}

fn size(values: &[f64]) -> Vec<f64> {
    values.iter().map(|v| v.abs()).collect()
}

pub fn scores() -> Vec<Score> {
    let quiet = Noise { pressure_pa: 0.0, flow_share: 0.0, temperature_k: 0.0 };
    let exact = run(quiet, false);
    let real = run(Noise::usual(), true);
    let p = "hourly permeability";
    let s = "start-of-cycle resistance";
    let l = "loss at the hour";
    let (n, starts) = (real.permeability.len(), real.start.len());
    vec![
        Score::new(p, "median error", median(&real.permeability), "%", n).must(Within::AtMost(0.5)),
        Score::new(p, "95th percentile of the error", quantile(&real.permeability, 0.95), "%", n)
            .must(Within::AtMost(1.5)),
        Score::new(p, "95th percentile, noise-free", quantile(&exact.permeability, 0.95), "%", n)
            .must(Within::AtMost(0.3)),
        Score::new(s, "bias, noise-free", median(&exact.start), "%", exact.start.len())
            .must(Within::Between(-0.3, 0.3)),
        Score::new(s, "bias", median(&real.start), "%", starts).must(Within::Between(-0.3, 0.3)),
        Score::new(s, "half of the cycles within", median(&size(&real.start)), "%", starts),
        Score::new(s, "95 % of the cycles within", quantile(&size(&real.start), 0.95), "%", starts),
        Score::new(
            s,
            "95 % of the days within",
            quantile(&size(&real.day), 0.95),
            "%",
            real.day.len(),
        )
        .must(Within::AtMost(1.0)),
        Score::new(
            l,
            "bias, baseline stated",
            median(&real.loss_stated),
            "points",
            real.loss_stated.len(),
        )
        .must(Within::Between(-0.3, 0.3)),
        Score::new(
            l,
            "bias, baseline measured",
            median(&real.loss_measured),
            "points",
            real.loss_measured.len(),
        ),
        Score::new(
            l,
            "bias, baseline measured, noise-free",
            median(&exact.loss_measured),
            "points",
            exact.loss_measured.len(),
        ),
        Score::new(
            l,
            "95 % of the hours within",
            quantile(&size(&real.loss_stated), 0.95),
            "points",
            real.loss_stated.len(),
        ),
    ]
}
