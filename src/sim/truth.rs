//! What is true of the plant: what no instrument shows, and what the service is scored against.

use crate::base::{Instant, TrainId};
use crate::plant::{Limits, Phase};

/// What is true of a train at a minute.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct TrainTruth {
    /// When.
    pub at: Instant,
    /// What it is doing.
    pub phase: Phase,
    /// Membrane, 1/m.
    pub r_membrane_per_m: f64,
    /// What nothing brings back, 1/m.
    pub r_irrecoverable_per_m: f64,
    /// What only chemicals bring back, 1/m.
    pub r_chemical_per_m: f64,
    /// What a backwash brings back, 1/m.
    pub r_reversible_per_m: f64,
    /// Resistance when the present or latest cycle began, 1/m.
    pub start_of_cycle_per_m: f64,
    /// Start-of-cycle resistance after the last clean that restored, 1/m.
    pub baseline_per_m: f64,
    /// Filtered in the present or latest cycle, m3 through each m2.
    pub cycle_volume_m: f64,
    /// Flux, m/s; 0 unless filtering.
    pub flux_m_s: f64,
    /// Transmembrane pressure without noise, with what the gauges show at rest, Pa; 0 unless
    /// filtering.
    pub tmp_pa: f64,
    /// The feed's temperature, degrees Celsius.
    pub temperature_degc: f64,
}

impl TrainTruth {
    /// Whole resistance, 1/m.
    pub fn resistance_per_m(&self) -> f64 {
        self.r_membrane_per_m
            + self.r_irrecoverable_per_m
            + self.r_chemical_per_m
            + self.r_reversible_per_m
    }
    /// Loss of start-of-cycle permeability against after-clean, a share, 0 to 1; below 0 where
    /// the train is better than then.
    pub fn loss(&self) -> f64 {
        1.0 - self.baseline_per_m / self.start_of_cycle_per_m
    }
}

/// A limit of a train.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord)]
#[expect(missing_docs, reason = "the names say it")]
pub enum LimitKind {
    LossAdvisory,
    LossClean,
    TmpAdvisory,
    TmpClean,
}

/// A limit that was truly crossed and held for the on-delay.
#[derive(Clone, Debug, PartialEq)]
pub struct Crossing {
    /// Train.
    pub train: TrainId,
    /// Which limit.
    pub limit: LimitKind,
    /// From when every cycle was past it.
    pub first: Instant,
    /// When that had lasted for the on-delay, in filtration time.
    pub held: Instant,
}

/// What a clean in place truly did.
#[derive(Clone, Debug, PartialEq)]
pub struct CleanTruth {
    /// Train.
    pub train: TrainId,
    /// Taken out.
    pub start: Instant,
    /// Last step ended.
    pub end: Instant,
    /// Start-of-cycle resistance before, 1/m.
    pub before_per_m: f64,
    /// After, 1/m.
    pub after_per_m: f64,
    /// Best after any clean so far, this one counted, 1/m.
    pub best_per_m: f64,
    /// Whether at least 95 per cent of the best permeability after a clean came back; only
    /// then does the baseline move.
    pub restored: bool,
}

/// Watches one limit of one train.
#[derive(Clone, Debug)]
struct Watch {
    kind: LimitKind,
    limit: f64,
    clears_below: f64,
    over_since: Option<Instant>,
    held_us: i64,
    standing: bool,
}

impl Watch {
    fn new(kind: LimitKind, limit: f64, clears_below: f64) -> Self {
        Self { kind, limit, clears_below, over_since: None, held_us: 0, standing: false }
    }

    /// Takes a cycle's value and the filtration since the value before; gives the moments of a
    /// crossing once it has held.
    fn see(&mut self, at: Instant, value: f64, since_us: i64, delay_us: i64) -> Option<Instant> {
        if self.standing {
            self.standing = value >= self.clears_below;
            return None;
        }
        if value < self.limit {
            self.over_since = None;
            return None;
        }
        match self.over_since {
            None => {
                self.over_since = Some(at);
                self.held_us = 0;
            }
            Some(_) => self.held_us += since_us,
        }
        if self.held_us < delay_us {
            return None;
        }
        self.standing = true;
        self.over_since.take()
    }
}

/// Watches the limits of one train.
#[derive(Clone, Debug)]
pub(super) struct Watches {
    loss: [Watch; 2],
    tmp: [Watch; 2],
    delay_us: i64,
}

impl Watches {
    pub(super) fn new(limits: &Limits) -> Self {
        use LimitKind::{LossAdvisory, LossClean, TmpAdvisory, TmpClean};
        let loss = |kind, limit| Watch::new(kind, limit, limit - limits.deadband);
        let tmp = |kind, limit| Watch::new(kind, limit, limit * (1.0 - limits.deadband));
        Self {
            loss: [
                loss(LossAdvisory, limits.permeability_loss.advisory),
                loss(LossClean, limits.permeability_loss.clean),
            ],
            tmp: [tmp(TmpAdvisory, limits.tmp_pa.advisory), tmp(TmpClean, limits.tmp_pa.clean)],
            delay_us: limits.on_delay_us,
        }
    }

    /// Takes what was true of a cycle when it ended: its start's loss, its end's TMP, and how
    /// long it lasted.
    pub(super) fn cycle(
        &mut self,
        train: &TrainId,
        at: Instant,
        lasted_us: i64,
        loss: f64,
        tmp_pa: f64,
        crossings: &mut Vec<Crossing>,
    ) {
        let loss = self.loss.iter_mut().map(|w| (w, loss));
        for (watch, value) in loss.chain(self.tmp.iter_mut().map(|w| (w, tmp_pa))) {
            if let Some(first) = watch.see(at, value, lasted_us, self.delay_us) {
                let (train, limit) = (train.clone(), watch.kind);
                crossings.push(Crossing { train, limit, first, held: at });
            }
        }
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::base::HOUR_US;

    #[test]
    fn a_limit_counts_once_it_has_held_and_again_only_past_the_deadband() {
        let mut watch = Watch::new(LimitKind::LossClean, 0.30, 0.28);
        let mut see = |hour: i64, value: f64| {
            watch.see(Instant::from_micros(hour * HOUR_US), value, HOUR_US, 2 * HOUR_US)
        };
        let at = |hour: i64| Some(Instant::from_micros(hour * HOUR_US));
        assert_eq!(see(0, 0.31), None);
        assert_eq!(see(1, 0.29), None, "below: starts over");
        assert_eq!(see(2, 0.30), None);
        assert_eq!(see(3, 0.31), None);
        assert_eq!(see(4, 0.31), at(2));
        assert_eq!(see(5, 0.285), None);
        assert_eq!((see(6, 0.32), see(7, 0.32), see(8, 0.32)), (None, None, None), "still stands");
        assert_eq!(see(9, 0.10), None);
        assert_eq!((see(10, 0.32), see(11, 0.32)), (None, None));
        assert_eq!(see(12, 0.32), at(10));
    }
}
