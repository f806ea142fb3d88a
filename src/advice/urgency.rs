//! How soon something must be done.

use crate::base::{DAY_US, Instant};
use crate::plant::Plant;

use super::Urgency;

/// The end of the shift after the one that is running.
fn next_shift_ends(plant: &Plant, at: Instant) -> Instant {
    let next = |t: Instant| {
        plant
            .shifts
            .iter()
            .map(|(hour, minute)| plant.zone.next_clock(t, *hour, *minute))
            .min()
            .unwrap_or_else(|| t.plus(DAY_US / 3))
    };
    next(next(at))
}

/// Urgency of a latest start; a limit that has held is for this shift whatever the start.
pub fn of_start(plant: &Plant, now: Instant, start_by: Option<Instant>, held: bool) -> Urgency {
    match start_by {
        _ if held => Urgency::ThisShift,
        Some(t) if t < next_shift_ends(plant, now) => Urgency::ThisShift,
        Some(t) if t <= now.plus(7 * DAY_US) => Urgency::ThisWeek,
        _ => Urgency::NextSlot,
    }
}
