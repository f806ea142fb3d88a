//! Units on the way out: which unit a quantity is shown in, and to how many figures.

use std::collections::BTreeMap;

use serde::{Deserialize, Serialize};
use utoipa::ToSchema;

use crate::base::{Unit, unit_by_ucum};

/// The units that an answer is written in.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq, Serialize, Deserialize, ToSchema)]
#[serde(rename_all = "lowercase")]
pub enum UnitSystem {
    /// bar, °C, m3/h, L/(m2.h).
    #[default]
    Si,
    /// psi, °F, gallons a minute, gallons a square foot and day.
    Us,
}

/// UCUM codes, or labels, by the name of the field they belong to.
#[derive(Clone, Debug, Default, PartialEq, Eq, Serialize, ToSchema)]
pub struct UnitCodes(BTreeMap<String, String>);

/// How a number is rounded.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
enum Round {
    Figures(usize),
    Decimals(usize),
}

/// The avoirdupois pound in kg, exact by definition.
const POUND_KG: f64 = 0.453_592_37;

/// How one quantity is shown.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Shown {
    /// UCUM code.
    pub unit: &'static str,
    /// For people.
    pub label: &'static str,
    factor: f64,
    offset: f64,
    round: Round,
}

impl Shown {
    /// A value in SI, as shown; `None` where it is not a finite number.
    pub fn value(&self, si: f64) -> Option<f64> {
        self.round.apply((si - self.offset) / self.factor)
    }

    /// The same for a value that may be missing.
    pub fn optional(&self, si: Option<f64>) -> Option<f64> {
        self.value(si?)
    }

    /// Both ends of an interval, the lower first; `None` if one of them is not finite.
    pub fn interval(&self, low: f64, high: f64) -> Option<[f64; 2]> {
        Some([self.value(low.min(high))?, self.value(low.max(high))?])
    }

    /// For sentences: `27.4 %`.
    pub fn text(&self, si: f64) -> String {
        match self.value(si) {
            Some(v) => format!("{v} {}", self.label),
            None => "not known".to_owned(),
        }
    }

    /// Value, unit and label in one.
    pub fn view(&self, si: f64) -> ValueView {
        ValueView {
            value: self.value(si),
            unit: self.unit.to_owned(),
            unit_label: self.label.to_owned(),
        }
    }
}

impl Round {
    /// By way of decimal text, so that what is written out has no tail of binary noise.
    fn apply(self, value: f64) -> Option<f64> {
        if !value.is_finite() {
            return None;
        }
        let text = match self {
            Self::Figures(n) => format!("{value:.*e}", n.saturating_sub(1)),
            Self::Decimals(n) => format!("{value:.n$}"),
        };
        // Adding zero takes the sign off a negative zero.
        text.parse::<f64>().ok().map(|v| v + 0.0)
    }
}

/// A number with its unit.
#[derive(Clone, Debug, PartialEq, Serialize, ToSchema)]
pub struct ValueView {
    /// The number; null where it is not known.
    pub value: Option<f64>,
    /// UCUM code.
    pub unit: String,
    /// For people.
    pub unit_label: String,
}

/// How every quantity is shown in one system of units.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Units {
    /// From m/(s.Pa).
    pub permeability: Shown,
    /// From m/s.
    pub flux: Shown,
    /// From m3/s.
    pub flow: Shown,
    /// From Pa.
    pub tmp: Shown,
    /// From degrees Celsius.
    pub temperature: Shown,
    /// From 1/m.
    pub resistance: Shown,
    /// From 1/m per day.
    pub resistance_per_day: Shown,
    /// From a share of 1, in per cent.
    pub share: Shown,
    /// From a share of 1 per day.
    pub share_per_day: Shown,
    /// From m3/m2.
    pub volume_per_area: Shown,
    /// From m3.
    pub volume: Shown,
    /// From kg.
    pub mass: Shown,
    /// From m2.
    pub area: Shown,
    /// A chance, from 0 to 1.
    pub chance: Shown,
}

impl Units {
    /// The units of a system.
    pub fn new(system: UnitSystem) -> Self {
        let us = system == UnitSystem::Us;
        let pick = |si: &'static str, other: &'static str| table(if us { other } else { si });
        let volume = pick("L", "[gal_us]");
        let area = pick("m2", "[sft_i]");
        Self {
            permeability: shown(
                pick("L/(m2.h.bar)", "[gal_us]/([sft_i].d.[psi])"),
                Round::Figures(4),
            ),
            flux: shown(pick("L/(m2.h)", "[gal_us]/([sft_i].d)"), Round::Decimals(1)),
            flow: shown(pick("m3/h", "[gal_us]/min"), Round::Figures(4)),
            // A thousandth of a bar is about a hundredth of a psi.
            tmp: shown(pick("bar", "[psi]"), Round::Decimals(if us { 2 } else { 3 })),
            temperature: shown(pick("Cel", "[degF]"), Round::Decimals(1)),
            resistance: shown(table("m-1"), Round::Figures(3)),
            resistance_per_day: Shown {
                unit: "m-1.d-1",
                label: "1/m per day",
                factor: 1.0,
                offset: 0.0,
                round: Round::Figures(3),
            },
            share: shown(table("%"), Round::Decimals(1)),
            share_per_day: Shown {
                unit: "%/d",
                label: "% per day",
                factor: table("%").factor,
                offset: 0.0,
                round: Round::Decimals(2),
            },
            volume_per_area: Shown {
                unit: if us { "[gal_us]/[sft_i]" } else { "L/m2" },
                label: if us { "gal/ft²" } else { "L/m²" },
                factor: volume.factor / area.factor,
                offset: 0.0,
                round: Round::Figures(3),
            },
            volume: shown(pick("m3", "[gal_us]"), Round::Figures(4)),
            mass: Shown {
                unit: if us { "[lb_av]" } else { "kg" },
                label: if us { "lb" } else { "kg" },
                factor: if us { POUND_KG } else { 1.0 },
                offset: 0.0,
                round: Round::Figures(3),
            },
            area: shown(area, Round::Figures(6)),
            chance: shown(table("1"), Round::Figures(2)),
        }
    }
}

