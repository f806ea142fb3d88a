//! An invented plant on the road without a store or a door: its readings, rounded as the export
//! rounds them, day by day through the stages and hour by hour through the rules.

use std::path::Path;

use washbell::advice::{self, Action, Case, Change, Recommendation, Urgency};
use washbell::analysis::{
    self, Assessment, Clean, Day, DayRows, Hour, LOOKBACK_US, Memory, PhaseRow, Readings,
    RecordedClean, Rows, Run, Site, Standing, Viscosity,
};
use washbell::base::{CellValue, Column, DAY_US, HOUR_US, Instant, SourceId, Span, Tag};
use washbell::plant::{self, Phase, Plant};
use washbell::sim::{self, Recipe, Simulation, THERMOMETER_TAG, TrainTruth};

/// Pieces of cleans are kept at hand this long, as on the road.
const PIECES_BACK_US: i64 = 30 * DAY_US;

/// A column of the export.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum What {
    FeedPressure,
    PermeatePressure,
    Flow,
    Temperature,
    State,
}

/// Changes one cell before it is posted; `None` leaves it out.
pub type Tamper = fn(usize, Instant, What, f64) -> Option<f64>;

/// Something that was said of a train.
#[derive(Clone, Debug)]
pub struct Said {
    pub train: usize,
    pub at: Instant,
    pub word: &'static str,
    pub action: Action,
    pub urgency: Urgency,
}

/// A train at the end of an hour, with what was true in each of its minutes.
pub struct Seen<'a> {
    pub train: usize,
    pub at: Instant,
    pub standing: &'a Standing,
    pub hour: Option<&'a Hour>,
    pub truths: &'a [TrainTruth],
}

/// A train at the end of a day.
pub struct Closed<'a> {
    pub train: usize,
    pub rows: &'a DayRows,
    /// Days of the run so far.
    pub days: &'a [Day],
    pub assessment: Option<&'a Assessment>,
    /// What was true at each minute of the day.
    pub truths: &'a [TrainTruth],
}

/// What a scenario listens to.
pub trait Listener {
    fn hour(&mut self, _: &Seen) {}
    fn day(&mut self, _: &Closed) {}
}

/// Listens to nothing.
pub struct Nobody;
impl Listener for Nobody {}

/// One train on the road.
struct Line {
    site: Site<'static>,
    memory: Memory,
    assessment: Option<Assessment>,
    pieces: Vec<PhaseRow>,
    known: Vec<Recommendation>,
    truths: Vec<TrainTruth>,
}

/// A plant on the road.
pub struct Runner {
    pub plant: &'static Plant,
    pub sim: Simulation,
    pub said: Vec<Said>,
    /// Whether standings and rules are worked at every hour.
    pub hourly: bool,
    pub tamper: Option<Tamper>,
    /// Whether readings are rounded as the export rounds them.
    pub rounded: bool,
    lines: Vec<Line>,
    readings: Readings,
    viscosity: Viscosity,
    next_id: u32,
}

impl Runner {
    pub fn new(recipe: Recipe) -> Self {
        Self::with_file(recipe, |text| text)
    }

    /// With a plant file that says something else than the recipe's own.
    pub fn with_file(recipe: Recipe, change: impl Fn(String) -> String) -> Self {
        let file = change(sim::plant_toml(&recipe, "127.0.0.1:0", "washbell.db"));
        let reading = plant::read(&file, Path::new("")).unwrap_or_else(|m| panic!("{m:?}"));
        // A test's plants live as long as the test; lines borrow from them.
        let plant: &'static Plant = Box::leak(Box::new(reading.plant));
        let line = |train| Line {
            site: Site::new(plant, train),
            memory: Memory::default(),
            assessment: None,
            pieces: Vec::new(),
            known: Vec::new(),
            truths: Vec::new(),
        };
        Self {
            plant,
            sim: Simulation::new(recipe),
            said: Vec::new(),
            hourly: true,
            tamper: None,
            rounded: true,
            lines: plant.trains.iter().map(line).collect(),
            readings: Readings::new(),
            viscosity: Viscosity::new(plant.temperature_law),
            next_id: 0,
        }
    }

