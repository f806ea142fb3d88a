//! Trains that foul until their clean limit: is the clean asked for in time, and not long before?

use washbell::advice::{Action, Urgency};
use washbell::analysis::LimitKind;
use washbell::base::{DAY_US, HOUR_US, Instant, Zone};
use washbell::sim::{self, Noise, PlannedClean, Recipe, TemperatureRecipe};

use crate::runner::{Listener, Runner, Seen};
use crate::score::{Dice, Score, Within, median, quantile};

const SEEDS: [u64; 5] = [201, 202, 203, 204, 205];
const TRAINS: u32 = 6;
const DAYS: i64 = 52;

fn start() -> Instant {
    Instant::parse("2026-02-02T00:00:00Z").unwrap()
}

fn recipe(seed: u64) -> Recipe {
    let mut recipe = Recipe::plain(seed, Zone::named("Europe/London").unwrap(), start(), TRAINS);
    recipe.noise = Noise::usual();
    recipe.temperature = TemperatureRecipe::seasonal();
    let mut dice = Dice(seed);
    for (n, train) in recipe.trains.iter_mut().enumerate() {
        train.rate_per_m_day = dice.between(1.6e10, 2.6e10);
        train.wander_sd = 0.35;
        // Half of them are cleaned first, so that their baseline is a measured one.
        if n % 2 == 1 {
            train.r_chemical_per_m = 5e11;
            let at = start().plus(DAY_US + (7 + n as i64) * HOUR_US);
            train.cleans.push(PlannedClean::by_procedure(at, 0.96, &format!("c-{n}")));
        }
    }
    recipe
}

/// When a limit first held by the analysis, and the true loss at each hour's end.
struct Heard {
    held: Vec<Option<Instant>>,
    loss: Vec<Vec<(Instant, f64)>>,
}

impl Listener for Heard {
    fn hour(&mut self, seen: &Seen) {
        let hold = seen.standing.hold(LimitKind::LossClean);
        if seen.standing.run_start.is_some() || seen.train.is_multiple_of(2) {
            self.held[seen.train] = self.held[seen.train].or(hold.held);
        }
        if let Some(t) = seen.truths.last() {
            self.loss[seen.train].push((seen.at, t.loss()));
        }
    }
}

pub fn scores() -> Vec<Score> {
    let (mut late, mut lead, mut shift_lead) = (0, vec![], vec![]);
    // With a stated and with a measured baseline.
    let mut held_lag = [vec![], vec![]];
    let (mut flips, mut busiest) = (0, 0);
    let mut crossed = 0;
    for seed in SEEDS {
        let mut runner = Runner::new(recipe(seed));
        let n = TRAINS as usize;
        let mut heard = Heard { held: vec![None; n], loss: vec![Vec::new(); n] };
        runner.days(DAYS, &mut heard);
        for train in 0..n {
            let id = &runner.plant.trains[train].id;
            let crossing = runner.sim.crossings().iter().filter(|c| c.train == *id).find(|c| {
                c.limit == sim::LimitKind::LossClean && c.first > start().plus(5 * DAY_US)
            });
            let Some(crossing) = crossing else { continue };
            crossed += 1;
            let on_delay = runner.plant.trains[train].limits.on_delay_us;
            let point = heard.loss[train]
                .iter()
                .find(|(at, loss)| *at >= crossing.first && *loss >= 0.31)
                .map_or(crossing.first, |(at, _)| *at);
            let due = crossing.first.plus(DAY_US + on_delay).max(point);
            let raised: Vec<Instant> = runner
                .raised(train, Action::CleanInPlace)
                .into_iter()
                .filter(|at| *at > start().plus(4 * DAY_US))
                .collect();
            busiest = busiest.max(runner.busiest_week(train, start().plus(4 * DAY_US)));
            flips += raised.len().saturating_sub(1);
            match raised.iter().rfind(|at| **at <= due) {
                Some(at) => lead.push(crossing.first.days_since(*at)),
                None => late += 1,
            }
            let shift = runner.said.iter().find(|s| {
                s.train == train
                    && s.at > start().plus(4 * DAY_US)
                    && s.action == Action::CleanInPlace
                    && s.urgency == Urgency::ThisShift
            });
            shift_lead
                .push(shift.map_or(f64::NAN, |s| crossing.first.seconds_since(s.at) / 3600.0));
            if let Some(held) = heard.held[train] {
                held_lag[train % 2].push(held.seconds_since(crossing.held) / 3600.0);
            }
        }
    }
    let early = shift_lead.iter().filter(|h| **h > 48.0).count();
    let w = "clean limit";
    vec![
        Score::new(w, "asked for too late", f64::from(late), "of them", crossed)
            .must(Within::AtMost(0.0)),
        Score::new(w, "lead, shortest", quantile(&lead, 0.0), "d", lead.len()),
        Score::new(w, "lead, median", median(&lead), "d", lead.len()),
        Score::new(w, "lead, longest", quantile(&lead, 1.0), "d", lead.len()),
        Score::new(w, "raised again within a run", flips as f64, "times", crossed),
        Score::new(w, "this_shift before the crossing, median", median(&shift_lead), "h", crossed),
        Score::new(
            w,
            "this_shift before the crossing, most",
            quantile(&shift_lead, 1.0),
            "h",
            crossed,
        ),
        Score::new(w, "this_shift more than 48 h before", early as f64, "of them", crossed)
            .goal(Within::AtMost(0.0)),
        Score::new(w, "most recommendations of a train in a week", busiest as f64, "", crossed)
            .goal(Within::AtMost(1.0)),
        held(w, "held after it truly had, baseline stated, median", &held_lag[0], 0.5)
            .must(Within::AtMost(30.0)),
        held(w, "held after it truly had, baseline stated, least", &held_lag[0], 0.0),
        held(w, "held after it truly had, baseline stated, most", &held_lag[0], 1.0),
        held(w, "held after it truly had, baseline measured, median", &held_lag[1], 0.5),
    ]
}

fn held(what: &'static str, measure: &str, lags: &[f64], share: f64) -> Score {
    Score::new(what, measure, quantile(lags, share), "h", lags.len())
}