fn shown(unit: Unit, round: Round) -> Shown {
    Shown { unit: unit.ucum, label: unit.label, factor: unit.factor, offset: unit.offset, round }
}

/// A unit of the program's own table.
fn table(code: &'static str) -> Unit {
    unit_by_ucum(code)
        .expect("the table of units holds every unit that is shown; a test sees to it")
}

/// The maps `units` and `unit_labels` of a view, from the names of its fields.
pub fn unit_maps(fields: &[(&str, &Shown)]) -> (UnitCodes, UnitCodes) {
    let of = |f: fn(&Shown) -> &'static str| {
        UnitCodes(fields.iter().map(|(name, s)| ((*name).to_owned(), f(s).to_owned())).collect())
    };
    (of(|s| s.unit), of(|s| s.label))
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn units_and_labels_are_those_of_the_interface() {
        let si = Units::new(UnitSystem::Si);
        let us = Units::new(UnitSystem::Us);
        for (shown, unit, label) in [
            (si.permeability, "L/(m2.h.bar)", "L/(m²·h·bar)"),
            (si.flux, "L/(m2.h)", "L/(m²·h)"),
            (si.flow, "m3/h", "m³/h"),
            (si.tmp, "bar", "bar"),
            (si.temperature, "Cel", "°C"),
            (si.resistance, "m-1", "1/m"),
            (si.share, "%", "%"),
            (us.permeability, "[gal_us]/([sft_i].d.[psi])", "gfd/psi"),
            (us.flux, "[gal_us]/([sft_i].d)", "gfd"),
            (us.flow, "[gal_us]/min", "gpm"),
            (us.tmp, "[psi]", "psi"),
            (us.temperature, "[degF]", "°F"),
            (us.resistance, "m-1", "1/m"),
        ] {
            assert_eq!((shown.unit, shown.label), (unit, label));
        }
    }

    #[test]
    fn numbers_are_rounded_as_they_are_read() {
        let si = Units::new(UnitSystem::Si);
        let lmh_bar = 1e-3 / 3600.0 / 1e5;
        assert_eq!(si.permeability.value(231.0642 * lmh_bar), Some(231.1));
        assert_eq!(si.permeability.value(98.7654 * lmh_bar), Some(98.77));
        assert_eq!(si.flux.value(61.84e-3 / 3600.0), Some(61.8));
        assert_eq!(si.tmp.value(33_560.0), Some(0.336));
        assert_eq!(si.temperature.value(11.349), Some(11.3));
        assert_eq!(si.resistance.value(1.5603e12), Some(1.56e12));
        assert_eq!(si.share.value(0.27449), Some(27.4));
        assert_eq!(si.volume_per_area.value(0.030_88), Some(30.9));
        assert_eq!(si.temperature.value(-0.01).map(f64::is_sign_positive), Some(true));
        assert_eq!(si.tmp.value(f64::NAN), None);
        assert_eq!(si.tmp.value(f64::INFINITY), None);
        assert_eq!(si.share.text(0.3), "30 %");
        assert_eq!(si.share.text(f64::NAN), "not known");
        assert_eq!(si.share.interval(0.3, 0.2), Some([20.0, 30.0]));
    }

    #[test]
    fn us_values_agree_with_published_factors() {
        // NIST Special Publication 811 (2008), appendix B.8, quoted from memory: 1 psi is
        // 6.894757 kPa, 1 gallon a minute 6.309020e-5 m3/s. 1 gfd = 1.697743 L/(m2 h).
        let us = Units::new(UnitSystem::Us);
        assert_eq!(us.tmp.value(6_894.757), Some(1.0));
        assert_eq!(us.flow.value(6.309_020e-3), Some(100.0));
        assert_eq!(us.flux.value(61.8e-3 / 3600.0), Some(36.4));
        assert_eq!(us.temperature.value(11.3), Some(52.3));
        // 231.1 / 24.62368.
        assert_eq!(us.permeability.value(231.1e-3 / 3600.0 / 1e5), Some(9.385));
    }
}
