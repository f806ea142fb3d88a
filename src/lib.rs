//! washbell
pub mod advice;
pub mod analysis;
pub mod base;
pub mod ingest;
pub mod plant;
pub mod science;
pub mod sim;
pub mod store;
pub mod work;
