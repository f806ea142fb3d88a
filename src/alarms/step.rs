//! Holds what stands against the alarms there are.

use crate::base::{Instant, SourceId, TrainId};

use super::alarm::{Alarm, AlarmKind, AlarmState, Detail};
use super::condition::{Condition, Withheld};

/// What a look covers: an alarm inside whose condition is not named no longer stands; one
/// outside was not looked at.
#[derive(Clone, Copy, Debug)]
pub struct Scope<'a> {
    /// Which kinds.
    pub kinds: &'a [AlarmKind],
    /// Which train; `None` for all, and for what is no train's.
    pub train: Option<&'a TrainId>,
    /// Which source; `None` for all, and for what is no source's.
    pub source: Option<&'a SourceId>,
}

impl Scope<'_> {
    fn covers(&self, alarm: &Alarm) -> bool {
        self.kinds.contains(&alarm.kind)
            && self.train.is_none_or(|t| alarm.train.as_ref() == Some(t))
            && self.source.is_none_or(|s| alarm.source.as_ref() == Some(s))
    }
}

/// A look at what stands.
#[derive(Clone, Copy, Debug)]
pub struct Look<'a> {
    /// What it covers.
    pub scope: Scope<'a>,
    /// Data time; the wall clock for the age of data.
    pub as_of: Instant,
    /// The wall clock, by which shelves end.
    pub now: Instant,
}

/// What happened to an alarm.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Turn {
    /// Raised.
    Raised,
    /// Its condition came back before anybody knew of the first time.
    RaisedAgain,
    /// It was silent, is so no longer, and its condition stands.
    Sounds,
    /// It keeps quiet from now on: its train is being cleaned or out of service.
    Quiet,
    /// Its condition no longer stands; it waits to be acknowledged.
    Returned,
    /// Its condition went or came back behind a shelf, or its evidence changed in kind.
    Updated,
    /// It is over.
    Over,
}

impl Turn {
    /// The word of history for it.
    pub const fn code(self) -> &'static str {
        match self {
            Self::Raised => "raised",
            Self::RaisedAgain => "raised_again",
            Self::Sounds => "sounds",
            Self::Quiet => "quiet",
            Self::Returned => "returned",
            Self::Updated => "updated",
            Self::Over => "over",
        }
    }
    /// Whether somebody must be told.
    pub const fn tells(self) -> bool {
        matches!(self, Self::Raised | Self::RaisedAgain | Self::Sounds)
    }
}

/// A change of an alarm.
#[derive(Clone, Debug, PartialEq)]
pub struct AlarmChange {
    /// What happened.
    pub turn: Turn,
    /// The alarm as changed.
    pub alarm: Alarm,
}

/// Holds conditions against the alarms that are not normal. A condition named twice is one.
pub fn step(
    alarms: &[Alarm],
    conditions: &[Condition],
    look: &Look,
    new_id: &mut dyn FnMut() -> String,
) -> Vec<AlarmChange> {
    let mut out: Vec<AlarmChange> = Vec::new();
    for alarm in alarms.iter().filter(|a| !a.is_normal()) {
        let condition = conditions.iter().find(|c| is_of(alarm, c));
        if condition.is_none() && !look.scope.covers(alarm) {
            // Not looked at; but a shelf ends by the clock alone.
            out.extend(unshelved(alarm, None, look));
            continue;
        }
        out.extend(match condition {
            Some(condition) => stands(alarm, condition, look),
            None => gone(alarm, look),
        });
    }
    for condition in conditions {
        let known = alarms.iter().any(|a| !a.is_normal() && is_of(a, condition))
            || out.iter().any(|c| c.turn == Turn::Raised && is_of(&c.alarm, condition));
        // What keeps quiet from the start is no alarm yet.
        if !known && withheld(condition).is_none() {
            out.push(raised(condition, look, new_id()));
        }
    }
    out
}

fn is_of(alarm: &Alarm, condition: &Condition) -> bool {
    alarm.kind == condition.kind
        && alarm.train == condition.train
        && alarm.source == condition.source
        && alarm.subject == condition.subject
}

fn withheld(condition: &Condition) -> Option<AlarmState> {
    if !condition.kind.can_be_withheld() {
        return None;
    }
    condition.withheld.map(|w| match w {
        Withheld::InClean => AlarmState::SuppressedByDesign,
        Withheld::OutOfService => AlarmState::OutOfService,
    })
}

