//! washbell: which membrane train to clean by when, with what and why, and afterwards whether
//! the clean worked.
//!
//! Each module is a floor. A floor may use any floor below it, never one above or beside it;
//! `tests/floors.rs` holds it to that. The dry floors are numbers and decisions: no clock, no
//! files, no network, no `async`.
//!
//! ```text
//!  WET  13  cli                  commands, settings, wiring, shutdown
//!       12  api                  JSON over HTTP
//!       11  jobs                 what happens without being asked
//!       10  ingest               the doors in
//!        9  work                 load, decide, save: the one road
//!        8  store                the only place that knows SQL
//!  ------------------------------------------------------------------
//!  DRY   7  answers              what is said, and how
//!        6  alarms | orders      who must know | what was agreed to be done
//!        5  advice               what should be done, and why
//!        4  analysis | sim       readings in, findings out | an invented plant
//!        3  plant                this plant, as configured and checked
//!        2  science              physics and statistics on plain numbers
//!        1  base                 ids, units, time, receipts
//! ```

pub mod advice;
pub mod alarms;
pub mod analysis;
pub mod answers;
pub mod api;
pub mod base;
pub mod cli;
pub mod ingest;
pub mod jobs;
pub mod orders;
pub mod plant;
pub mod science;
pub mod sim;
pub mod store;
pub mod work;
