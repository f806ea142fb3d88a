//! Stage 3: when a limit will be reached, as a distribution. Worked in filtered volume first,
//! then in time at the expected volume and temperature of a day.

use serde::{Deserialize, Serialize};

use crate::base::{DAY_US, Instant};
use crate::science;

use super::growth::Growth;

/// How far ahead is looked, days.
pub const REACH_DAYS: f64 = 180.0;
/// Steps of the search, days.
const STEP_DAYS: f64 = 0.25;
/// Dates of a limit; `None` where it is not reached within 180 days at that likelihood.
#[derive(Clone, Copy, Debug, Default, PartialEq, Serialize, Deserialize)]
pub struct Dates {
    /// One chance in ten that it is reached before.
    pub p10: Option<Instant>,
    /// As likely before as after.
    pub p50: Option<Instant>,
    /// Nine chances in ten that it is reached before.
    pub p90: Option<Instant>,
}

/// Dates at which the resistance reaches `limit_1_m(days ahead)`; the limit's own standard
/// error in 1/m comes with it. `limit` may move with the season.
pub fn dates(now: Instant, growth: &Growth, limit: impl Fn(f64) -> (f64, f64)) -> Dates {
    let mut out = Dates::default();
    let mut days = 0.0;
    while days <= REACH_DAYS {
        let (limit_1_m, limit_sd) = limit(days);
        let (mean, own_sd) = growth.ahead(days);
        let sd = libm::hypot(own_sd, limit_sd);
        let reached = if sd > 0.0 {
            science::normal_cdf((mean - limit_1_m) / sd)
        } else {
            f64::from(u8::from(mean >= limit_1_m))
        };
        let at = now.plus((days * DAY_US as f64) as i64);
        for (slot, chance) in [(&mut out.p10, 0.1), (&mut out.p50, 0.5), (&mut out.p90, 0.9)] {
            if slot.is_none() && reached >= chance {
                *slot = Some(at);
            }
        }
        if out.p90.is_some() {
            break;
        }
        days += STEP_DAYS;
    }
    out
}

#[cfg(test)]
mod tests {
    use super::*;

    /// A run of which everything is known.
    fn certain(level_1_m: f64, per_day_1_m: f64) -> Growth {
        let state = [level_1_m - 0.5 * per_day_1_m, per_day_1_m, 0.0];
        Growth { state, doubt: [[0.0; 3]; 3], wander_sd_1_m: 0.35 * per_day_1_m }
    }

    #[test]
    fn a_certain_straight_line_reaches_its_limit_on_its_day() {
        let now = Instant::from_micros(0);
        let d = dates(now, &certain(1.0, 0.1), |_| (2.0, 0.0));
        assert!((d.p50.unwrap().days_since(now) - 10.0).abs() <= STEP_DAYS);
        assert!(d.p10.unwrap() < d.p50.unwrap() && d.p50.unwrap() < d.p90.unwrap());
    }

    #[test]
    fn what_does_not_grow_has_no_date() {
        let now = Instant::from_micros(0);
        assert_eq!(dates(now, &certain(1.0, 0.0), |_| (2.0, 0.0)), Dates::default());
    }
}
