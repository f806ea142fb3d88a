//! Floor 3: this plant, as configured and checked. A `Plant` is valid by construction: the
//! only way to get one is [`read`], which reports all mistakes at once.
//!
//! Everything is in SI: Pa, m3/s, m2, m/s, m/(s.Pa); temperatures in degrees Celsius.

mod model;

pub use model::{
    Dated, Drive, Filtration, HoldLimit, IntegrityValues, Layout, Limits, Loop, MembraneLimits,
    MonthTemperature, Phase, Plant, PressureKind, Procedure, RepeatedHour, Role, Service, Signal,
    Source, Stamp, Step, StepClass, TimeColumn, TimeFormat, Train, Values, VerifiedRinse,
};
