//! The feed water: how viscous it is and how warm. The viscosity is a table of its own, from
//! another formulation than the one the service uses, so that an error there cannot cancel.

use super::fault::{Sensor, SensorFault};
use super::recipe::TemperatureRecipe;
use super::rng::Rng;
use crate::base::{DAY_US, Instant};

/// Viscosity of water at 101,325 Pa in micropascal seconds at 0, 1, … 40 degrees Celsius:
/// IAPWS R12-08 at the density of IAPWS-95, as computed by the Python package iapws 1.5.5.
const VISCOSITY_UPA_S: [f64; 41] = [
    1791.756178,
    1731.021286,
    1673.515428,
    1619.008796,
    1567.291773,
    1518.172850,
    1471.476788,
    1427.042989,
    1384.724055,
    1344.384509,
    1305.899660,
    1269.154587,
    1234.043235,
    1200.467607,
    1168.337042,
    1137.567559,
    1108.081282,
    1079.805905,
    1052.674227,
    1026.623720,
    1001.596143,
    977.537193,
    954.396189,
    932.125782,
    910.681696,
    890.022489,
    870.109336,
    850.905834,
    832.377816,
    814.493194,
    797.221800,
    780.535254,
    764.406835,
    748.811362,
    733.725092,
    719.125619,
    704.991782,
    691.303584,
    678.042114,
    665.189477,
    652.728727,
];

/// Viscosity of the plant's water in Pa.s, from 0 to 40 degrees Celsius; beyond, that of the
/// nearer end. A cubic through the four nearest entries of the table.
pub fn viscosity_pa_s(temperature_degc: f64) -> f64 {
    let last = VISCOSITY_UPA_S.len() - 1;
    let t = temperature_degc.clamp(0.0, last as f64);
    let from = (t as usize).saturating_sub(1).min(last - 3);
    let x = t - from as f64;
    let [a, b, c, d] = [0, 1, 2, 3].map(|i| VISCOSITY_UPA_S[from + i]);
    let value = -a * (x - 1.0) * (x - 2.0) * (x - 3.0) / 6.0 + b * x * (x - 2.0) * (x - 3.0) / 2.0
        - c * x * (x - 1.0) * (x - 3.0) / 2.0
        + d * x * (x - 1.0) * (x - 2.0) / 6.0;
    value * 1e-6
}

/// The feed's temperature as time goes by.
#[derive(Clone, Debug)]
pub(super) struct Course {
    rng: Rng,
    day: i64,
    /// Departure from the season at the start of this day and of the next, K.
    departure: (f64, f64),
}

/// How much of one day's departure from the season is left the next day.
const DEPARTURE_KEPT: f64 = 0.8;

impl Course {
    pub(super) fn new(rng: Rng) -> Self {
        Self { rng, day: i64::MIN, departure: (0.0, 0.0) }
    }

    /// Degrees Celsius at a moment; moments may be asked in rising order only.
    pub(super) fn at(&mut self, recipe: &TemperatureRecipe, start: Instant, at: Instant) -> f64 {
        let since = at.since(start);
        let day = since.div_euclid(DAY_US);
        if self.day == i64::MIN {
            self.day = day;
        }
        while self.day < day {
            self.day += 1;
            let fresh = (1.0 - DEPARTURE_KEPT * DEPARTURE_KEPT).sqrt() * recipe.daily_sd_k;
            let next = DEPARTURE_KEPT * self.departure.1 + fresh * self.rng.normal();
            self.departure = (self.departure.1, next.clamp(-1.0, 1.0));
        }
        let share = since.rem_euclid(DAY_US) as f64 / DAY_US as f64;
        let departure = self.departure.0 + share * (self.departure.1 - self.departure.0);
        let snaps: f64 = recipe.cold_snaps.iter().map(|s| s.depth_at(at)).sum();
        (season_degc(recipe, at) + departure - snaps).clamp(0.3, 40.0)
    }
}

