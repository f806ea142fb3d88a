//! The statements of this folder, for the test that prepares every statement of the store.

pub(in crate::store) use super::changes::CLEAR_ALL;
use super::{assessments, changes, cycles, days, findings, hours, now, phases, runs};

pub(in crate::store) const STATEMENTS: [&str; 27] = [
    assessments::BEFORE,
    assessments::CLEAR,
    assessments::PUT,
    changes::DERIVATION,
    changes::SET_DERIVATION,
    changes::SET_STEPPED,
    changes::STEPPED,
    cycles::CLEAR,
    cycles::OF_DAY,
    cycles::OF_TRAIN,
    days::CLEAR,
    days::OF_TRAIN,
    days::PUT,
    days::STARTS,
    findings::CLEAR,
    findings::OF_TRAIN,
    findings::PUT,
    hours::CLEAR,
    hours::OF_TRAIN,
    now::CLEAR,
    now::NEWEST,
    now::PUT,
    phases::CLEAR,
    phases::OF_TRAIN,
    runs::CLEAR_FROM,
    runs::OF_TRAIN,
    runs::PUT,
];
