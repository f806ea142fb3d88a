//! Floor 4: readings in, findings out. Stages, each a pure function of a bounded window of the
//! one before, each with a table that anybody can read:
//!
//! 1. [`work_day`]: one plant day's readings, with the tail since the cycle that was open at
//!    its start, to cycles, hours and phases.
//! 2. the same day's hours and cycles to one row a train.
//! 3. [`assess`]: days in order, cleans, to runs (with the verdict on the clean that began
//!    them) and one assessment a day: baseline, trend, dates of the limits.
//! 4. [`find`]: what stands at a moment to findings.
//!
//! [`standing`] says what stood at the end of an hour and never looks past it.

mod assess;
mod cleans;
mod cycles;
mod day_input;
mod days;
mod findings;
mod forecast;
mod growth;
mod hours;
mod limits;
mod normalise;
mod phases;
mod reason;
mod runs;
mod standing;
mod trend;

use crate::base::{Instant, Span, TrainId};
use crate::plant::{Phase, Plant, Train};
use crate::science;

pub use assess::{Assessment, DAYS_KEPT, GrowthFrom, HOURS_KEPT_US, Memory, assess, is_run_day};
pub use cleans::{Clean, Origin, PhaseRow, RecordedClean, cleans};
pub use cycles::Cycle;
pub use day_input::{Readings, Samples, every_us, samples, tags_needed};
pub use days::Day;
pub use findings::{Evidence, Finding, FindingKind, Measure, find};
pub use forecast::Dates;
pub use growth::Growth;
pub use hours::{Hour, Steady, summarise};
pub use limits::{Hold, Holds, LimitKind, loss};
pub use normalise::{Normalised, Viscosity};
pub use phases::LOOKBACK_US;
pub use reason::{Quality, Reason};
pub use runs::{Baseline, BaselineKind, Level, Run, Verdict, as_new, baseline, best};
pub use standing::{Loss, NoDates, Rows, Standing, as_known, standing};
pub use trend::Trend;

/// Rises with every change that makes derived rows different: the store then works all again.
pub const DERIVATION_VERSION: i64 = 2;

/// A train with what its plant says of temperature.
pub struct Site<'a> {
    /// The train.
    pub train: &'a Train,
    /// Viscosity at the reference temperature by the plant's law, Pa s.
    pub reference_viscosity_pa_s: f64,
}

impl<'a> Site<'a> {
    /// For one train of a plant.
    pub fn new(plant: &Plant, train: &'a Train) -> Self {
        let at = plant.reference_temperature_degc;
        Self {
            train,
            reference_viscosity_pa_s: science::law_viscosity_pa_s(plant.temperature_law, at)
                .unwrap_or(f64::NAN),
        }
    }
    /// Resistance in 1/m of a permeability in m/(s.Pa) at the reference temperature.
    pub fn resistance_1_m(&self, permeability: f64) -> f64 {
        1.0 / (self.reference_viscosity_pa_s * permeability)
    }
    /// Permeability at the reference temperature in m/(s.Pa) of a resistance in 1/m.
    pub fn permeability(&self, resistance_1_m: f64) -> f64 {
        1.0 / (self.reference_viscosity_pa_s * resistance_1_m)
    }
}

/// What a train is doing by its newest readings.
#[derive(Clone, Debug, PartialEq)]
pub struct Now {
    /// Whose.
    pub train: TrainId,
    /// Its phase.
    pub phase: Phase,
    /// Since when, as far as twelve hours before the day's midnight show.
    pub since: Instant,
    /// Its newest reading.
    pub newest: Instant,
}

/// Rows of stages 1 and 2 of one train and day.
#[derive(Clone, Debug, PartialEq)]
pub struct DayRows {
    /// Cycles whose end was decided in the day.
    pub cycles: Vec<Cycle>,
    /// Its hours.
    pub hours: Vec<Hour>,
    /// Its phases other than filtration and backwash.
    pub phases: Vec<PhaseRow>,
    /// The day; `None` without readings.
    pub day: Option<Day>,
    /// What the train did at its last reading of the day.
    pub now: Option<Now>,
    /// State codes that the plant file does not name.
    pub unknown_codes: Vec<String>,
}

/// Stages 1 and 2 of one train and plant day. `readings` must cover the day and
/// [`LOOKBACK_US`] before it.
pub fn work_day(
    plant: &Plant,
    train: &Train,
    readings: &Readings,
    day: Span,
    viscosity: &mut Viscosity,
) -> DayRows {
    let window = Span::new(day.from.plus(-LOOKBACK_US), day.to);
    let samples = samples(plant, train, readings, window);
    let spans = phases::spans(&samples, day);
    let normalised = normalise::normalise(train, &samples, &spans, viscosity);
    let found = cycles::cycles(&train.id, &samples, &spans, &normalised, day);
    let hours = hours::hours(&train.id, &samples, &normalised, &found.starts, &found.cycles, day);
    let row = days::day(&train.id, day, &hours, &found.cycles);
    let now = spans.last().filter(|s| samples.times[s.last] >= day.from).map(|s| Now {
        train: train.id.clone(),
        phase: s.phase,
        since: s.from,
        newest: samples.times[s.last],
    });
    DayRows {
        cycles: found.cycles,
        hours,
        phases: cleans::phase_rows(&train.id, &spans, day),
        day: row,
        now,
        unknown_codes: samples.unknown_codes.into_iter().collect(),
    }
}

/// Samples of a span with their resistance, for answers by the minute. `readings` must cover
/// the span and [`LOOKBACK_US`] before it.
pub fn minutes(
    plant: &Plant,
    train: &Train,
    readings: &Readings,
    span: Span,
    viscosity: &mut Viscosity,
) -> (Samples, Normalised) {
    let window = Span::new(span.from.plus(-LOOKBACK_US), span.to);
    let samples = samples(plant, train, readings, window);
    let spans = phases::spans(&samples, span);
    let normalised = normalise::normalise(train, &samples, &spans, viscosity);
    (samples, normalised)
}
