//! The plant as it runs, minute by minute, forward only: months need no memory.

use super::export::Writer;
use super::meter::{Meters, TrainRow};
use super::recipe::Recipe;
use super::rng::{Rng, Wander};
use super::train::{Events, Site, Train};
use super::truth::{CleanTruth, Crossing, TrainTruth};
use super::water::{Course, Thermometer, viscosity_pa_s};
use crate::base::{DAY_US, Instant, MINUTE_US};

/// What the instruments of the plant show at one minute.
#[derive(Clone, Debug, PartialEq)]
pub struct Row {
    /// When.
    pub at: Instant,
    /// The one thermometer, degrees Celsius.
    pub temperature_degc: f64,
    /// Trains, in the recipe's order.
    pub trains: Vec<TrainRow>,
}

/// A running plant.
#[derive(Clone, Debug)]
pub struct Simulation {
    recipe: Recipe,
    /// Moment of the next row.
    next: Instant,
    row: Row,
    truths: Vec<TrainTruth>,
    trains: Vec<Train>,
    meters: Vec<Meters>,
    events: Events,
    course: Course,
    thermometer: Thermometer,
    feed: Wander,
    feed_day: (i64, f64),
    writer: Writer,
}

/// Numbers of the streams of chance. Each train has eight from `TRAINS` on.
const COURSE: u64 = 1;
const THERMOMETER: u64 = 2;
const FEED: u64 = 3;
const WRITER: u64 = 4;
const TRAINS: u64 = 64;
const STREAMS_A_TRAIN: u64 = 8;

/// The plant's temperature course, as the simulation will draw it.
pub(super) fn course(seed: u64) -> Course {
    Course::new(Rng::stream(seed, COURSE))
}

/// The wander that all trains share, as the simulation will draw it.
pub(super) fn feed_wander(recipe: &Recipe) -> Wander {
    Wander::new(Rng::stream(recipe.seed, FEED), recipe.feed_wander_sd)
}

/// First stream of a train, which is its wander's.
pub(super) fn train_streams(number: usize) -> u64 {
    TRAINS + STREAMS_A_TRAIN * number as u64
}

impl Simulation {
    /// The plant at its first minute. Cleans, times of standby and fluxes are put in order;
    /// those before the start are taken as past.
    pub fn new(mut recipe: Recipe) -> Self {
        recipe.start = recipe.start.plus(-recipe.start.micros().rem_euclid(MINUTE_US));
        recipe.flux_m_s.sort_by_key(|f| f.from);
        for train in &mut recipe.trains {
            train.cleans.sort_by_key(|c| c.start);
            train.standby.sort_by_key(|s| s.from);
        }
        let numbered = || recipe.trains.iter().enumerate();
        let trains = numbered().map(|(n, t)| Train::new(&recipe, t, n, train_streams(n))).collect();
        let meters = numbered()
            .map(|(n, t)| Meters::new(t, Rng::stream(recipe.seed, train_streams(n) + 2)))
            .collect();
        Self {
            next: recipe.start,
            row: Row { at: recipe.start, temperature_degc: 0.0, trains: Vec::new() },
            truths: Vec::new(),
            trains,
            meters,
            events: Events::default(),
            course: course(recipe.seed),
            thermometer: Thermometer::new(Rng::stream(recipe.seed, THERMOMETER)),
            feed: feed_wander(&recipe),
            feed_day: (-1, 1.0),
            writer: Writer::new(Rng::stream(recipe.seed, WRITER)),
            recipe,
        }
    }

    /// What it is made of, its lists in order.
    pub fn recipe(&self) -> &Recipe {
        &self.recipe
    }

    /// Moment of the row that [`step_minute`](Self::step_minute) gives next.
    pub fn next_minute(&self) -> Instant {
        self.next
    }

    /// Goes on by a minute and gives the row of it; the first is that of the start itself.
    pub fn step_minute(&mut self) -> &Row {
        let at = self.next;
        let site = self.site(at);
        self.row.at = at;
        let faults = &self.recipe.temperature.faults;
        let noise = &self.recipe.noise;
        self.row.temperature_degc =
            self.thermometer.read(site.temperature_degc, noise.temperature_k, faults, at);
        self.row.trains.clear();
        self.truths.clear();
        let pairs = self.trains.iter_mut().zip(&mut self.meters).zip(&self.recipe.trains);
        for ((train, meters), recipe) in pairs {
            train.advance(recipe, &site, at, &mut self.events);
            let truth = train.truth(recipe, &site);
            let row = meters.read(&truth, train.area_m2(recipe), train.phase_age_s(), noise);
            self.truths.push(truth);
            self.row.trains.push(row);
        }
        self.next = at.plus(MINUTE_US);
        &self.row
    }

    /// Writes the rows from the next minute up to, not including, `until`, without the header.
    /// Rows stepped over before are not written. Pieces of whole hours put together are the
    /// same as one piece.
    pub fn write_rows(&mut self, until: Instant, out: &mut String) {
        while self.next < until {
            self.step_minute();
            self.writer.row(&self.row, &self.recipe, out);
        }
        self.writer.flush(out);
    }

    /// What was true of each train at the minute of the latest row, in the recipe's order;
    /// empty before the first.
    pub fn truths(&self) -> &[TrainTruth] {
        &self.truths
    }

    /// The limits that were truly crossed so far, in the order in which they held.
    pub fn crossings(&self) -> &[Crossing] {
        &self.events.crossings
    }

    /// The cleans in place that have ended so far, recorded or not.
    pub fn cleans_done(&self) -> &[CleanTruth] {
        &self.events.cleans
    }

    /// What all trains meet in the minute that ends at `at`.
    fn site(&mut self, at: Instant) -> Site {
        let recipe = &self.recipe;
        let temperature = self.course.at(&recipe.temperature, recipe.start, at);
        let day = at.since(recipe.start).div_euclid(DAY_US);
        if day > self.feed_day.0 {
            self.feed_day = (day, self.feed.factor(day));
        }
        let all: f64 = recipe.trains.iter().map(|t| t.area_m2).sum();
        let working: f64 = self
            .trains
            .iter()
            .zip(&recipe.trains)
            .filter(|(train, _)| train.in_service())
            .map(|(_, t)| t.area_m2)
            .sum();
        let asked = recipe.flux_at(at);
        let taken_over = if working > 0.0 { asked * all / working } else { asked };
        let mut site = Site {
            routine: recipe.routine,
            temperature_degc: temperature,
            viscosity_pa_s: viscosity_pa_s(temperature),
            flux_m_s: taken_over.min(recipe.flux_max_m_s.max(asked)),
            flux_reference_m_s: recipe.flux_at(recipe.start),
            rate_factor: self.feed_day.1,
            alpha_factor: 1.0,
            washed_back: None,
        };
        for spell in recipe.feed_spells.iter().filter(|s| s.span.contains(at)) {
            site.rate_factor *= spell.rate_factor;
            site.alpha_factor *= spell.alpha_factor;
            site.washed_back = Some(spell.washed_back);
        }
        site
    }
}