/// The season's temperature at a moment, without noise or cold snap.
pub(super) fn season_degc(recipe: &TemperatureRecipe, at: Instant) -> f64 {
    // 1970-01-01 was the first day of a year; a mean year of 365.2425 days does for a season.
    let days = at.days_since(Instant::from_micros(0)) - recipe.coldest_day_of_year;
    let turn = libm::cos(std::f64::consts::TAU * days / 365.2425);
    let middle = 0.5 * (recipe.warmest_degc + recipe.coldest_degc);
    middle - 0.5 * (recipe.warmest_degc - recipe.coldest_degc) * turn
}

/// The one thermometer of the plant.
#[derive(Clone, Debug)]
pub(super) struct Thermometer {
    rng: Rng,
    frozen: Option<f64>,
}

impl Thermometer {
    pub(super) fn new(rng: Rng) -> Self {
        Self { rng, frozen: None }
    }

    /// What it shows, degrees Celsius.
    pub(super) fn read(
        &mut self,
        truth: f64,
        sd_k: f64,
        faults: &[SensorFault],
        at: Instant,
    ) -> f64 {
        let shown = truth + sd_k * self.rng.meter_noise();
        SensorFault::apply(faults, Sensor::Temperature, at, shown, &mut self.frozen)
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::sim::ColdSnap;

    #[test]
    fn viscosity_is_that_of_published_values() {
        // 853.72003 uPa.s at 300 K: the check value of IAPWS SR6-08(2011), another formulation.
        let at_300_k = viscosity_pa_s(26.85);
        assert!((at_300_k / 853.72003e-6 - 1.0).abs() < 5e-5, "{at_300_k}");
        // 1.0016 mPa.s at 20 degrees, the value long used to calibrate viscometers (ISO/TR 3666).
        assert!((viscosity_pa_s(20.0) / 1.0016e-3 - 1.0).abs() < 5e-5);
        // Between the entries, SR6-08(2011) by its own formula, here at 2.5 and 0.5 degrees.
        for t in [0.5_f64, 2.5, 13.7, 39.4] {
            let k = (t + 273.15) / 300.0;
            let formula = 280.68 * libm::pow(k, -1.9)
                + 511.45 * libm::pow(k, -7.7)
                + 61.131 * libm::pow(k, -19.6)
                + 0.45903 * libm::pow(k, -40.0);
            assert!((viscosity_pa_s(t) * 1e6 / formula - 1.0).abs() < 5e-5, "{t}");
        }
        assert_eq!(viscosity_pa_s(-3.0), viscosity_pa_s(0.0));
        assert_eq!(viscosity_pa_s(50.0), viscosity_pa_s(40.0));
    }

    #[test]
    fn the_season_is_told_by_the_date_and_a_snap_goes_below_it() {
        let mut recipe = TemperatureRecipe::seasonal();
        recipe.daily_sd_k = 0.0;
        let at = |text: &str| Instant::parse(text).unwrap();
        let start = at("2026-01-01T00:00:00Z");
        let mut course = Course::new(Rng::stream(1, 1));
        let mut read = |recipe: &TemperatureRecipe, text: &str| course.at(recipe, start, at(text));
        assert!((read(&recipe, "2026-02-06T00:00:00Z") - 3.0).abs() < 0.05);
        recipe.cold_snaps.push(ColdSnap {
            from: at("2026-04-10T00:00:00Z"),
            depth_k: 5.0,
            fall_days: 3.0,
            stay_days: 4.0,
            rise_days: 5.0,
        });
        let season = season_degc(&recipe, at("2026-04-15T00:00:00Z"));
        assert!((read(&recipe, "2026-04-15T00:00:00Z") - (season - 5.0)).abs() < 1e-9);
        assert!((read(&recipe, "2026-08-07T12:00:00Z") - 22.0).abs() < 0.05);
    }
}
