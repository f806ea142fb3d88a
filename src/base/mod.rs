//! Floor 1: ids, time, units, and what a door answers. Knows nothing of membranes.

mod ids;
mod nearest;
mod person;
mod quantity;
mod readings;
mod receipt;
mod time;
mod unit_table;
mod units;

pub use ids::{SourceId, Tag, TrainId};
pub use nearest::nearest;
pub use person::names_a_person;
pub use quantity::{Quantity, QuantityError, parse_quantity, unit_help};
pub use readings::{CellValue, Column};
pub use receipt::{Counts, Outcome, Receipt, Rejection};
pub use time::{
    DAY_US, HOUR_US, Instant, LocalTime, MINUTE_US, SECOND_US, Span, TimeError, Wall, Zone,
    parse_duration_us, zone_data_version,
};
pub use units::{Dimension, Unit, unit_by_name, unit_by_ucum};
