//! What people do to an alarm. Times here are the wall clock's.

use crate::base::{DAY_US, Instant, names_a_person};

use super::alarm::{Alarm, AlarmAct, AlarmActKind, AlarmState};

/// The longest an alarm can be shelved in one act: a day, so that every shift but the one that
/// shelved it sees it again (common practice, no source). It can be shelved again, with a
/// reason, by a person.
pub const MAX_SHELF_US: i64 = DAY_US;

/// Why a person's act on an alarm is refused. The text tells what to do.
#[derive(Clone, Copy, Debug, PartialEq, Eq, thiserror::Error)]
pub enum AlarmRefused {
    /// Nobody is named.
    #[error("`by` must name the person who does it")]
    NeedsPerson,
    /// Shelving wants a reason.
    #[error("`reason` must say why it is shelved: the next shift reads it")]
    NeedsReason,
    /// The moment is not after now, or further than a shelf reaches.
    #[error("`until` must be a moment within the next 24 hours; shelve again then if need be")]
    UntilOutOfReach,
    /// Its kind is never shelved.
    #[error("an integrity alarm cannot be shelved; acknowledge it and test the train")]
    NeverShelved,
    /// The state does not allow it.
    #[error("{}", not_from(*.0))]
    NotFrom(AlarmState),
}

impl AlarmRefused {
    /// The field that it is about, as a JSON pointer into the request; empty for the alarm.
    pub const fn pointer(self) -> &'static str {
        match self {
            Self::NeedsPerson => "/by",
            Self::NeedsReason => "/reason",
            Self::UntilOutOfReach => "/until",
            Self::NeverShelved | Self::NotFrom(_) => "",
        }
    }
}

/// What people may do to an alarm as it stands.
pub const fn acts_allowed(alarm: &Alarm) -> &'static [AlarmActKind] {
    use AlarmActKind::*;
    let shelf = alarm.kind.can_be_shelved();
    match alarm.state {
        AlarmState::Unacknowledged if shelf => &[Acknowledge, Shelve],
        AlarmState::Unacknowledged | AlarmState::ReturnedUnacknowledged => &[Acknowledge],
        AlarmState::Acknowledged | AlarmState::Shelved if shelf => &[Shelve],
        _ => &[],
    }
}

fn not_from(state: AlarmState) -> &'static str {
    match state {
        AlarmState::Unacknowledged => "the alarm stands; it can be acknowledged or shelved",
        AlarmState::Acknowledged => {
            "the alarm is acknowledged already; it can be shelved, and ends by itself"
        }
        AlarmState::ReturnedUnacknowledged => {
            "the alarm no longer stands; it can only be acknowledged, which ends it"
        }
        AlarmState::Shelved => {
            "the alarm is shelved; it sounds again when the shelf ends, or can be shelved anew"
        }
        AlarmState::SuppressedByDesign => {
            "the alarm keeps quiet while its train is cleaned; wait until the train is back"
        }
        AlarmState::OutOfService => {
            "the alarm keeps quiet while its train is out of service; wait until the train is back"
        }
        AlarmState::Normal => "the alarm is over; there is nothing left to do to it",
    }
}

/// A person says that they know of it. Said again by the same person it changes nothing.
///
/// # Errors
/// If nobody is named, or the alarm is silent or over.
pub fn acknowledge(alarm: &Alarm, by: &str, at: Instant) -> Result<Alarm, AlarmRefused> {
    if !names_a_person(by) {
        return Err(AlarmRefused::NeedsPerson);
    }
    let act = AlarmAct {
        what: AlarmActKind::Acknowledge,
        by: by.trim().to_owned(),
        at,
        until: None,
        reason: None,
    };
    let state = match alarm.state {
        AlarmState::Unacknowledged => AlarmState::Acknowledged,
        AlarmState::ReturnedUnacknowledged => AlarmState::Normal,
        AlarmState::Acknowledged | AlarmState::Normal if is_last(alarm, &act) => {
            return Ok(alarm.clone());
        }
        other => return Err(AlarmRefused::NotFrom(other)),
    };
    let mut next = alarm.clone();
    next.state = state;
    next.acts.push(act);
    Ok(next)
}

/// A person silences it until a moment at most [`MAX_SHELF_US`] away. Said again with the same
/// moment it changes nothing.
///
/// # Errors
/// If nobody or no reason is named, the moment is out of reach, the kind is never shelved, or
/// the alarm does not stand.
pub fn shelve(
    alarm: &Alarm,
    by: &str,
    until: Instant,
    reason: &str,
    at: Instant,
) -> Result<Alarm, AlarmRefused> {
    if !names_a_person(by) {
        return Err(AlarmRefused::NeedsPerson);
    }
    if reason.trim().is_empty() {
        return Err(AlarmRefused::NeedsReason);
    }
    if !alarm.kind.can_be_shelved() {
        return Err(AlarmRefused::NeverShelved);
    }
    let act = AlarmAct {
        what: AlarmActKind::Shelve,
        by: by.trim().to_owned(),
        at,
        until: Some(until),
        reason: Some(reason.trim().to_owned()),
    };
    use AlarmState::*;
    match alarm.state {
        Shelved if is_last(alarm, &act) => return Ok(alarm.clone()),
        Unacknowledged | Acknowledged | Shelved => {}
        other => return Err(AlarmRefused::NotFrom(other)),
    }
    if until <= at || until.since(at) > MAX_SHELF_US {
        return Err(AlarmRefused::UntilOutOfReach);
    }
    let mut next = alarm.clone();
    next.state = Shelved;
    next.shelved_until = Some(until);
    next.acts.push(act);
    Ok(next)
}

/// Whether the act was the last one already, but for its moment.
fn is_last(alarm: &Alarm, act: &AlarmAct) -> bool {
    alarm.acts.last().is_some_and(|last| AlarmAct { at: act.at, ..last.clone() } == *act)
}
