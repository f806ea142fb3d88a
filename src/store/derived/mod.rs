//! Derived rows: a file a table. Read by everybody; written through [`Changes`] only.
//!
//! Values are bound, never written as text: a REAL must come back bit for bit, because the
//! next day is worked from it.

mod assessments;
mod changes;
mod cycles;
mod days;
mod findings;
mod hours;
mod now;
mod phases;
#[cfg(test)]
mod plans;
mod runs;
#[cfg(test)]
pub(super) mod statements;

pub use changes::Changes;
pub use now::StoredNow;

use serde::Serialize;
use serde::de::DeserializeOwned;

use super::StoreError;
use crate::analysis::Reason;
use crate::base::Instant;
use crate::plant::Phase;

const PHASES: [(Phase, &str); 12] = [
    (Phase::Filtration, "filtration"),
    (Phase::Backwash, "backwash"),
    (Phase::ChemicalBackwash, "chemical_backwash"),
    (Phase::MaintenanceClean, "maintenance_clean"),
    (Phase::CleanInPlace, "clean_in_place"),
    (Phase::IntegrityTest, "integrity_test"),
    (Phase::Standby, "standby"),
    (Phase::Relaxation, "relaxation"),
    (Phase::Flush, "flush"),
    (Phase::Calibration, "calibration"),
    (Phase::OutOfService, "out_of_service"),
    (Phase::Unknown, "unknown"),
];

fn phase_text(phase: Phase) -> &'static str {
    PHASES.iter().find(|(p, _)| *p == phase).map_or("unknown", |(_, t)| t)
}

fn phase_of(text: &str) -> Phase {
    PHASES.iter().find(|(_, t)| *t == text).map_or(Phase::Unknown, |(p, _)| *p)
}

fn reasons_text(reasons: &[Reason]) -> String {
    reasons.iter().map(|r| r.code()).collect::<Vec<_>>().join(",")
}

fn reasons_of(text: &str) -> Vec<Reason> {
    text.split(',').filter_map(Reason::from_code).collect()
}

fn at(us: i64) -> Instant {
    Instant::from_micros(us)
}

fn finite(value: f64) -> Option<f64> {
    value.is_finite().then_some(value)
}

fn write_json<T: Serialize>(value: &T) -> Result<String, StoreError> {
    serde_json::to_string(value).map_err(|e| StoreError::unreadable("derived row", e))
}

fn read_json<T: DeserializeOwned>(text: &str) -> Result<T, StoreError> {
    serde_json::from_str(text).map_err(|e| StoreError::unreadable("derived row", e))
}

fn read_json_opt<T: DeserializeOwned>(text: Option<&str>) -> Result<Option<T>, StoreError> {
    text.map(read_json).transpose()
}