    /// Goes on by whole plant days, up to the first that ends after `days` days of 24 hours.
    pub fn days(&mut self, days: i64, listener: &mut dyn Listener) {
        let end = self.sim.next_minute().plus(days * DAY_US);
        while self.sim.next_minute() < end {
            let day = self.plant.zone.day(self.sim.next_minute());
            self.read_day(day);
            for train in 0..self.lines.len() {
                self.train_day(train, day, listener);
            }
        }
    }

    /// The runs of a train so far.
    pub fn runs(&self, train: usize) -> &[Run] {
        &self.lines[train].memory.runs
    }

    /// Moments at which an action was raised for a train.
    pub fn raised(&self, train: usize, action: Action) -> Vec<Instant> {
        self.said
            .iter()
            .filter(|s| s.train == train && s.action == action && s.word == "raised")
            .map(|s| s.at)
            .collect()
    }

    /// Most recommendations of any kind raised for a train within a week, after a moment.
    pub fn busiest_week(&self, train: usize, after: Instant) -> usize {
        let raised = || {
            self.said.iter().filter(move |s| s.train == train && s.word == "raised" && s.at > after)
        };
        let in_week = |from: Instant| {
            raised().filter(|s| Span::new(from, from.plus(7 * DAY_US)).contains(s.at)).count()
        };
        raised().map(|s| in_week(s.at)).max().unwrap_or(0)
    }

    fn read_day(&mut self, day: Span) {
        for column in self.readings.values_mut() {
            let old = column.times.partition_point(|t| *t < day.from.plus(-LOOKBACK_US));
            column.times.drain(..old);
            column.values.drain(..old);
        }
        let tags: Vec<_> = self.sim.recipe().trains.iter().map(|t| t.tags()).collect();
        let mut columns: Vec<[Column; 4]> = Vec::new();
        let mut thermometer = Column::default();
        columns.resize_with(tags.len(), Default::default);
        for line in &mut self.lines {
            line.truths.clear();
        }
        while self.sim.next_minute() < day.to {
            let row = self.sim.step_minute();
            let (at, temperature) = (row.at, row.temperature_degc);
            let (tamper, rounded) = (self.tamper, self.rounded);
            let put = |column: &mut Column, train: usize, what: What, value: f64, scale: f64| {
                let value = if rounded { (value * scale).round() / scale } else { value };
                if let Some(v) = tamper.map_or(Some(value), |t| t(train, at, what, value)) {
                    column.push(at, CellValue::Number(v));
                }
            };
            put(&mut thermometer, 0, What::Temperature, temperature, 100.0);
            for (n, t) in row.trains.iter().enumerate() {
                let [feed, permeate, flow, state] = &mut columns[n];
                put(feed, n, What::FeedPressure, t.feed_pressure_pa * 1e-5, 1e3);
                put(permeate, n, What::PermeatePressure, t.permeate_pressure_pa * 1e-5, 1e3);
                put(flow, n, What::Flow, t.permeate_flow_m3_s * 3600.0, 10.0);
                put(state, n, What::State, sim::state_code(t.phase) as f64, 1.0);
            }
            for (line, truth) in self.lines.iter_mut().zip(self.sim.truths()) {
                line.truths.push(*truth);
            }
        }
        self.append(THERMOMETER_TAG, thermometer);
        for (tags, [feed, permeate, flow, state]) in tags.into_iter().zip(columns) {
            self.append(&tags.feed_pressure, feed);
            self.append(&tags.permeate_pressure, permeate);
            self.append(&tags.permeate_flow, flow);
            self.append(&tags.state, state);
        }
    }

