//! The wall clock: the only place that asks the machine what time it is.

use std::time::{SystemTime, UNIX_EPOCH};

use crate::base::Instant;

/// The wall clock of this process; the demo sets it to another time.
#[derive(Clone, Copy, Debug, Default)]
pub struct WallClock {
    ahead_us: i64,
}

impl WallClock {
    /// A clock that shows `time` now and runs on from there.
    pub fn set_to(time: Instant) -> Self {
        Self { ahead_us: time.since(machine_now()) }
    }
    /// What it shows.
    pub fn now(self) -> Instant {
        machine_now().plus(self.ahead_us)
    }
}

fn machine_now() -> Instant {
    let since = SystemTime::now().duration_since(UNIX_EPOCH).unwrap_or_default();
    Instant::from_micros(i64::try_from(since.as_micros()).unwrap_or(i64::MAX))
}
