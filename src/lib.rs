//! washbell
pub mod base;
pub mod ingest;
pub mod plant;
pub mod science;
