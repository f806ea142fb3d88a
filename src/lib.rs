//! washbell
pub mod advice;
pub mod alarms;
pub mod analysis;
pub mod base;
pub mod plant;
pub mod science;