    fn append(&mut self, tag: &str, column: Column) {
        let key = (SourceId::new("scada"), Tag::new(tag));
        let all = self.readings.entry(key).or_default();
        all.times.extend(column.times);
        all.values.extend(column.values);
    }

    fn train_day(&mut self, n: usize, day: Span, listener: &mut dyn Listener) {
        let train = self.lines[n].site.train;
        let rows = analysis::work_day(self.plant, train, &self.readings, day, &mut self.viscosity);
        let line = &mut self.lines[n];
        line.memory.hours.extend(rows.hours.iter().cloned());
        let in_place = rows.phases.iter().filter(|p| p.phase == Phase::CleanInPlace);
        line.pieces.extend(in_place.cloned());
        line.pieces.retain(|p| p.start >= day.from.plus(-PIECES_BACK_US));
        if self.hourly {
            let mut from = day.from;
            while from < day.to {
                let to = from.plus(HOUR_US).min(day.to);
                self.hour(n, Span::new(from, to), listener);
                from = to;
            }
        }
        let recorded = self.recorded(n, day.to);
        let line = &mut self.lines[n];
        if let Some(row) = &rows.day {
            let cleans: Vec<Clean> = analysis::cleans(&line.pieces, &recorded, day.to);
            let assessed = analysis::assess(self.plant, &line.site, &mut line.memory, row, &cleans);
            line.assessment = Some(assessed);
        }
        listener.day(&Closed {
            train: n,
            rows: &rows,
            days: &line.memory.days,
            assessment: line.assessment.as_ref(),
            truths: &line.truths,
        });
    }

    fn hour(&mut self, n: usize, span: Span, listener: &mut dyn Listener) {
        let recorded = self.recorded(n, span.to);
        let line = &mut self.lines[n];
        let rows = Rows {
            assessment: line.assessment.as_ref(),
            hours: &line.memory.hours,
            pieces: &line.pieces,
            recorded: &recorded,
            runs: &line.memory.runs,
        };
        let standing = analysis::standing(&line.site, &rows, span.to);
        let findings = analysis::find(&line.site, &standing);
        let open: Vec<(Action, Urgency)> =
            line.known.iter().filter(|r| r.is_open()).map(|r| (r.action, r.urgency)).collect();
        let case = Case {
            plant: self.plant,
            site: &line.site,
            standing: &standing,
            findings: &findings,
            open: &open,
        };
        let proposals = advice::propose(&case);
        let next_id = &mut self.next_id;
        let mut new_id = || {
            *next_id += 1;
            next_id.to_string()
        };
        for change in advice::step(&standing, &proposals, &line.known, &mut new_id) {
            let word = match &change {
                Change::Raised(_) => "raised",
                Change::Updated(_) => "updated",
                Change::Closed(_) => "closed",
            };
            let item = change.item().clone();
            self.said.push(Said {
                train: n,
                at: span.to,
                word,
                action: item.action,
                urgency: item.urgency,
            });
            match line.known.iter_mut().find(|r| r.id == item.id) {
                Some(slot) => *slot = item,
                None => line.known.push(item),
            }
        }
        let (a, b) = (
            line.truths.partition_point(|t| t.at < span.from),
            line.truths.partition_point(|t| t.at < span.to),
        );
        listener.hour(&Seen {
            train: n,
            at: span.to,
            standing: &standing,
            hour: line.memory.hours.iter().rev().find(|h| h.start == span.from),
            truths: &line.truths[a..b],
        });
    }

    /// What people had written down of a train's cleans by a moment.
    fn recorded(&self, n: usize, by: Instant) -> Vec<RecordedClean> {
        let id = &self.lines[n].site.train.id;
        self.sim
            .recipe()
            .recorded_cleans(by)
            .into_iter()
            .filter(|c| c.train == *id)
            .map(|c| RecordedClean {
                id: c.reference,
                train: c.train,
                start: c.start,
                end: c.end,
                kind: c.kind,
            })
            .collect()
    }
}
