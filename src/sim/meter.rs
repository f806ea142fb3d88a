//! The instruments of one train: what the control system shows of what is true.

use super::fault::{Fault, Sensor, SensorFault};
use super::recipe::{LMH_M_S, Noise, TrainRecipe};
use super::rng::Rng;
use super::truth::TrainTruth;
use crate::base::Instant;
use crate::plant::Phase;

/// What a train's instruments show at one minute.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct TrainRow {
    /// Gauge pressure of the feed, Pa.
    pub feed_pressure_pa: f64,
    /// Gauge pressure of the permeate, Pa.
    pub permeate_pressure_pa: f64,
    /// Permeate flow, m3/s; 0 or negative outside filtration.
    pub permeate_flow_m3_s: f64,
    /// What the controller says it is doing.
    pub phase: Phase,
}

#[derive(Clone, Debug)]
pub(super) struct Meters {
    rng: Rng,
    frozen: [Option<f64>; 3],
    faults: Vec<SensorFault>,
}

/// Permeate header over the train's permeate gauge at no flow, Pa, and its rise at the square
/// of a flux of 60 L/(m2.h).
const HEADER_PA: f64 = 25_000.0;
const HEADER_RISE_PA: f64 = 6_000.0;
const HEADER_FLUX_M_S: f64 = 60.0 * LMH_M_S;
/// Pressure decay of a sound train in an integrity test, Pa/s (0.2 kPa/min).
const DECAY_PA_S: f64 = 200.0 / 60.0;

impl Meters {
    pub(super) fn new(recipe: &TrainRecipe, rng: Rng) -> Self {
        let faults = recipe.faults.iter().filter_map(|f| match f {
            Fault::Sensor(fault) => Some(*fault),
            _ => None,
        });
        Self { rng, frozen: [None; 3], faults: faults.collect() }
    }

    /// Reads them all.
    pub(super) fn read(
        &mut self,
        truth: &TrainTruth,
        area_m2: f64,
        into_phase_s: f64,
        noise: &Noise,
    ) -> TrainRow {
        let (feed, permeate, flow) = self.process(truth, area_m2, into_phase_s);
        let feed = feed + noise.pressure_pa * self.rng.meter_noise();
        let permeate = permeate + noise.pressure_pa * self.rng.meter_noise();
        let flow = flow * (1.0 + noise.flow_share * self.rng.meter_noise());
        TrainRow {
            feed_pressure_pa: self.show(Sensor::FeedPressure, 0, truth.at, feed),
            permeate_pressure_pa: self.show(Sensor::PermeatePressure, 1, truth.at, permeate),
            permeate_flow_m3_s: self.show(Sensor::PermeateFlow, 2, truth.at, flow),
            phase: truth.phase,
        }
    }

    fn show(&mut self, sensor: Sensor, slot: usize, at: Instant, value: f64) -> f64 {
        match self.frozen.get_mut(slot) {
            Some(frozen) if !self.faults.is_empty() => {
                SensorFault::apply(&self.faults, sensor, at, value, frozen)
            }
            _ => value,
        }
    }

    /// Feed and permeate pressure, Pa, and flow, m3/s, as they are in the pipes.
    fn process(&mut self, truth: &TrainTruth, area_m2: f64, into_phase_s: f64) -> (f64, f64, f64) {
        let rng = &mut self.rng;
        match truth.phase {
            Phase::Filtration => {
                let relative = truth.flux_m_s / HEADER_FLUX_M_S;
                let permeate = HEADER_PA + HEADER_RISE_PA * relative * relative;
                (permeate + truth.tmp_pa, permeate, truth.flux_m_s * area_m2)
            }
            // Permeate is driven back through the membrane; the meter shows it as negative, or
            // as nothing while valves move.
            Phase::Backwash => {
                let back = if rng.uniform() < 0.35 { 0.0 } else { rng.between(220.0, 250.0) };
                let flow = -back * LMH_M_S * area_m2;
                (rng.between(0.5e4, 2.0e4), rng.between(0.9e5, 1.6e5), flow)
            }
            // Pumped in for a minute, then soaking.
            Phase::ChemicalBackwash if into_phase_s < 60.0 => {
                (rng.between(0.5e4, 2.0e4), rng.between(0.7e5, 1.1e5), -90.0 * LMH_M_S * area_m2)
            }
            Phase::ChemicalBackwash => (rng.between(1.0e4, 1.4e4), rng.between(0.8e4, 1.2e4), 0.0),
            // Round and round by the cleaning pump, past the permeate meter.
            Phase::CleanInPlace => (rng.between(2.0e4, 6.0e4), rng.between(-0.3e4, 2.0e4), 0.0),
            // Drained and filled in the first two minutes, then air on the feed side.
            Phase::IntegrityTest if into_phase_s < 120.0 => {
                (rng.between(2.0e4, 9.0e4), rng.between(0.0, 0.2e4), 0.0)
            }
            Phase::IntegrityTest => (1.0e5 - DECAY_PA_S * (into_phase_s - 120.0), 0.0, 0.0),
            _ => (HEADER_PA + rng.between(-200.0, 200.0), HEADER_PA, 0.0),
        }
    }
}
