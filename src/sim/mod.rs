//! Floor 4: an invented plant for the demo and for tests. It knows what is true of itself, so
//! what the service concludes from its exports can be scored.
//!
//! `R = membrane + irrecoverable + chemical + reversible`, `TMP = mu(T) R J + offset`. Within a
//! cycle the reversible part grows with the filtered volume and a backwash takes nearly all of
//! it off; the chemical part grows at a rate that wanders from day to day, chemical backwashes
//! take a share of it, cleans in place most of it. Temperature goes with the calendar. Physics
//! and viscosity are its own: nothing here uses the methods of the service.
//!
//! ```
//! use washbell::base::{HOUR_US, Instant, Zone};
//! use washbell::sim::{Recipe, Simulation, header};
//!
//! let start = Instant::parse("2026-03-02T00:00:00Z").unwrap();
//! let recipe = Recipe::plain(1, Zone::utc(), start, 2);
//! let mut export = header(&recipe);
//! let mut plant = Simulation::new(recipe);
//! plant.write_rows(start.plus(HOUR_US), &mut export);
//! assert_eq!(export.lines().count(), 61);
//! assert!(plant.truths()[0].loss() < 0.001);
//! ```
//!
//! Only dead-end trains so far: a cross-flow train would be a second kind of `Train`.

mod clean;
mod demo;
mod export;
mod fault;
mod meter;
mod plant;
mod plant_file;
mod recipe;
mod rng;
mod train;
mod truth;
mod water;

pub use clean::{CleanStep, PlannedClean, RecordedClean, procedure_steps};
pub use demo::demo;
pub use export::{header, state_code};
pub use fault::{Fault, Sensor, SensorFault, Wrong};
pub use meter::TrainRow;
pub use plant::{Row, Simulation};
pub use plant_file::plant_toml;
pub use recipe::{
    ColdSnap, Dirt, FeedSpell, Noise, Recipe, Routine, THERMOMETER_TAG, TemperatureRecipe,
    TrainRecipe, TrainTags,
};
pub use truth::{CleanTruth, Crossing, LimitKind, TrainTruth};
pub use water::viscosity_pa_s;

#[cfg(test)]
mod tests;
