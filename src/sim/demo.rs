//! The plant of the demo: eight trains with five and a half months behind them, which stand at
//! a given end as a plant's trains do: one to clean this week, one to plan for, one overdue,
//! one well cleaned, one badly, three in good order.
//!
//! Only the fouling rate of each train is fitted to that, from what its wander, the season and
//! the feed will be; the plant's physics decides the rest, the dates after the end among it.

use super::clean::PlannedClean;
use super::plant::{course, feed_wander, train_streams};
use super::recipe::{ColdSnap, Dirt, FeedSpell, Noise, Recipe, TemperatureRecipe, TrainRecipe};
use super::rng::{Rng, Wander};
use super::train::RESTORED_SHARE;
use crate::base::{DAY_US, HOUR_US, Instant, MINUTE_US, Span, Zone};

/// Days of history before the end, the first cut to the plant's midnight.
const HISTORY_DAYS: i64 = 165;
/// Stream of chance of what the demo draws itself.
const DEMO: u64 = 5;

/// How a train came to stand where it stands.
struct Story {
    /// Days before the end of its cleans, oldest first; each begins at the next 07:00.
    cleaned: &'static [i64],
    /// Days from the clean before the data to the start.
    run_before: f64,
    /// The loss to be met, and how many days before the end; 0 for the end itself.
    loss: f64,
    loss_days_ago: i64,
    /// What nothing brings back, at the start, 1/m.
    irrecoverable: f64,
}

const fn story(
    cleaned: &'static [i64],
    run_before: f64,
    loss: f64,
    loss_days_ago: i64,
    irrecoverable: f64,
) -> Story {
    Story { cleaned, run_before, loss, loss_days_ago, irrecoverable }
}

const STORIES: [Story; 8] = [
    // Nothing needed.
    story(&[148, 92, 24], 38.0, 0.10, 0, 1.5e11),
    // Reaches its clean limit some five days after the end.
    story(&[146, 96, 47], 29.0, 0.280, 0, 1.7e11),
    // Cleaned two weeks ago and restored.
    story(&[134, 72, 14], 25.0, 0.285, 14, 1.3e11),
    // Past its advisory; reaches its clean limit some two weeks after the end.
    story(&[143, 91, 41], 27.0, 0.242, 0, 2.1e11),
    // Cleaned four days ago, cold and weak, and not restored.
    story(&[126, 60, 4], 16.0, 0.30, 4, 1.6e11),
    // Past its clean limit for a week and more.
    story(&[129, 66], 23.0, 0.325, 0, 1.9e11),
    // Nothing needed.
    story(&[154, 100, 31], 44.0, 0.12, 0, 1.4e11),
    story(&[113, 38], 18.0, 0.15, 0, 2.3e11),
];

/// The train (from 0) whose last clean is cold and weak, and what that clean takes off.
const WEAK_TRAIN: usize = 4;
const WEAK_REMOVES: f64 = 0.45;
/// The train and the clean (both from 0) that nobody wrote down.
const UNRECORDED: (usize, usize) = (6, 1);

/// The demo plant, with history up to `end` (seconds are cut off) and going on from there
/// without further cleans.
pub fn demo(seed: u64, end: Instant) -> Recipe {
    let end = end.plus(-end.micros().rem_euclid(MINUTE_US));
    let ago = |days: i64| end.plus(-days * DAY_US);
    let zone = Zone::named("Europe/London").unwrap_or_else(|_| Zone::utc());
    let start = zone.day(ago(HISTORY_DAYS)).from;

    let mut recipe = Recipe::plain(seed, zone, start, STORIES.len() as u32);
    recipe.noise = Noise::usual();
    recipe.dirt = Dirt::usual();
    recipe.temperature = TemperatureRecipe::seasonal();
    recipe.temperature.cold_snaps.push(ColdSnap {
        from: ago(74),
        depth_k: 4.5,
        fall_days: 3.0,
        stay_days: 4.0,
        rise_days: 6.0,
    });
    recipe.feed_wander_sd = 0.10;
    recipe.feed_spells.push(FeedSpell {
        span: Span::new(ago(121), ago(115)),
        alpha_factor: 1.6,
        rate_factor: 1.4,
        washed_back: 0.996,
    });

    let mut rng = Rng::stream(seed, DEMO);
    for (number, story) in STORIES.iter().enumerate() {
        let cleans = cleans(&recipe, story, number, &mut rng, ago);
        let Some(train) = recipe.trains.get_mut(number) else { continue };
        train.r_irrecoverable_per_m = story.irrecoverable;
        train.alpha_per_m2 = rng.between(7e12, 9e12);
        train.tmp_offset_pa = rng.between(-300.0, 300.0);
        train.wander_sd = 0.20;
        train.cold_effect = 0.25;
        train.flux_effect = 2.0;
        train.cleans = cleans;
        let residue = train.r_chemical_per_m;
        train.after_clean_per_m = train.r_membrane_per_m + train.r_irrecoverable_per_m + residue;
        train.after_clean_from = start.plus(-(story.run_before * DAY_US as f64) as i64);
        fit_rate(&mut recipe, story, number, end);
    }
    for (number, days_ago, hours) in [(7, 85, 46), (0, 60, 9), (2, 30, 6)] {
        if let Some(train) = recipe.trains.get_mut(number) {
            train.standby.push(Span::new(ago(days_ago), ago(days_ago).plus(hours * HOUR_US)));
        }
    }
    recipe
}

