//! washbell
pub mod advice;
pub mod alarms;
pub mod analysis;
pub mod base;
pub mod orders;
pub mod plant;
pub mod science;
