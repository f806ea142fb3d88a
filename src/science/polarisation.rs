//! Concentration polarisation: film theory and the flux that a gel layer limits.

use super::regression::fit_line;

/// Concentration at the membrane, in the unit of the others: `Cp + (Cb - Cp) exp(J / k)`.
///
/// Film theory; `k_m_s` is the mass transfer coefficient, flux in m/s. `None` unless k is above
/// zero and the answer is a number. Says nothing once a gel has formed: the concentration then
/// stays at the gel's.
pub fn wall_concentration(bulk: f64, permeate: f64, flux_m_s: f64, k_m_s: f64) -> Option<f64> {
    if k_m_s.is_nan() || k_m_s <= 0.0 {
        return None;
    }
    let wall = permeate + (bulk - permeate) * libm::exp(flux_m_s / k_m_s);
    wall.is_finite().then_some(wall)
}

/// Flux that no longer answers to pressure: `J = k ln(Cg / Cb)`.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct GelLimit {
    /// Mass transfer coefficient k, m/s.
    pub k_m_s: f64,
    /// Concentration of the gel Cg, in the unit of the bulk's.
    pub gel_concentration: f64,
}

impl GelLimit {
    /// Fits limiting fluxes in m/s against the logarithm of bulk concentrations.
    ///
    /// `None` for fewer than two points, a concentration that is not above zero, concentrations
    /// that do not vary, or a flux that does not fall with them. Cg is extrapolated, often by two
    /// decades: it is a parameter of the fit rather than a measured concentration.
    pub fn fit(bulk: &[f64], limiting_flux_m_s: &[f64]) -> Option<Self> {
        if !bulk.iter().all(|c| *c > 0.0) {
            return None;
        }
        let logarithm: Vec<f64> = bulk.iter().map(|c| libm::log(*c)).collect();
        let line = fit_line(&logarithm, limiting_flux_m_s)?;
        let k_m_s = -line.slope;
        if k_m_s <= 0.0 {
            return None;
        }
        let gel_concentration = libm::exp(line.intercept / k_m_s);
        gel_concentration.is_finite().then_some(Self { k_m_s, gel_concentration })
    }

    /// Limiting flux at a bulk concentration, m/s.
    ///
    /// `None` unless the bulk is above zero and below the gel, where no flux is left.
    pub fn flux_m_s(&self, bulk: f64) -> Option<f64> {
        (bulk > 0.0 && bulk < self.gel_concentration)
            .then(|| self.k_m_s * libm::log(self.gel_concentration / bulk))
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn polarisation_vanishes_with_the_flux() {
        assert_eq!(wall_concentration(2.0, 0.5, 0.0, 1e-6), Some(2.0));
        assert_eq!(wall_concentration(2.0, 2.0, 5e-6, 1e-6), Some(2.0));
        assert_eq!(wall_concentration(2.0, 0.5, 1e-6, 0.0), None);
        assert_eq!(wall_concentration(2.0, 0.5, 1.0, 1e-6), None);
    }

    #[test]
    fn no_limit_where_flux_does_not_fall() {
        assert_eq!(GelLimit::fit(&[1.0, 2.0], &[1e-6, 2e-6]), None);
        assert_eq!(GelLimit::fit(&[0.0, 2.0], &[2e-6, 1e-6]), None);
        let limit = GelLimit { k_m_s: 1e-6, gel_concentration: 100.0 };
        assert_eq!(limit.flux_m_s(100.0), None);
        assert_eq!(limit.flux_m_s(0.0), None);
        assert!(limit.flux_m_s(50.0).unwrap() > limit.flux_m_s(60.0).unwrap());
    }
}
