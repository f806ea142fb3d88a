//! The methods of floor 2 against tables that other programs and handbooks printed.
//!
//! The tables lie in `tests/data`, each with its origin in its first line.

mod cake;
mod polarisation;
mod regression;
mod robust;
mod table;
mod trend;
mod water;
