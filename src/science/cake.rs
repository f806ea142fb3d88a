//! Cake filtration: at constant pressure and at constant flux.

use super::regression::fit_line;

/// What a filtration at constant pressure was run at.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct FilterConditions {
    /// Filter area, m2.
    pub area_m2: f64,
    /// Pressure difference, Pa.
    pub pressure_pa: f64,
    /// Viscosity of the filtrate, Pa.s.
    pub viscosity_pa_s: f64,
}

/// Filtration at constant pressure: `t/V = (Kp/2) V + B`.
///
/// Kp is `alpha cs mu / (A^2 dP)`, B is `Rm mu / (A dP)` (Geankoplis, Transport Processes and
/// Separation Process Principles, section 14.2). Valid for an incompressible cake on a medium
/// that stays as it is, while the pressure holds.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct ConstantPressure {
    /// Kp, s/m6.
    pub kp_s_m6: f64,
    /// B, s/m3.
    pub b_s_m3: f64,
}

impl ConstantPressure {
    /// Fits times in s against filtrate volumes in m3, both counted from the start.
    ///
    /// `None` for fewer than two points, a volume that is not above zero, volumes that do not
    /// vary, or a slope that is not above zero (no cake).
    pub fn fit(time_s: &[f64], volume_m3: &[f64]) -> Option<Self> {
        if time_s.len() != volume_m3.len() || !volume_m3.iter().all(|v| *v > 0.0) {
            return None;
        }
        let seconds_a_m3: Vec<f64> = time_s.iter().zip(volume_m3).map(|(t, v)| t / v).collect();
        let line = fit_line(volume_m3, &seconds_a_m3)?;
        (line.slope > 0.0).then_some(Self { kp_s_m6: 2.0 * line.slope, b_s_m3: line.intercept })
    }

    /// The same cake and medium on another area, m2.
    pub fn on_area(&self, fitted_m2: f64, wanted_m2: f64) -> Self {
        let ratio = fitted_m2 / wanted_m2;
        Self { kp_s_m6: self.kp_s_m6 * ratio * ratio, b_s_m3: self.b_s_m3 * ratio }
    }

    /// Resistance of the cake a unit of filtrate volume and area lays down, 1/m2: `alpha cs`.
    pub fn cake_resistance_1_m2(&self, at: &FilterConditions) -> f64 {
        self.kp_s_m6 * at.area_m2 * at.area_m2 * at.pressure_pa / at.viscosity_pa_s
    }

    /// Specific resistance of the cake alpha, m/kg, for `solids_kg_m3` dry solids a m3 of filtrate.
    pub fn specific_cake_resistance_m_kg(&self, at: &FilterConditions, solids_kg_m3: f64) -> f64 {
        self.cake_resistance_1_m2(at) / solids_kg_m3
    }

    /// Resistance of the medium, 1/m.
    pub fn medium_resistance_1_m(&self, at: &FilterConditions) -> f64 {
        self.b_s_m3 * at.area_m2 * at.pressure_pa / at.viscosity_pa_s
    }

    /// Time to filter a volume in m3, s.
    pub fn time_s(&self, volume_m3: f64) -> f64 {
        (0.5 * self.kp_s_m6 * volume_m3 + self.b_s_m3) * volume_m3
    }

    /// Flow once a volume in m3 has passed, m3/s.
    pub fn flow_m3_s(&self, volume_m3: f64) -> f64 {
        1.0 / (self.kp_s_m6 * volume_m3 + self.b_s_m3)
    }

    /// Volume a cycle that gives most filtrate a day where every cycle costs `down_time_s`, m3:
    /// `sqrt(2 td / Kp)`, whatever the medium (Coulson and Richardson, volume 2, example 7.2).
    pub fn best_volume_m3(&self, down_time_s: f64) -> f64 {
        (2.0 * down_time_s / self.kp_s_m6).sqrt()
    }
}

/// Filtration at constant flux: `R = TMP / (mu J) = Rm + a v`, v the filtered volume a unit of area.
///
/// Valid for an incompressible cake; pore blocking bends the line (the blocking laws).
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct ConstantFlux {
    /// Resistance at the start, 1/m.
    pub start_resistance_1_m: f64,
    /// Resistance laid down a m3/m2, 1/m2.
    pub growth_1_m2: f64,
}

impl ConstantFlux {
    /// Fits resistances in 1/m against filtered volumes in m3/m2 by least squares.
    ///
    /// `None` where [`fit_line`] gives none. For plant readings with outliers use `start_value`.
    pub fn fit(volume_m3_m2: &[f64], resistance_1_m: &[f64]) -> Option<Self> {
        let line = fit_line(volume_m3_m2, resistance_1_m)?;
        Some(Self { start_resistance_1_m: line.intercept, growth_1_m2: line.slope })
    }

    /// Transmembrane pressure once a volume in m3/m2 has passed, Pa.
    pub fn tmp_pa(&self, volume_m3_m2: f64, viscosity_pa_s: f64, flux_m_s: f64) -> f64 {
        let resistance_1_m = self.start_resistance_1_m + self.growth_1_m2 * volume_m3_m2;
        resistance_1_m * viscosity_pa_s * flux_m_s
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn the_best_volume_gives_more_than_its_neighbours() {
        let cake = ConstantPressure { kp_s_m6: 2.05e6, b_s_m3: 3e4 };
        let best = cake.best_volume_m3(900.0);
        let mean_flow = |volume: f64| volume / (cake.time_s(volume) + 900.0);
        assert!(mean_flow(best) > mean_flow(0.99 * best));
        assert!(mean_flow(best) > mean_flow(1.01 * best));
        // The flow is the slope of volume over time.
        let slope = 2e-6 / (cake.time_s(best + 1e-6) - cake.time_s(best - 1e-6));
        assert!((cake.flow_m3_s(best) / slope - 1.0).abs() < 1e-6);
    }

    #[test]
    fn no_cake_no_fit() {
        assert_eq!(ConstantPressure::fit(&[10.0, 20.0, 30.0], &[1.0, 2.0, 3.0]), None);
        assert_eq!(ConstantPressure::fit(&[0.0, 20.0], &[0.0, 2.0]), None);
        assert_eq!(ConstantPressure::fit(&[20.0], &[2.0]), None);
        assert_eq!(ConstantFlux::fit(&[1.0], &[2.0]), None);
    }
}
