//! Viscosity and density of water, and the temperature laws by which permeability is compared.

use std::ops::RangeInclusive;

/// Liquid water at atmospheric pressure, degrees Celsius.
const LIQUID_DEGC: RangeInclusive<f64> = 0.0..=100.0;
/// The cubic turns useless above this, degrees Celsius.
const CUBIC_DEGC: RangeInclusive<f64> = 0.0..=40.0;
/// Range given to the one-number laws, which have none of their own; at its upper end
/// `exp(0.0239)` is already 17 % below the viscosity of water.
const ONE_NUMBER_DEGC: RangeInclusive<f64> = 0.0..=60.0;
/// Temperature at which every law is 1, degrees Celsius.
const UNITY_DEGC: f64 = 20.0;
/// [`viscosity_pa_s`] at 20 degrees Celsius, Pa.s; a test holds the two together.
const VISCOSITY_AT_20_DEGC_PA_S: f64 = 1.001_567_264_603_001_5e-3;
/// What a believable plant law loses a kelvin: water itself loses 3.4 % at 0 and 1.5 % at 60
/// degrees Celsius, so anything far outside is a slip of the pen.
const PER_K: RangeInclusive<f64> = 0.01..=0.05;

/// How viscosity follows temperature.
///
/// IAPWS is the physical one. The others exist because a plant may have to match its historical
/// sheets; with 0.0239 a kelvin they make a healthy train look 5.6 % worse at 5 degrees Celsius.
#[derive(Clone, Copy, Debug, PartialEq)]
pub enum TemperatureLaw {
    /// IAPWS SR6-08(2011). Named `iapws`; 0 to 100 degrees Celsius.
    Iapws,
    /// `1.784 - 0.0575 T + 0.0011 T^2 - 1e-5 T^3` mPa.s over its own value at 20 degrees Celsius,
    /// ascribed to EPA 815-R-06-009 (from memory). Named `cubic-epa-815`; 0 to 40 degrees Celsius.
    Cubic,
    /// `exp(k (20 - T))`. Named `exp(0.0239)`, k per kelvin; taken from 0 to 60 degrees Celsius.
    Exponential {
        /// k, per kelvin.
        k_per_k: f64,
    },
    /// `c^(20 - T)`. Named `1.024^(20-T)`; taken from 0 to 60 degrees Celsius.
    PowerBase {
        /// The base, a number.
        c: f64,
    },
}

/// A name that is no temperature law.
#[derive(Clone, Debug, PartialEq, Eq, thiserror::Error)]
pub enum UnknownTemperatureLaw {
    /// The form is not known.
    #[error(
        "`{0}` is no temperature law; write `iapws`, `cubic-epa-815`, `exp(0.0239)` or \
         `1.024^(20-T)`"
    )]
    Form(String),
    /// The form is known, the number cannot be meant.
    #[error("`{0}` does not fit water, which loses 1 to 5 % of its viscosity a kelvin; {1}")]
    Number(String, &'static str),
}

impl TemperatureLaw {
    /// Reads a law's name as [`TemperatureLaw`] gives it; blanks and case do not matter.
    ///
    /// # Errors
    /// A form that is not known, or a number that cannot be meant (k outside 0.01 to 0.05 per
    /// kelvin, or a base outside 1.01 to 1.05).
    pub fn parse(name: &str) -> Result<Self, UnknownTemperatureLaw> {
        let plain: String =
            name.chars().filter(|c| !c.is_whitespace()).collect::<String>().to_ascii_lowercase();
        let form = || UnknownTemperatureLaw::Form(name.to_owned());
        match plain.as_str() {
            "iapws" => return Ok(Self::Iapws),
            "cubic-epa-815" => return Ok(Self::Cubic),
            _ => {}
        }
        if let Some(k) = plain.strip_prefix("exp(").and_then(|rest| rest.strip_suffix(')')) {
            let k_per_k: f64 = k.parse().map_err(|_| form())?;
            if !PER_K.contains(&k_per_k) {
                let hint = "k in `exp(k)` is from 0.01 to 0.05 per kelvin, for example 0.0239";
                return Err(UnknownTemperatureLaw::Number(name.to_owned(), hint));
            }
            return Ok(Self::Exponential { k_per_k });
        }
        let c: f64 = plain.strip_suffix("^(20-t)").and_then(|c| c.parse().ok()).ok_or_else(form)?;
        if !(1.0 + PER_K.start()..=1.0 + PER_K.end()).contains(&c) {
            let hint = "c in `c^(20-T)` is from 1.01 to 1.05, for example 1.024";
            return Err(UnknownTemperatureLaw::Number(name.to_owned(), hint));
        }
        Ok(Self::PowerBase { c })
    }

