//! Limits and whether they have held: a limit counts once it was exceeded for the whole
//! on-delay of filtration, and no longer once the value is back past the deadband. Until then
//! an hour within the deadband neither counts nor ends it: an hour's two starts of cycle carry
//! a noise of a point or more, and would let a limit hold days after it was passed.

use serde::{Deserialize, Serialize};

use crate::base::Instant;
use crate::plant::Limits;

use super::hours::Hour;

/// The limits of a train.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord, Serialize, Deserialize)]
#[serde(rename_all = "snake_case")]
pub enum LimitKind {
    /// Loss of permeability worth watching.
    LossAdvisory,
    /// Loss of permeability at which to clean.
    LossClean,
    /// TMP worth watching.
    TmpAdvisory,
    /// TMP at which to clean.
    TmpClean,
}

impl LimitKind {
    /// All, in the order in which they are kept.
    pub const ALL: [Self; 4] =
        [Self::LossAdvisory, Self::LossClean, Self::TmpAdvisory, Self::TmpClean];

    /// The code used in the API.
    pub const fn code(self) -> &'static str {
        match self {
            Self::LossAdvisory => "permeability_loss_advisory",
            Self::LossClean => "permeability_loss_clean",
            Self::TmpAdvisory => "tmp_advisory",
            Self::TmpClean => "tmp_clean",
        }
    }

    /// Whether it asks for a clean.
    pub const fn is_clean(self) -> bool {
        matches!(self, Self::LossClean | Self::TmpClean)
    }

    /// Whether it is a limit of TMP.
    pub const fn is_tmp(self) -> bool {
        matches!(self, Self::TmpAdvisory | Self::TmpClean)
    }

    /// Its value: a share of loss, or Pa; `None` where none is set.
    pub fn value(self, limits: &Limits) -> Option<f64> {
        let value = match self {
            Self::LossAdvisory => limits.permeability_loss.advisory,
            Self::LossClean => limits.permeability_loss.clean,
            Self::TmpAdvisory => limits.tmp_pa.advisory,
            Self::TmpClean => limits.tmp_pa.clean,
        };
        value.is_finite().then_some(value)
    }

    /// The value under which a limit that held no longer does.
    fn clear_value(self, limits: &Limits) -> f64 {
        let value = self.value(limits).unwrap_or(f64::INFINITY);
        if self.is_tmp() { value * (1.0 - limits.deadband) } else { value - limits.deadband }
    }
}

/// How far a limit has come to counting.
#[derive(Clone, Copy, Debug, Default, PartialEq, Serialize, Deserialize)]
pub struct Hold {
    /// Filtration time for which it has been exceeded without a return past the deadband, s.
    pub over_s: f64,
    /// Start of the first hour of that.
    pub since: Option<Instant>,
    /// End of the hour at which it began to count; `None` while it does not.
    pub held: Option<Instant>,
}

/// The four, in the order of [`LimitKind::ALL`].
pub type Holds = [Hold; 4];

/// Loss of permeability of a start-of-cycle resistance against a baseline, share of 1;
/// negative where it is better than the baseline.
pub fn loss(resistance_1_m: f64, baseline_1_m: f64) -> f64 {
    1.0 - baseline_1_m / resistance_1_m
}

/// Takes one hour further.
pub fn step(holds: &mut Holds, hour: &Hour, baseline_1_m: Option<f64>, limits: &Limits) {
    let loss = match (hour.start_resistance_1_m, baseline_1_m) {
        (Some(r), Some(b)) => Some(loss(r, b)),
        _ => None,
    };
    for (hold, kind) in holds.iter_mut().zip(LimitKind::ALL) {
        let value = if kind.is_tmp() { hour.end_tmp_max_pa } else { loss };
        if let (Some(value), Some(limit)) = (value, kind.value(limits)) {
            step_one(hold, hour, value, limit, kind.clear_value(limits), limits);
        }
    }
}

fn step_one(hold: &mut Hold, hour: &Hour, value: f64, limit: f64, clear: f64, limits: &Limits) {
    if value < clear {
        *hold = Hold::default();
    }
    if value < limit {
        return;
    }
    hold.since = hold.since.or(Some(hour.start));
    hold.over_s += hour.filtration_s;
    if hold.held.is_none() && hold.over_s * 1e6 >= limits.on_delay_us as f64 {
        hold.held = Some(hour.end);
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::analysis::Quality;
    use crate::base::{HOUR_US, TrainId};
    use crate::plant::{HoldLimit, Phase};

    const LIMITS: Limits = Limits {
        permeability_loss: HoldLimit { advisory: 0.20, clean: 0.30 },
        tmp_pa: HoldLimit { advisory: f64::INFINITY, clean: f64::INFINITY },
        on_delay_us: 3 * HOUR_US,
        deadband: 0.02,
        planning_horizon_us: 0,
    };

    /// Steps hours of these losses of permeability, in per cent; answers when the clean limit held.
    fn held(losses: &[f64]) -> Option<i64> {
        let mut holds = Holds::default();
        for (k, loss) in (0..).zip(losses) {
            let start = Instant::from_micros(k * HOUR_US);
            let hour = Hour {
                train: TrainId::new("uf-1"),
                start,
                end: start.plus(HOUR_US),
                steady: None,
                start_resistance_1_m: Some(1.0 / (1.0 - loss / 100.0)),
                start_half_width_1_m: None,
                starts: 2,
                end_tmp_max_pa: None,
                samples: 50,
                expected: 60,
                filtration_s: 3600.0,
                volume_m: 0.06,
                mostly: Phase::Filtration,
                quality: Quality::Good,
                reasons: Vec::new(),
            };
            step(&mut holds, &hour, Some(1.0), &LIMITS);
        }
        holds[1].held.map(|h| h.micros() / HOUR_US)
    }

    #[test]
    fn an_hour_within_the_deadband_neither_counts_nor_ends_a_hold() {
        assert_eq!(held(&[31.0, 31.0, 31.0]), Some(3));
        assert_eq!(held(&[31.0, 29.0, 31.0, 29.0, 28.5]), None);
        assert_eq!(held(&[31.0, 29.0, 31.0, 29.0, 31.0]), Some(5));
        assert_eq!(held(&[31.0, 31.0, 27.5, 31.0, 31.0]), None, "past the deadband: anew");
        assert_eq!(held(&[31.0, 31.0, 31.0, 28.5]), Some(3), "held until past the deadband");
        assert_eq!(held(&[31.0, 31.0, 31.0, 27.5]), None);
    }
}
