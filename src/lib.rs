//! washbell
pub mod advice;
pub mod analysis;
pub mod answers;
pub mod base;
pub mod plant;
pub mod science;
pub mod sim;
