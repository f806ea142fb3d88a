//! Floor 3: this plant, as configured and checked. A `Plant` is valid by construction: the
//! only way to get one is [`read`], which reports all mistakes at once.
//!
//! Everything is in SI: Pa, m3/s, m2, m/s, m/(s.Pa); temperatures in degrees Celsius.

mod chemistry;
mod effective;
mod membrane;
mod mistake;
mod model;
mod not_yet;
mod read;
mod revision;
mod source;
#[cfg(test)]
mod tests;
mod words;

pub use chemistry::{classes_by_name, conflicts, rinse_separates};
pub use effective::{Setting, effective};
pub use membrane::{beyond, within};
pub use mistake::Mistake;
pub use model::{
    Dated, Drive, Filtration, HoldLimit, IntegrityValues, Limits, Loop, MembraneLimits,
    MonthTemperature, Phase, Plant, PressureKind, Procedure, Role, Service, Signal, Step,
    StepClass, Train, VerifiedRinse,
};
pub use read::{Reading, read, strength_mg_l};
pub use source::{Layout, RepeatedHour, Source, Stamp, TimeColumn, TimeFormat, Values};