    /// The law's name; [`TemperatureLaw::parse`] reads it back.
    pub fn name(&self) -> String {
        match self {
            Self::Iapws => "iapws".to_owned(),
            Self::Cubic => "cubic-epa-815".to_owned(),
            Self::Exponential { k_per_k } => format!("exp({k_per_k})"),
            Self::PowerBase { c } => format!("{c}^(20-T)"),
        }
    }
}

/// Dynamic viscosity of water at 0.1 MPa, Pa.s, after IAPWS SR6-08(2011).
///
/// `None` outside 0 to 100 degrees Celsius (the formula reaches from 253.15 to 383.15 K, liquid
/// water in a plant does not). Within 0.0031 % of IAPWS R12-08 from 0 to 60 degrees Celsius.
///
/// Costs four `libm::pow`, some 0.1 us: a caller with a reading a second does well to remember
/// it by hundredths of a degree, which is finer than any thermometer in a plant.
pub fn viscosity_pa_s(degc: f64) -> Option<f64> {
    LIQUID_DEGC.contains(&degc).then(|| {
        let t = (degc + 273.15) / 300.0;
        1e-6 * (280.68 * libm::pow(t, -1.9)
            + 511.45 * libm::pow(t, -7.7)
            + 61.131 * libm::pow(t, -19.6)
            + 0.459_03 * libm::pow(t, -40.0))
    })
}

/// Viscosity over viscosity at 20 degrees Celsius by a law, a number.
///
/// `None` outside the law's range. For another reference temperature divide two of them.
pub fn relative_viscosity(law: TemperatureLaw, degc: f64) -> Option<f64> {
    let above_20_k = degc - UNITY_DEGC;
    match law {
        TemperatureLaw::Iapws => Some(viscosity_pa_s(degc)? / VISCOSITY_AT_20_DEGC_PA_S),
        TemperatureLaw::Cubic => {
            CUBIC_DEGC.contains(&degc).then(|| cubic_mpa_s(degc) / cubic_mpa_s(UNITY_DEGC))
        }
        TemperatureLaw::Exponential { k_per_k } => {
            ONE_NUMBER_DEGC.contains(&degc).then(|| libm::exp(-k_per_k * above_20_k))
        }
        TemperatureLaw::PowerBase { c } => {
            ONE_NUMBER_DEGC.contains(&degc).then(|| libm::pow(c, -above_20_k))
        }
    }
}

/// Viscosity of water by a law, Pa.s: its ratio times the IAPWS value at 20 degrees Celsius.
///
/// So every law gives the same resistance at 20 degrees Celsius. `None` outside the law's range.
pub fn law_viscosity_pa_s(law: TemperatureLaw, degc: f64) -> Option<f64> {
    match law {
        TemperatureLaw::Iapws => viscosity_pa_s(degc),
        _ => Some(relative_viscosity(law, degc)? * VISCOSITY_AT_20_DEGC_PA_S),
    }
}

fn cubic_mpa_s(degc: f64) -> f64 {
    1.784 + degc * (-0.0575 + degc * (0.0011 - 1e-5 * degc))
}

