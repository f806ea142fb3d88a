//! Stage 3: when a limit will be reached, as a distribution. Worked in filtered volume first,
//! then in time at the expected volume and temperature of a day.

use serde::{Deserialize, Serialize};

use crate::base::{DAY_US, Instant};
use crate::science;

/// How far ahead is looked, days.
pub const REACH_DAYS: f64 = 180.0;
/// Steps of the search, days.
const STEP_DAYS: f64 = 0.25;
/// A day's fouling rate wanders about its mean by this share (from memory: a third is usual for
/// surface water), and one day is like the next by this much.
const WANDER_SHARE: f64 = 0.35;
const WANDER_LIKENESS: f64 = 0.85;

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

/// What is known of a run's resistance now and of how it grows.
#[derive(Clone, Copy, Debug, PartialEq, Serialize, Deserialize)]
pub struct Growth {
    /// Start-of-cycle resistance now, 1/m.
    pub level_1_m: f64,
    /// Its standard error, 1/m.
    pub level_sd_1_m: f64,
    /// Growth a day, 1/m.
    pub per_day_1_m: f64,
    /// Its standard error, 1/m.
    pub per_day_sd_1_m: f64,
}

/// Dates at which the resistance reaches `limit_1_m(days ahead)`; the limit's own standard
/// error in 1/m comes with it. `limit` may move with the season.
pub fn dates(now: Instant, growth: &Growth, limit: impl Fn(f64) -> (f64, f64)) -> Dates {
    let mut out = Dates::default();
    let mut days = 0.0;
    while days <= REACH_DAYS {
        let (limit_1_m, limit_sd) = limit(days);
        let mean = growth.level_1_m + growth.per_day_1_m * days;
        let sd = spread(growth, days, limit_sd);
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

/// Standard error of (resistance - limit) some days ahead: level, slope, and a daily rate that
/// wanders like a first-order process.
fn spread(growth: &Growth, days: f64, limit_sd: f64) -> f64 {
    let rate_sd = WANDER_SHARE * growth.per_day_1_m.abs();
    let wander = rate_sd * rate_sd * wander_sum(days);
    let slope = growth.per_day_sd_1_m * days;
    (growth.level_sd_1_m * growth.level_sd_1_m + slope * slope + wander + limit_sd * limit_sd)
        .sqrt()
}

/// Variance of the sum of `days` values of a first-order process of unit variance:
/// `n (1+r)/(1-r) - 2 r (1 - r^n)/(1-r)^2`.
fn wander_sum(days: f64) -> f64 {
    let r = WANDER_LIKENESS;
    let tail = 2.0 * r * (1.0 - libm::pow(r, days)) / ((1.0 - r) * (1.0 - r));
    (days * (1.0 + r) / (1.0 - r) - tail).max(0.0)
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn a_certain_straight_line_reaches_its_limit_on_its_day() {
        let now = Instant::from_micros(0);
        let growth =
            Growth { level_1_m: 1.0, level_sd_1_m: 0.0, per_day_1_m: 0.1, per_day_sd_1_m: 0.0 };
        let d = dates(now, &growth, |_| (2.0, 0.0));
        assert!((d.p50.unwrap().days_since(now) - 10.0).abs() <= STEP_DAYS);
        assert!(d.p10.unwrap() < d.p50.unwrap() && d.p50.unwrap() < d.p90.unwrap());
    }

    #[test]
    fn what_does_not_grow_has_no_date() {
        let growth =
            Growth { level_1_m: 1.0, level_sd_1_m: 0.0, per_day_1_m: 0.0, per_day_sd_1_m: 0.0 };
        assert_eq!(dates(Instant::from_micros(0), &growth, |_| (2.0, 0.0)), Dates::default());
    }

    #[test]
    fn the_wander_sum_of_whole_days_is_the_double_sum() {
        // Against the double sum written out: sum over i, j of r^|i-j|.
        for n in [1, 2, 5, 14] {
            let sum: f64 = (0..n)
                .flat_map(|i: i32| {
                    (0..n).map(move |j| libm::pow(WANDER_LIKENESS, f64::from((i - j).abs())))
                })
                .sum();
            assert!((wander_sum(f64::from(n)) - sum).abs() < 1e-9, "{n}");
        }
    }
}
