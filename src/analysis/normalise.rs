//! Stage 1: resistance of every sample of filtration, and which samples are steady.

use crate::base::MINUTE_US;
use crate::plant::{Phase, Train};
use crate::science::{self, TemperatureLaw};

use super::day_input::Samples;
use super::phases::PhaseSpan;
use super::reason::Reason;

/// Readings this soon after the start of filtration are not steady (common practice, no source).
pub const SETTLING_US: i64 = 3 * MINUTE_US;
/// Flow must have held this long (common practice, no source).
const HOLD_US: i64 = 4 * MINUTE_US;
/// Within this share of its own median (common practice, no source).
pub const FLOW_BAND: f64 = 0.05;

/// Resistance by sample.
#[derive(Clone, Debug, Default)]
pub struct Normalised {
    /// 1/m; NaN where it cannot be told.
    pub resistance_1_m: Vec<f64>,
    /// Why it cannot be told, or why a sample of filtration does not count; `None` for a
    /// steady sample and for one that is not filtration.
    pub reason: Vec<Option<Reason>>,
}

impl Normalised {
    /// Whether a sample counts.
    pub fn counts(&self, i: usize) -> bool {
        self.reason[i].is_none() && self.resistance_1_m[i].is_finite()
    }
}

/// Viscosity with a memory: readings repeat to a hundredth of a degree, the law costs four powers.
#[derive(Debug)]
pub struct Viscosity {
    law: TemperatureLaw,
    hundredths: Vec<f64>,
}

impl Viscosity {
    /// For one law.
    pub fn new(law: TemperatureLaw) -> Self {
        Self { law, hundredths: vec![0.0; 10_001] }
    }

    /// Pa s at a temperature in degrees Celsius; NaN outside the law's range.
    pub fn pa_s(&mut self, degc: f64) -> f64 {
        let scaled = degc * 100.0;
        let index = scaled.round();
        if (0.0..=10_000.0).contains(&index) && index / 100.0 == degc {
            let known = self.hundredths[index as usize];
            if known != 0.0 {
                return known;
            }
            let value = self.by_law(degc);
            self.hundredths[index as usize] = value;
            return value;
        }
        self.by_law(degc)
    }

    fn by_law(&self, degc: f64) -> f64 {
        science::law_viscosity_pa_s(self.law, degc).unwrap_or(f64::NAN)
    }
}

/// Works out the resistance of the samples of filtration.
pub fn normalise(
    train: &Train,
    samples: &Samples,
    spans: &[PhaseSpan],
    viscosity: &mut Viscosity,
) -> Normalised {
    let n = samples.times.len();
    let mut out = Normalised { resistance_1_m: vec![f64::NAN; n], reason: vec![None; n] };
    for span in spans {
        for i in span.first..=span.last {
            match span.phase {
                Phase::Filtration => {
                    let (r, why) = resistance(samples, i, train.tmp_floor_pa, viscosity);
                    out.resistance_1_m[i] = r;
                    out.reason[i] = why.or_else(|| unsteady(samples, span, i));
                }
                Phase::Unknown => out.reason[i] = Some(Reason::UnknownState),
                _ => {}
            }
        }
    }
    out
}

fn resistance(
    samples: &Samples,
    i: usize,
    floor_pa: f64,
    viscosity: &mut Viscosity,
) -> (f64, Option<Reason>) {
    let (flux, tmp, degc) = (samples.flux_m_s[i], samples.tmp_pa[i], samples.temperature_degc[i]);
    if samples.frozen[i] {
        return (f64::NAN, Some(Reason::Frozen));
    }
    if flux.is_nan() {
        return (f64::NAN, Some(Reason::NoFlow));
    }
    if tmp.is_nan() {
        return (f64::NAN, Some(Reason::NoPressure));
    }
    if degc.is_nan() {
        return (f64::NAN, Some(Reason::NoTemperature));
    }
    let mu = viscosity.pa_s(degc);
    if mu.is_nan() {
        return (f64::NAN, Some(Reason::TemperatureOutOfRange));
    }
    if flux <= 0.0 {
        return (f64::NAN, Some(Reason::UnsteadyFlow));
    }
    if tmp < floor_pa {
        return (f64::NAN, Some(Reason::TmpUnderFloor));
    }
    (tmp / (mu * flux), None)
}

/// Steadiness looks back only, so that an hour never depends on what came after it.
fn unsteady(samples: &Samples, span: &PhaseSpan, i: usize) -> Option<Reason> {
    let now = samples.times[i];
    if span.began && now.since(span.from) < SETTLING_US {
        return Some(Reason::JustStarted);
    }
    let reach_us = HOLD_US.max(2 * samples.every_us);
    let mut recent = [0.0; 32];
    let mut n = 0;
    for k in (span.first..=i).rev() {
        if now.since(samples.times[k]) > reach_us || n == recent.len() {
            break;
        }
        if samples.flux_m_s[k].is_finite() {
            recent[n] = samples.flux_m_s[k];
            n += 1;
        }
    }
    let held = &mut recent[..n];
    let (low, high) =
        held.iter().fold((f64::INFINITY, 0.0_f64), |(l, h), v| (l.min(*v), h.max(*v)));
    held.sort_by(f64::total_cmp);
    let middle = held.get(n / 2).copied().unwrap_or(f64::NAN);
    let steady = n >= 2 && high <= middle * (1.0 + FLOW_BAND) && low >= middle * (1.0 - FLOW_BAND);
    // The look back still reaches the rise of the flow: that is settling, not wandering.
    let rising = span.began && now.since(span.from) < SETTLING_US + reach_us;
    let why = if rising { Reason::JustStarted } else { Reason::UnsteadyFlow };
    (!steady).then_some(why)
}