fn cleans(
    recipe: &Recipe,
    story: &Story,
    number: usize,
    rng: &mut Rng,
    ago: impl Fn(i64) -> Instant,
) -> Vec<PlannedClean> {
    let mut cleans = Vec::new();
    for (nth, days_ago) in story.cleaned.iter().enumerate() {
        let start = recipe.zone.next_clock(ago(*days_ago), 7, 0);
        let reference = format!("{}-uf-{}-clean-{}", recipe.plant_id, number + 1, nth + 1);
        let removes = rng.between(0.94, 0.97);
        let last = nth + 1 == story.cleaned.len();
        let mut clean = if number == WEAK_TRAIN && last {
            PlannedClean::cold_and_weak(start, WEAK_REMOVES, &reference)
        } else {
            PlannedClean::by_procedure(start, removes, &reference)
        };
        clean.irrecoverable_per_m = rng.between(3e9, 8e9);
        clean.recorded = (number, nth) != UNRECORDED;
        cleans.push(clean);
    }
    cleans
}

/// Finds the rate with which the train meets its story's loss, and with it what the run before
/// the start has left on the membrane.
fn fit_rate(recipe: &mut Recipe, story: &Story, number: usize, end: Instant) {
    let start = recipe.start;
    let Some(train) = recipe.trains.get(number) else { return };
    let growth = Growth::new(recipe, train, number, end);
    let loss = |rate: f64| {
        let mut r_chemical = train.r_chemical_per_m + rate * story.run_before * growth.uptime;
        let mut fixed = train.r_membrane_per_m + train.r_irrecoverable_per_m;
        let (mut best, mut baseline) = (train.after_clean_per_m, train.after_clean_per_m);
        let mut from = start;
        for (clean, days_ago) in train.cleans.iter().zip(story.cleaned) {
            r_chemical += rate * growth.between(from, clean.start);
            if *days_ago == story.loss_days_ago {
                return 1.0 - baseline / (fixed + r_chemical);
            }
            r_chemical *= 1.0 - clean.steps.iter().map(|s| s.removes).sum::<f64>();
            fixed += clean.irrecoverable_per_m;
            let after = fixed + r_chemical;
            best = f64::min(best, after);
            if best / after >= RESTORED_SHARE {
                baseline = after;
            }
            from = clean.end();
        }
        r_chemical += rate * growth.between(from, end);
        1.0 - baseline / (fixed + r_chemical)
    };
    let (mut low, mut high) = (1e9, 4e10);
    for _ in 0..40 {
        let middle = 0.5 * (low + high);
        if loss(middle) < story.loss { low = middle } else { high = middle }
    }
    let before = low * story.run_before * growth.uptime;
    if let Some(train) = recipe.trains.get_mut(number) {
        train.rate_per_m_day = low;
        train.r_chemical_per_m += before;
    }
}

/// What the rate of a train will be multiplied by, summed up from the start, in days of
/// filtration, hour by hour.
struct Growth {
    start: Instant,
    by_hour: Vec<f64>,
    uptime: f64,
}

impl Growth {
    fn new(recipe: &Recipe, train: &TrainRecipe, number: usize, end: Instant) -> Self {
        let routine = &recipe.routine;
        let cycle = routine.cycle_us as f64 / (routine.cycle_us + routine.backwash_us) as f64;
        let share = |often: Option<(i64, i64)>| often.map_or(0.0, |(e, t)| t as f64 / e as f64);
        let uptime =
            cycle * (1.0 - share(routine.chemical_backwash) - share(routine.integrity_test));

        let mut wander =
            Wander::new(Rng::stream(recipe.seed, train_streams(number)), train.wander_sd);
        let (mut feed, mut water) = (feed_wander(recipe), course(recipe.seed));
        let mut sum = 0.0;
        let mut by_hour = vec![0.0];
        for hour in 0..end.since(recipe.start) / HOUR_US + 1 {
            let at = recipe.start.plus(hour * HOUR_US);
            let cold = (20.0 - water.at(&recipe.temperature, recipe.start, at)) / 15.0;
            let spells = recipe.feed_spells.iter().filter(|s| s.span.contains(at));
            let factor = wander.factor(hour / 24)
                * feed.factor(hour / 24)
                * spells.map(|s| s.rate_factor).product::<f64>()
                * (1.0 + train.cold_effect * cold);
            sum += factor * uptime / 24.0;
            by_hour.push(sum);
        }
        Self { start: recipe.start, by_hour, uptime }
    }

    fn between(&self, from: Instant, to: Instant) -> f64 {
        let at = |t: Instant| {
            let hour = usize::try_from(t.since(self.start) / HOUR_US).unwrap_or(0);
            self.by_hour.get(hour).or(self.by_hour.last()).copied().unwrap_or(0.0)
        };
        at(to) - at(from)
    }
}