/// Density of air-free water at one atmosphere, kg/m3.
///
/// Kell, J. Chem. Eng. Data 20(1):97 (1975), coefficients from memory and checked against the
/// table of IAPWS-95 values in the tests: within 4e-6 from 0 to 60 degrees Celsius, so his
/// temperature scale of 1968 is taken for today's. `None` outside 0 to 100 degrees Celsius.
pub fn density_kg_m3(degc: f64) -> Option<f64> {
    LIQUID_DEGC.contains(&degc).then(|| {
        let above = 999.839_52
            + degc
                * (16.945_176
                    + degc
                        * (-7.987_040_1e-3
                            + degc
                                * (-46.170_461e-6
                                    + degc * (105.563_02e-9 - degc * 280.542_53e-12))));
        above / (1.0 + 16.879_850e-3 * degc)
    })
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn the_constant_is_the_formula_at_20_degrees() {
        assert_eq!(viscosity_pa_s(20.0), Some(VISCOSITY_AT_20_DEGC_PA_S));
    }

    #[test]
    fn iapws_gives_its_own_check_value_at_300_kelvin() {
        // IAPWS SR6-08(2011), value for computer-program verification: 0.853 72003 mPa.s.
        let at_300_k = viscosity_pa_s(26.85).unwrap();
        assert!((at_300_k - 853.720_03e-6).abs() < 1e-11, "{at_300_k:e}");
    }

    #[test]
    fn every_law_is_one_at_20_degrees_and_silent_outside_its_range() {
        let laws = [
            (TemperatureLaw::Iapws, 100.0),
            (TemperatureLaw::Cubic, 40.0),
            (TemperatureLaw::Exponential { k_per_k: 0.0239 }, 60.0),
            (TemperatureLaw::PowerBase { c: 1.024 }, 60.0),
        ];
        for (law, highest_degc) in laws {
            assert_eq!(relative_viscosity(law, 20.0), Some(1.0), "{law:?}");
            assert_eq!(law_viscosity_pa_s(law, 20.0), Some(VISCOSITY_AT_20_DEGC_PA_S));
            assert!(relative_viscosity(law, 0.0).unwrap() > 1.5, "{law:?}");
            assert!(relative_viscosity(law, highest_degc).unwrap() < 0.7, "{law:?}");
            for outside in [-0.01, highest_degc + 0.01, f64::NAN, f64::INFINITY] {
                assert_eq!(relative_viscosity(law, outside), None, "{law:?} at {outside}");
                assert_eq!(law_viscosity_pa_s(law, outside), None, "{law:?} at {outside}");
            }
        }
        assert_eq!(density_kg_m3(-0.01), None);
        assert_eq!(density_kg_m3(f64::NAN), None);
    }

    #[test]
    fn names_read_back() {
        for name in ["iapws", "cubic-epa-815", "exp(0.0239)", "1.024^(20-T)", "1.0235^(20-T)"] {
            assert_eq!(TemperatureLaw::parse(name).unwrap().name(), name);
        }
        assert_eq!(
            TemperatureLaw::parse(" 1.024 ^ (20 - T) "),
            Ok(TemperatureLaw::PowerBase { c: 1.024 })
        );
        assert_eq!(TemperatureLaw::parse("IAPWS"), Ok(TemperatureLaw::Iapws));
    }

    #[test]
    fn a_name_that_cannot_be_meant_is_refused_with_a_hint() {
        for name in ["", "exp", "exp()", "exp(x)", "1.024", "linear", "x^(20-T)"] {
            let refused = TemperatureLaw::parse(name).unwrap_err();
            assert_eq!(refused, UnknownTemperatureLaw::Form(name.to_owned()));
            assert!(refused.to_string().contains("1.024^(20-T)"));
        }
        for name in ["exp(2.39)", "exp(-0.0239)", "exp(nan)", "0.976^(20-T)", "2^(20-T)"] {
            let refused = TemperatureLaw::parse(name).unwrap_err();
            assert!(matches!(refused, UnknownTemperatureLaw::Number(..)), "{name}: {refused}");
        }
    }
}
