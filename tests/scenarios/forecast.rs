//! Dates of the clean limit told one and two weeks ahead, over many runs whose rates wander.

use washbell::analysis::{Dates, LimitKind};
use washbell::base::{DAY_US, Instant, Zone};
use washbell::sim::{self, Noise, Recipe, TemperatureRecipe};

use crate::runner::{Closed, Listener, Runner};
use crate::score::{Dice, Score, Within, median, percent};

const SEEDS: [u64; 8] = [401, 402, 403, 404, 405, 406, 407, 408];
const TRAINS: u32 = 16;
const DAYS: i64 = 66;

fn start() -> Instant {
    Instant::parse("2026-03-02T00:00:00Z").unwrap()
}

fn recipe(seed: u64) -> Recipe {
    let mut recipe = Recipe::plain(seed, Zone::utc(), start(), TRAINS);
    recipe.noise = Noise::usual();
    recipe.temperature = TemperatureRecipe::steady(12.0);
    let mut dice = Dice(seed);
    for train in &mut recipe.trains {
        train.rate_per_m_day = dice.between(1.5e10, 2.6e10);
        train.wander_sd = 0.35;
    }
    recipe
}

/// A forecast, and what the two plain ones said at the same midnight.
#[derive(Clone, Copy)]
struct Told {
    at: Instant,
    dates: Dates,
    last_week: Option<f64>,
    since_clean: Option<f64>,
}

struct Notes(Vec<Vec<Told>>);

impl Listener for Notes {
    fn day(&mut self, closed: &Closed) {
        let Some(a) = closed.assessment else { return };
        let at = LimitKind::ALL.iter().position(|k| *k == LimitKind::LossClean).unwrap();
        let (Some(dates), Some(baseline)) = (a.dates[at], a.baseline) else { return };
        let limit = baseline.resistance_1_m / 0.7;
        let points: Vec<(f64, f64)> = closed
            .days
            .iter()
            .filter_map(|d| Some((d.end.days_since(a.as_of) - 0.5, d.resistance_1_m?)))
            .collect();
        self.0[closed.train].push(Told {
            at: a.as_of,
            dates,
            last_week: plain(&points[points.len().saturating_sub(7)..], limit),
            since_clean: plain(&points, limit),
        });
    }
}

/// Days until a least-squares line through the points reaches the limit.
fn plain(points: &[(f64, f64)], limit: f64) -> Option<f64> {
    let n = points.len() as f64;
    let (x, y) = points.iter().fold((0.0, 0.0), |(a, b), p| (a + p.0 / n, b + p.1 / n));
    let squares: f64 = points.iter().map(|p| (p.0 - x) * (p.0 - x)).sum();
    let products: f64 = points.iter().map(|p| (p.0 - x) * (p.1 - y)).sum();
    let slope = products / squares;
    (slope > 0.0).then(|| (limit - (y - slope * x)) / slope)
}

/// Errors of the forecasts of one lead, days; a date that was not told counts as 180 days off.
#[derive(Default)]
struct Errors {
    within: Vec<bool>,
    below: Vec<bool>,
    above: Vec<bool>,
    own: Vec<f64>,
    signed: Vec<f64>,
    last_week: Vec<f64>,
    since_clean: Vec<f64>,
    width: Vec<f64>,
}

impl Errors {
    fn add(&mut self, told: &Told, truth: Instant) {
        let days = |t: Option<Instant>| t.map_or(180.0, |t| t.days_since(told.at));
        let ahead = truth.days_since(told.at);
        let (p10, p50, p90) = (days(told.dates.p10), days(told.dates.p50), days(told.dates.p90));
        self.within.push((p10..=p90).contains(&ahead));
        self.below.push(ahead < p10);
        self.above.push(ahead > p90);
        self.own.push((p50 - ahead).abs());
        self.signed.push(p50 - ahead);
        self.width.push(p90 - p10);
        self.last_week.push((told.last_week.unwrap_or(180.0) - ahead).abs());
        self.since_clean.push((told.since_clean.unwrap_or(180.0) - ahead).abs());
    }
}

/// By the truth: told so many days before it. By the forecast: the first that said so many days.
#[derive(Default)]
struct Lead {
    by_truth: Errors,
    by_forecast: Errors,
}

pub fn scores() -> Vec<Score> {
    let leads = [7.0, 14.0];
    let mut errors = [Lead::default(), Lead::default()];
    let (mut runs, mut censored) = (0, 0);
    for seed in SEEDS {
        let mut runner = Runner::new(recipe(seed));
        runner.hourly = false;
        let mut notes = Notes(vec![Vec::new(); TRAINS as usize]);
        runner.days(DAYS, &mut notes);
        for (train, told) in notes.0.iter().enumerate() {
            let id = &runner.plant.trains[train].id;
            let mut all = runner.sim.crossings().iter();
            let crossing = all.find(|c| c.train == *id && c.limit == sim::LimitKind::LossClean);
            let Some(truth) = crossing.map(|c| c.first) else {
                censored += 1;
                continue;
            };
            runs += 1;
            for (days, lead) in leads.iter().zip(&mut errors) {
                let moment = truth.plus(-(days * DAY_US as f64) as i64);
                if let Some(t) = told.iter().rfind(|t| t.at <= moment) {
                    lead.by_truth.add(t, truth);
                }
                let says = |t: &&Told| {
                    t.dates.p50.is_some_and(|p| p.days_since(t.at) <= *days) && t.at < truth
                };
                // The first ten days of a run have hardly a trend.
                let mut old = told.iter().filter(|t| t.at.days_since(start()) >= 10.0);
                if let Some(t) = old.find(says) {
                    lead.by_forecast.add(t, truth);
                }
            }
        }
    }
    let mut out = vec![
        Score::new("forecast", "runs that reached the limit", f64::from(runs), "", runs as usize)
            .must(Within::AtLeast(60.0)),
        Score::new(
            "forecast",
            "runs that did not: left out",
            f64::from(censored),
            "",
            TRAINS as usize * SEEDS.len(),
        ),
    ];
    for (name, e) in [
        ("forecast 7 d before the crossing", &errors[0].by_truth),
        ("forecast 14 d before the crossing", &errors[1].by_truth),
        ("forecast that says 7 d", &errors[0].by_forecast),
        ("forecast that says 14 d", &errors[1].by_forecast),
    ] {
        out.extend(rows(name, e));
    }
    out
}

fn rows(name: &'static str, e: &Errors) -> Vec<Score> {
    let n = e.own.len();
    let of = |v: &[bool]| percent(v.iter().copied());
    let best_plain = median(&e.last_week).min(median(&e.since_clean));
    vec![
        Score::new(name, "80 % band held", of(&e.within), "%", n)
            .goal(Within::Between(70.0, 90.0))
            .bound(Within::Between(65.0, 95.0)),
        Score::new(name, "earlier than P10", of(&e.below), "%", n),
        Score::new(name, "later than P90", of(&e.above), "%", n),
        Score::new(name, "median error of P50", median(&e.own), "d", n)
            .goal(Within::AtMost(best_plain))
            .bound(Within::AtMost(1.25 * best_plain)),
        Score::new(name, "bias of P50", median(&e.signed), "d", n),
        Score::new(name, "median error, slope of the last week", median(&e.last_week), "d", n),
        Score::new(name, "median error, slope since the clean", median(&e.since_clean), "d", n),
        Score::new(name, "median width of the band", median(&e.width), "d", n),
    ]
}
