//! washbell
pub mod advice;
pub mod alarms;
pub mod analysis;
pub mod answers;
pub mod api;
pub mod base;
pub mod ingest;
pub mod jobs;
pub mod orders;
pub mod plant;
pub mod science;
pub mod sim;
pub mod store;
pub mod work;
