//! Stage 3: how a run's resistance grows. What it grows by on a day is a mean and a departure
//! from it; one day's departure is like the next day's and fades. Both, and the level, are
//! followed from day to day by least squares (Kalman, J. Basic Eng. 82:35-45, 1960), so that a
//! forecast knows how the last days went, and that they will not go on for ever.

use serde::{Deserialize, Serialize};

use super::days::Day;

/// A day's fouling rate departs from its mean by this share (from memory: a third is usual for
/// surface water), and one day is like the next by this much.
const WANDER_SHARE: f64 = 0.35;
const WANDER_LIKENESS: f64 = 0.85;
/// A day's level is no surer than this, share: within a day it moves with the chemical
/// backwashes (common practice, no source).
const LEVEL_SHARE: f64 = 0.001;
/// A day further than this from what was expected, in standard errors, is a slip or a step, and
/// says nothing of the rate.
const JUMP: f64 = 4.0;

/// What is known of a run's resistance at noon of its last day, and of how it grows.
#[derive(Clone, Copy, Debug, PartialEq, Serialize, Deserialize)]
pub struct Growth {
    /// Start-of-cycle resistance, 1/m; its mean growth a day, 1/m; how much more it grows now.
    pub state: [f64; 3],
    /// Their variances and covariances.
    pub doubt: [[f64; 3]; 3],
    /// Standard deviation of the departure at any time, 1/m a day.
    pub wander_sd_1_m: f64,
}

/// The mean growth to expect before the run's days are looked at.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Expected {
    /// 1/m a day.
    pub per_day_1_m: f64,
    /// Its standard error.
    pub sd_1_m: f64,
}

impl Growth {
    /// Follows the days of a run; `volume_m` is what filters on a usual day, m3/m2. `None`
    /// without a day that has a level.
    pub fn follow(days: &[Day], volume_m: f64, expected: Expected) -> Option<Self> {
        let first = days.iter().position(|d| d.resistance_1_m.is_some())?;
        let wander_sd_1_m = WANDER_SHARE * expected.per_day_1_m.abs();
        let (level, variance) = measured(&days[first])?;
        let mut out = Self {
            state: [level, expected.per_day_1_m, 0.0],
            doubt: [
                [variance, 0.0, 0.0],
                [0.0, expected.sd_1_m * expected.sd_1_m, 0.0],
                [0.0, 0.0, wander_sd_1_m * wander_sd_1_m],
            ],
            wander_sd_1_m,
        };
        for pair in days[first..].windows(2) {
            // From noon to noon.
            out.pass(0.5 * (pair[0].volume_m + pair[1].volume_m) / volume_m);
            if let Some((level, variance)) = measured(&pair[1]) {
                out.learn(level, variance);
            }
        }
        Some(out)
    }

    /// Resistance so many days after the last day's end, and its standard error, 1/m.
    pub fn ahead(&self, days: f64) -> (f64, f64) {
        let r = WANDER_LIKENESS;
        let after_noon = days + 0.5;
        let c = [1.0, after_noon, faded_sum(after_noon)];
        let mean = (0..3).map(|i| c[i] * self.state[i]).sum();
        let known: f64 =
            (0..3).map(|i| (0..3).map(|j| c[i] * self.doubt[i][j] * c[j]).sum::<f64>()).sum();
        // Each day to come brings a departure of its own, which then fades too.
        let fresh = (1.0 - r * r) * self.wander_sd_1_m * self.wander_sd_1_m;
        (mean, (known.max(0.0) + fresh * faded_squares(after_noon - 1.0)).sqrt())
    }

    /// A day goes by on which `share` of the usual volume filters.
    fn pass(&mut self, share: f64) {
        let r = WANDER_LIKENESS;
        let f = [[1.0, share, share], [0.0, 1.0, 0.0], [0.0, 0.0, r]];
        let [level, mean, more] = self.state;
        self.state = [level + share * (mean + more), mean, r * more];
        let turned = product(&f, &self.doubt);
        self.doubt = product(&turned, &transposed(&f));
        self.doubt[2][2] += (1.0 - r * r) * self.wander_sd_1_m * self.wander_sd_1_m;
    }

    fn learn(&mut self, level: f64, variance: f64) {
        let off = level - self.state[0];
        let expected = self.doubt[0][0] + variance;
        if off * off > JUMP * JUMP * expected {
            // If the next day is there too, it was a step; if not, a slip.
            self.doubt[0][0] += off * off;
            return;
        }
        let row = self.doubt[0];
        for ((state, doubt), own) in self.state.iter_mut().zip(&mut self.doubt).zip(row) {
            let gain = own / expected;
            *state += gain * off;
            for (d, r) in doubt.iter_mut().zip(row) {
                *d -= gain * r;
            }
        }
    }
}

/// A day's level and its variance.
fn measured(day: &Day) -> Option<(f64, f64)> {
    let level = day.resistance_1_m?;
    // Half of a 95 % interval is 1.96 standard errors.
    let sd = (day.half_width_1_m.unwrap_or(0.0) / 1.96).max(LEVEL_SHARE * level);
    Some((level, sd * sd))
}

/// What a departure of 1 adds up to in so many days: `1 + r + r^2 + ...`.
fn faded_sum(days: f64) -> f64 {
    (1.0 - libm::pow(WANDER_LIKENESS, days)) / (1.0 - WANDER_LIKENESS)
}

/// Sum of the squares of `faded_sum(1)`, `faded_sum(2)`, ... up to so many days.
fn faded_squares(days: f64) -> f64 {
    let r = WANDER_LIKENESS;
    let n = days.max(0.0);
    let once = 2.0 * r * (1.0 - libm::pow(r, n)) / (1.0 - r);
    let twice = r * r * (1.0 - libm::pow(r, 2.0 * n)) / (1.0 - r * r);
    ((n - once + twice) / ((1.0 - r) * (1.0 - r))).max(0.0)
}

type Square = [[f64; 3]; 3];

fn product(a: &Square, b: &Square) -> Square {
    std::array::from_fn(|i| std::array::from_fn(|j| (0..3).map(|k| a[i][k] * b[k][j]).sum()))
}

fn transposed(a: &Square) -> Square {
    std::array::from_fn(|i| std::array::from_fn(|j| a[j][i]))
}

#[cfg(test)]
mod tests;
