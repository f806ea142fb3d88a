//! The one road: a simulated plant through the real door, the store and all stages.

mod same;
mod support;
