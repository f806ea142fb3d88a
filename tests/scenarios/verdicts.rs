//! Cleans of every worth: is each judged for what it was?

use washbell::analysis::Verdict;
use washbell::base::{DAY_US, HOUR_US, Instant, Zone};
use washbell::sim::{Noise, PlannedClean, Recipe, TemperatureRecipe};

use crate::runner::{Nobody, Runner};
use crate::score::{Dice, Score, Within, percent, quantile};

const SEEDS: [u64; 5] = [501, 502, 503, 504, 505];
const TRAINS: u32 = 10;
const DAYS: i64 = 9;
/// Truths this close to a boundary, share of permeability, may be judged either way: the
/// verdict's own day of fouling is 0.8 points.
const CLOSE: f64 = 0.015;

fn start() -> Instant {
    Instant::parse("2026-03-02T00:00:00Z").unwrap()
}

/// Trains at some 30 % of loss, each with a clean that takes off another share.
fn recipe(seed: u64) -> Recipe {
    let mut recipe = Recipe::plain(seed, Zone::utc(), start(), TRAINS);
    recipe.noise = Noise::usual();
    recipe.temperature = TemperatureRecipe::seasonal();
    let mut dice = Dice(seed);
    for (n, train) in recipe.trains.iter_mut().enumerate() {
        train.wander_sd = 0.35;
        train.r_chemical_per_m = 6.5e11;
        // In turn well, partly and badly done.
        let removes = match n % 3 {
            0 => dice.between(0.93, 0.98),
            1 => dice.between(0.66, 0.88),
            _ => dice.between(0.25, 0.55),
        };
        let at = start().plus((2 * 24 + 7 + 9 * n as i64) * HOUR_US);
        train.cleans.push(PlannedClean::by_procedure(at, removes, &format!("c-{n}")));
        train.cleans.last_mut().unwrap().recorded = n % 2 == 0;
    }
    recipe
}

fn worth(share: f64) -> Verdict {
    match share {
        s if s >= 0.95 => Verdict::Restored,
        s if s >= 0.85 => Verdict::PartlyRestored,
        _ => Verdict::NotRestored,
    }
}

pub fn scores() -> Vec<Score> {
    let mut right: Vec<(Verdict, bool, bool)> = Vec::new();
    let (mut known, mut missing) = (Vec::new(), 0);
    for seed in SEEDS {
        let mut runner = Runner::new(recipe(seed));
        runner.days(DAYS, &mut Nobody);
        for clean in runner.sim.cleans_done() {
            let train = runner.plant.trains.iter().position(|t| t.id == clean.train).unwrap();
            let share = clean.best_per_m / clean.after_per_m;
            let close = (share - 0.95).abs() < CLOSE || (share - 0.85).abs() < CLOSE;
            // The end of the data may come before the verdict.
            if runner.sim.next_minute().since(clean.end) < 5 * DAY_US / 2 {
                continue;
            }
            let run =
                runner.runs(train).iter().find(|r| (r.start.since(clean.end)).abs() < HOUR_US);
            let judged = run.and_then(|r| r.verdict_known.map(|k| (k, r.verdict)));
            match judged {
                Some((at, verdict)) => {
                    known.push(at.seconds_since(clean.end) / 3600.0);
                    right.push((worth(share), close, verdict == worth(share)));
                }
                None => missing += 1,
            }
        }
    }
    let w = "verdict on a clean";
    let clear: Vec<bool> = right.iter().filter(|r| !r.1).map(|r| r.2).collect();
    let mut out = vec![
        Score::new(w, "not judged", f64::from(missing), "of them", right.len())
            .must(Within::AtMost(0.0)),
        Score::new(w, "known after, at most", quantile(&known, 1.0), "h", known.len())
            .must(Within::AtMost(50.0)),
        Score::new(w, "wrong, all", 100.0 - percent(right.iter().map(|r| r.2)), "%", right.len()),
        Score::new(
            w,
            "wrong, more than 1.5 points from a boundary",
            100.0 - percent(clear.iter().copied()),
            "%",
            clear.len(),
        )
        .must(Within::AtMost(0.0)),
    ];
    for verdict in [Verdict::Restored, Verdict::PartlyRestored, Verdict::NotRestored] {
        let of: Vec<bool> = right.iter().filter(|r| r.0 == verdict).map(|r| r.2).collect();
        let name = format!("judged right, truly {}", verdict.code());
        out.push(Score::new(w, &name, percent(of.iter().copied()), "%", of.len()));
    }
    out
}
