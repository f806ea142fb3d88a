//! Floor 6: who must know. An alarm needs an operator's response; what needs none is no alarm.
//! States after ISA-18.2. [`conditions`] says what stands, [`step`] holds that against the
//! alarms there are, [`acknowledge`] and [`shelve`] are people's acts. Knows nothing of work
//! orders.

mod act;
mod alarm;
mod condition;
mod step;
#[cfg(test)]
mod tests;

pub use act::{AlarmRefused, MAX_SHELF_US, acknowledge, acts_allowed, shelve};
pub use alarm::{Alarm, AlarmAct, AlarmActKind, AlarmKind, AlarmState, Detail, Response};
pub use condition::{Condition, Withheld, conditions};
pub use step::{AlarmChange, Look, Scope, Turn, step};