fn raised(condition: &Condition, look: &Look, id: String) -> AlarmChange {
    let alarm = Alarm {
        id,
        kind: condition.kind,
        train: condition.train.clone(),
        source: condition.source.clone(),
        subject: condition.subject.clone(),
        state: AlarmState::Unacknowledged,
        raised: look.as_of,
        as_of: look.as_of,
        returned: None,
        evidence: condition.evidence.clone(),
        detail: condition.detail.clone(),
        response: condition.kind.response(),
        acts: Vec::new(),
        shelved_until: None,
    };
    AlarmChange { turn: Turn::Raised, alarm }
}

/// The condition stands.
fn stands(alarm: &Alarm, condition: &Condition, look: &Look) -> Option<AlarmChange> {
    use AlarmState::*;
    if alarm.state == Shelved {
        return unshelved(alarm, Some(condition), look)
            .or_else(|| alarm.returned.map(|_| changed(alarm, Some(condition), look, Shelved)));
    }
    let quiet = withheld(condition);
    if let Some(state) = quiet {
        return (state != alarm.state).then(|| changed(alarm, Some(condition), look, state));
    }
    match alarm.state {
        ReturnedUnacknowledged | SuppressedByDesign | OutOfService => {
            Some(changed(alarm, Some(condition), look, Unacknowledged))
        }
        state => differs(alarm, condition).then(|| changed(alarm, Some(condition), look, state)),
    }
}

/// The condition no longer stands.
fn gone(alarm: &Alarm, look: &Look) -> Option<AlarmChange> {
    use AlarmState::*;
    let state = match alarm.state {
        Unacknowledged => ReturnedUnacknowledged,
        Acknowledged | SuppressedByDesign | OutOfService => Normal,
        // A shelf hides coming and going: it is there for what chatters.
        Shelved if alarm.shelved_until.is_none_or(|t| t <= look.now) => Normal,
        Shelved if alarm.returned.is_none() => Shelved,
        Shelved | ReturnedUnacknowledged | Normal => return None,
    };
    let mut next = alarm.clone();
    next.returned = next.returned.or(Some(look.as_of));
    Some(moved(alarm, next, look, state))
}

/// A shelf whose time is over. Without a look at the condition the last that was known counts.
fn unshelved(alarm: &Alarm, condition: Option<&Condition>, look: &Look) -> Option<AlarmChange> {
    if alarm.state != AlarmState::Shelved || alarm.shelved_until.is_some_and(|t| t > look.now) {
        return None;
    }
    let state = match condition {
        Some(c) => withheld(c).unwrap_or(AlarmState::Unacknowledged),
        None if alarm.returned.is_some() => AlarmState::Normal,
        None => AlarmState::Unacknowledged,
    };
    Some(changed(alarm, condition, look, state))
}

/// Whether the evidence tells something else than before: values move every hour, kinds do not.
fn differs(alarm: &Alarm, condition: &Condition) -> bool {
    let kinds = |evidence: &[crate::analysis::Evidence]| -> Vec<_> {
        evidence.iter().map(|e| (e.finding, e.limit_kind)).collect()
    };
    let limit = |d: &Detail| matches!(d, Detail::Limit(_));
    kinds(&alarm.evidence) != kinds(&condition.evidence)
        || (limit(&condition.detail) && alarm.detail != condition.detail)
}

fn changed(
    alarm: &Alarm,
    condition: Option<&Condition>,
    look: &Look,
    state: AlarmState,
) -> AlarmChange {
    let mut next = alarm.clone();
    if let Some(condition) = condition {
        next.returned = None;
        next.evidence = condition.evidence.clone();
        next.detail = condition.detail.clone();
    }
    moved(alarm, next, look, state)
}

fn moved(before: &Alarm, mut next: Alarm, look: &Look, state: AlarmState) -> AlarmChange {
    use AlarmState::*;
    next.state = state;
    next.as_of = next.as_of.max(look.as_of);
    if state != Shelved {
        next.shelved_until = None;
    }
    let turn = match (before.state, state) {
        (a, b) if a == b => Turn::Updated,
        (_, Normal) => Turn::Over,
        (_, SuppressedByDesign | OutOfService) => Turn::Quiet,
        (_, ReturnedUnacknowledged) => Turn::Returned,
        (ReturnedUnacknowledged, _) => Turn::RaisedAgain,
        _ => Turn::Sounds,
    };
    AlarmChange { turn, alarm: next }
}
