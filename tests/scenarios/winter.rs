//! The TMP limit in water that cools: with the outlook's temperatures and without them.

use washbell::analysis::{Dates, LimitKind};
use washbell::base::{DAY_US, Instant, Zone};
use washbell::plant::HoldLimit;
use washbell::sim::{self, Noise, Recipe, TemperatureRecipe};

use crate::runner::{Closed, Listener, Runner};
use crate::score::{Dice, Score, Within, median, percent};

const SEEDS: [u64; 5] = [601, 602, 603, 604, 605];
const TRAINS: u32 = 3;
const DAYS: i64 = 100;
const LEADS: [i64; 2] = [14, 28];

fn start() -> Instant {
    Instant::parse("2025-10-06T00:00:00Z").unwrap()
}

fn recipe(seed: u64) -> Recipe {
    let mut recipe = Recipe::plain(seed, Zone::utc(), start(), TRAINS);
    recipe.noise = Noise::usual();
    recipe.temperature = TemperatureRecipe::seasonal();
    recipe.limits.tmp_pa = HoldLimit { advisory: 0.45e5, clean: 0.55e5 };
    let mut dice = Dice(seed);
    for train in &mut recipe.trains {
        train.rate_per_m_day = dice.between(4e9, 7e9);
        train.wander_sd = 0.35;
        train.cold_effect = 0.25;
    }
    recipe
}

struct Notes(Vec<Vec<(Instant, Option<Dates>)>>);

impl Listener for Notes {
    fn day(&mut self, closed: &Closed) {
        let Some(a) = closed.assessment else { return };
        let at = LimitKind::ALL.iter().position(|k| *k == LimitKind::TmpClean).unwrap();
        self.0[closed.train].push((a.as_of, a.dates[at]));
    }
}

/// Errors of P50, and whether the band held, of the forecasts of each lead.
fn run(file: fn(String) -> String) -> [Vec<(f64, bool)>; 2] {
    let mut out = [Vec::new(), Vec::new()];
    for seed in SEEDS {
        let mut runner = Runner::with_file(recipe(seed), file);
        runner.hourly = false;
        let mut notes = Notes(vec![Vec::new(); TRAINS as usize]);
        runner.days(DAYS, &mut notes);
        for (train, told) in notes.0.iter().enumerate() {
            let id = &runner.plant.trains[train].id;
            let mut all = runner.sim.crossings().iter();
            let crossing = all.find(|c| c.train == *id && c.limit == sim::LimitKind::TmpClean);
            let Some(truth) = crossing.map(|c| c.first) else { continue };
            for (lead, out) in LEADS.iter().zip(&mut out) {
                let moment = truth.plus(-lead * DAY_US);
                let Some((at, Some(d))) = told.iter().rfind(|t| t.0 <= moment) else { continue };
                let days = |t: Option<Instant>| t.map_or(180.0, |t| t.days_since(*at));
                let ahead = truth.days_since(*at);
                out.push((days(d.p50) - ahead, (days(d.p10)..=days(d.p90)).contains(&ahead)));
            }
        }
    }
    out
}

fn without_outlook(text: String) -> String {
    text.split("\n[outlook]").next().unwrap_or_default().to_owned()
}

pub fn scores() -> Vec<Score> {
    let (with, without) = (run(|t| t), run(without_outlook));
    let w = "TMP limit in a cooling winter";
    let size = |v: &[(f64, bool)]| median(&v.iter().map(|e| e.0.abs()).collect::<Vec<_>>());
    let bias = |v: &[(f64, bool)]| median(&v.iter().map(|e| e.0).collect::<Vec<_>>());
    let mut out = Vec::new();
    for (k, lead) in LEADS.iter().enumerate() {
        let n = with[k].len();
        let held = percent(with[k].iter().map(|e| e.1));
        let blind = size(&without[k]);
        out.push(
            Score::new(w, &format!("{lead} d ahead, median error of P50"), size(&with[k]), "d", n)
                .must(Within::AtMost(blind)),
        );
        out.push(Score::new(w, &format!("{lead} d ahead, bias of P50"), bias(&with[k]), "d", n));
        out.push(Score::new(w, &format!("{lead} d ahead, without an outlook"), blind, "d", n));
        out.push(
            Score::new(w, &format!("{lead} d ahead, 80 % band held"), held, "%", n)
                .goal(Within::Between(70.0, 90.0)),
        );
    }
    out
}
