//! Flux, transmembrane pressure, resistance and permeability.
//!
//! The functions that return a plain number pass a not-a-number or a division by zero on;
//! [`resistance_1_m`] and [`permeability`] then answer `None`.

/// Standard gravity, m/s2 (CGPM 1901, exact).
pub const STANDARD_GRAVITY_M_S2: f64 = 9.806_65;

/// Flux in m/s of a permeate flow in m3/s through a membrane area in m2, the area in service.
pub fn flux_m_s(flow_m3_s: f64, area_m2: f64) -> f64 {
    flow_m3_s / area_m2
}

/// Transmembrane pressure of a dead-end train, Pa; both pressures gauge, at one elevation.
pub fn tmp_dead_end_pa(feed_pa: f64, permeate_pa: f64) -> f64 {
    feed_pa - permeate_pa
}

/// Transmembrane pressure of a cross-flow train, Pa: the mean of both ends of the feed side less
/// the permeate; all gauge, at one elevation.
pub fn tmp_cross_flow_pa(feed_pa: f64, concentrate_pa: f64, permeate_pa: f64) -> f64 {
    0.5 * (feed_pa + concentrate_pa) - permeate_pa
}

/// Transmembrane pressure of a submerged train, Pa: the water standing above the permeate
/// transmitter (m, negative where the transmitter is higher) less the gauge pressure it reads.
pub fn tmp_submerged_pa(
    level_above_transmitter_m: f64,
    density_kg_m3: f64,
    permeate_pa: f64,
) -> f64 {
    hydrostatic_pa(density_kg_m3, level_above_transmitter_m) - permeate_pa
}

/// Pressure of a column of water, Pa: density in kg/m3, height in m.
pub fn hydrostatic_pa(density_kg_m3: f64, height_m: f64) -> f64 {
    density_kg_m3 * STANDARD_GRAVITY_M_S2 * height_m
}

/// Resistance of the membrane and what lies on it, 1/m: `TMP / (mu J)` (Darcy), mu in Pa.s at the
/// temperature of the water.
///
/// `None` unless all three are above zero: a train that does not filter has no resistance.
pub fn resistance_1_m(tmp_pa: f64, viscosity_pa_s: f64, flux_m_s: f64) -> Option<f64> {
    if !(tmp_pa > 0.0 && viscosity_pa_s > 0.0 && flux_m_s > 0.0) {
        return None;
    }
    positive(tmp_pa / (viscosity_pa_s * flux_m_s))
}

/// Permeability at a reference temperature, m/(s.Pa): `(J / TMP) mu / mu_reference`.
///
/// Both viscosities in Pa.s by one temperature law. `None` unless all four are above zero.
pub fn permeability(
    flux_m_s: f64,
    tmp_pa: f64,
    viscosity_pa_s: f64,
    reference_viscosity_pa_s: f64,
) -> Option<f64> {
    let resistance_1_m = resistance_1_m(tmp_pa, viscosity_pa_s, flux_m_s)?;
    permeability_of_resistance(resistance_1_m, reference_viscosity_pa_s)
}

/// Permeability in m/(s.Pa) of a resistance in 1/m: `1 / (mu_reference R)`.
///
/// `None` unless both are above zero.
pub fn permeability_of_resistance(
    resistance_1_m: f64,
    reference_viscosity_pa_s: f64,
) -> Option<f64> {
    if !(resistance_1_m > 0.0 && reference_viscosity_pa_s > 0.0) {
        return None;
    }
    positive(1.0 / (reference_viscosity_pa_s * resistance_1_m))
}

/// Resistance in 1/m of a permeability in m/(s.Pa) at the reference temperature.
///
/// `None` unless both are above zero.
pub fn resistance_of_permeability(
    permeability_m_s_pa: f64,
    reference_viscosity_pa_s: f64,
) -> Option<f64> {
    permeability_of_resistance(permeability_m_s_pa, reference_viscosity_pa_s)
}

fn positive(value: f64) -> Option<f64> {
    (value.is_finite() && value > 0.0).then_some(value)
}

#[cfg(test)]
mod tests {
    use super::*;

    fn close(got: f64, want: f64, relative: f64) {
        assert!((got - want).abs() <= relative * want.abs(), "{got:e}, wanted {want:e}");
    }

    #[test]
    fn a_worked_train() {
        // 59 m3/h on 1000 m2 is 59 L/(m2.h); at 0.43 bar and 20 degrees Celsius that is
        // 137.2 L/(m2.h.bar), worked by hand.
        let flux = flux_m_s(59.0 / 3600.0, 1000.0);
        close(flux * 3.6e6, 59.0, 1e-12);
        let mu = 1.001_567e-3;
        let resistance = resistance_1_m(0.43e5, mu, flux).unwrap();
        let l20 = permeability_of_resistance(resistance, mu).unwrap();
        close(l20 * 3.6e6 * 1e5, 137.209, 1e-5);
        close(permeability(flux, 0.43e5, mu, mu).unwrap(), l20, 1e-12);
        close(resistance_of_permeability(l20, mu).unwrap(), resistance, 1e-12);
        // Water twice as thick at the same flux and pressure: a membrane twice as open.
        close(permeability(flux, 0.43e5, 2.0 * mu, mu).unwrap(), 2.0 * l20, 1e-12);
    }

    #[test]
    fn transmembrane_pressures() {
        assert_eq!(tmp_dead_end_pa(90e3, 30e3), 60e3);
        assert_eq!(tmp_cross_flow_pa(120e3, 80e3, 30e3), 70e3);
        // Two metres of water above the transmitter, suction of 20 kPa below the air.
        close(tmp_submerged_pa(2.0, 1000.0, -20e3), 39_613.3, 1e-9);
    }

    #[test]
    fn a_train_that_does_not_filter_has_neither() {
        for bad in [0.0, -1.0, f64::NAN] {
            assert_eq!(resistance_1_m(bad, 1e-3, 1e-5), None);
            assert_eq!(resistance_1_m(1e5, bad, 1e-5), None);
            assert_eq!(resistance_1_m(1e5, 1e-3, bad), None);
            assert_eq!(permeability(1e-5, 1e5, 1e-3, bad), None);
            assert_eq!(permeability_of_resistance(bad, 1e-3), None);
        }
        assert_eq!(resistance_1_m(1e5, 1e-3, flux_m_s(1.0, 0.0)), None);
    }
}
