//! washbell
pub mod base;
pub mod plant;
pub mod science;
pub mod store;
