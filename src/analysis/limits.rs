//! Limits and whether they have held: a limit counts once it was exceeded for the whole
//! on-delay of filtration, and no longer once the value is back past the deadband.

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
    /// Filtration time for which it has been exceeded without a break, s.
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
    let kept = if hold.held.is_some() { value >= clear } else { value >= limit };
    if !kept {
        *hold = Hold::default();
        return;
    }
    hold.since = hold.since.or(Some(hour.start));
    hold.over_s += hour.filtration_s;
    if hold.held.is_none() && hold.over_s * 1e6 >= limits.on_delay_us as f64 {
        hold.held = Some(hour.end);
    }
}
