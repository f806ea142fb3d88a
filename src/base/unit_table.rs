//! The table of units. One line a unit: dimension, UCUM code, label, factor and offset to SI,
//! and the trade's other spellings as `fold` leaves them.
//!
//! Exact by definition: pound-force per square inch from the pound (0.45359237 kg), the inch
//! (0.0254 m) and standard gravity (9.80665 m/s2); US gallon 231 cubic inches; imperial gallon
//! 4.54609 L; column of water and of mercury by the conventional densities that UCUM states.

use super::Dimension::{self, *};
use super::Unit;

const MINUTE: f64 = 60.0;
const HOUR: f64 = 3600.0;
const DAY: f64 = 86_400.0;
const GAL_US: f64 = 3.785_411_784e-3;
const GAL_BR: f64 = 4.546_09e-3;
const FT: f64 = 0.3048;
const FT2: f64 = 0.092_903_04;
const FT3: f64 = 0.028_316_846_592;
const PSI: f64 = 6_894.757_293_168;
const M_H2O: f64 = 9_806.65;
const GFD: f64 = GAL_US / FT2 / DAY;
const LMH: f64 = 1e-3 / HOUR;

/// A unit and its other spellings.
pub(super) struct Entry {
    pub unit: Unit,
    pub aliases: &'static [&'static str],
}

const fn u(
    dimension: Dimension,
    ucum: &'static str,
    label: &'static str,
    factor: f64,
    aliases: &'static [&'static str],
) -> Entry {
    Entry { unit: Unit { ucum, label, dimension, factor, offset: 0.0 }, aliases }
}

const fn shifted(
    ucum: &'static str,
    label: &'static str,
    factor: f64,
    offset: f64,
    aliases: &'static [&'static str],
) -> Entry {
    Entry { unit: Unit { ucum, label, dimension: Temperature, factor, offset }, aliases }
}

/// Every unit the program knows. The first of a dimension is the one examples are written in.
#[rustfmt::skip]
pub(super) const UNITS: &[Entry] = &[
    u(Pressure, "bar", "bar", 1e5, &["bars"]),
    u(Pressure, "mbar", "mbar", 1e2, &["millibar", "MBAR"]),
    u(Pressure, "Pa", "Pa", 1.0, &["pascal"]),
    u(Pressure, "hPa", "hPa", 1e2, &[]),
    u(Pressure, "kPa", "kPa", 1e3, &[]),
    u(Pressure, "MPa", "MPa", 1e6, &["MPA"]),
    u(Pressure, "[psi]", "psi", PSI, &["lbf/in2", "lb/in2"]),
    u(Pressure, "atm", "atm", 101_325.0, &[]),
    u(Pressure, "kgf/cm2", "kgf/cm²", 98_066.5, &["kg/cm2"]),
    u(Pressure, "m[H2O]", "mH2O", M_H2O, &["mWC", "mwg", "mWS", "mwc", "mh2o", "MH2O"]),
    u(Pressure, "cm[H2O]", "cmH2O", M_H2O / 100.0, &["cmWC"]),
    u(Pressure, "mm[H2O]", "mmH2O", M_H2O / 1000.0, &["mmWC", "mmwg"]),
    u(Pressure, "[in_i'H2O]", "inH2O", M_H2O * 0.0254, &["inWC", "inwg"]),
    u(Pressure, "12.[in_i'H2O]", "ftH2O", M_H2O * FT, &["ftWC", "ftwg"]),
    u(Pressure, "mm[Hg]", "mmHg", 133.322, &["torr"]),
    u(Pressure, "[in_i'Hg]", "inHg", 133_322.0 * 0.0254, &[]),

    u(PressureRate, "kPa/min", "kPa/min", 1e3 / MINUTE, &[]),
    u(PressureRate, "Pa/s", "Pa/s", 1.0, &[]),
    u(PressureRate, "Pa/min", "Pa/min", 1.0 / MINUTE, &[]),
    u(PressureRate, "mbar/min", "mbar/min", 1e2 / MINUTE, &["MBAR/MIN"]),
    u(PressureRate, "bar/min", "bar/min", 1e5 / MINUTE, &[]),
    u(PressureRate, "[psi]/min", "psi/min", PSI / MINUTE, &[]),

    u(Flow, "m3/h", "m³/h", 1.0 / HOUR, &["m3/hr", "cmh", "m3h", "M3/H", "M3/HR"]),
    u(Flow, "m3/s", "m³/s", 1.0, &["cumecs", "m3s"]),
    u(Flow, "m3/min", "m³/min", 1.0 / MINUTE, &[]),
    u(Flow, "m3/d", "m³/d", 1.0 / DAY, &["m3/day", "cmd", "m3d", "M3/D"]),
    u(Flow, "L/s", "L/s", 1e-3, &["l/sec", "lps"]),
    u(Flow, "L/min", "L/min", 1e-3 / MINUTE, &["lpm"]),
    u(Flow, "L/h", "L/h", 1e-3 / HOUR, &["L/hr", "lph"]),
    u(Flow, "ML/d", "ML/d", 1e3 / DAY, &["MLD", "Ml/d", "ML/day", "ML/D"]),
    u(Flow, "[gal_us]/min", "gpm", GAL_US / MINUTE, &["gal/min", "USgpm", "USgal/min"]),
    u(Flow, "[gal_us]/d", "gpd", GAL_US / DAY, &["gal/d", "gal/day"]),
    u(Flow, "10*6.[gal_us]/d", "MGD", 1e6 * GAL_US / DAY, &["mgd", "Mgal/d", "Mgal/day"]),
    u(Flow, "[gal_br]/min", "igpm", GAL_BR / MINUTE, &["impgpm", "impgal/min"]),
    u(Flow, "[cft_i]/s", "ft³/s", FT3, &["cfs", "cuft/s"]),
    u(Flow, "[cft_i]/min", "ft³/min", FT3 / MINUTE, &["cfm", "cuft/min"]),

    u(Area, "m2", "m²", 1.0, &["sqm", "M2"]),
    u(Area, "[sft_i]", "ft²", FT2, &["sqft", "sf"]),

    u(Flux, "L/(m2.h)", "L/(m²·h)", LMH, &["LMH", "L/m2/h", "L/m2.h", "L/m2h", "L/(m2h)"]),
    u(Flux, "[gal_us]/([sft_i].d)", "gfd", GFD, &["gal/ft2/d", "gal/(ft2.d)", "gal/(ft2d)"]),
    u(Flux, "m/s", "m/s", 1.0, &["m3/(m2.s)", "m3/m2/s"]),
    u(Flux, "m/h", "m/h", 1.0 / HOUR, &["m3/(m2.h)", "m3/m2/h"]),
    u(Flux, "m/d", "m/d", 1.0 / DAY, &["m3/(m2.d)", "m3/m2/d"]),

    u(Permeability, "L/(m2.h.bar)", "L/(m²·h·bar)", LMH / 1e5,
        &["LMH/bar", "L/m2/h/bar", "L/m2.h.bar", "L/m2hbar", "L/(m2hbar)", "L/(m2.h)/bar"]),
    u(Permeability, "L/(m2.h.kPa)", "L/(m²·h·kPa)", LMH / 1e3, &["LMH/kPa", "L/m2/h/kPa"]),
    u(Permeability, "m/(s.Pa)", "m/(s·Pa)", 1.0, &["m/s/Pa", "m3/(m2.s.Pa)"]),
    u(Permeability, "m/(d.bar)", "m/(d·bar)", 1.0 / DAY / 1e5, &["m/d/bar", "m3/(m2.d.bar)"]),
    u(Permeability, "[gal_us]/([sft_i].d.[psi])", "gfd/psi", GFD / PSI,
        &["gal/(ft2.d.psi)", "gal/ft2/d/psi"]),

    u(Resistance, "m-1", "1/m", 1.0, &["/m"]),

    u(Temperature, "Cel", "°C", 1.0, &["degC", "C", "celsius"]),
    shifted("[degF]", "°F", 5.0 / 9.0, -160.0 / 9.0, &["degF", "F", "fahrenheit"]),
    shifted("K", "K", 1.0, -273.15, &["kelvin"]),

    u(Time, "h", "h", HOUR, &["hr", "hrs", "hour", "hours"]),
    u(Time, "s", "s", 1.0, &["sec", "second", "seconds"]),
    u(Time, "ms", "ms", 1e-3, &[]),
    u(Time, "min", "min", MINUTE, &["mins", "minute", "minutes", "MIN"]),
    u(Time, "d", "d", DAY, &["day", "days"]),
    u(Time, "wk", "weeks", 7.0 * DAY, &["week"]),
    u(Time, "a", "years", 365.25 * DAY, &["year", "yr", "yrs"]),

    u(Length, "m", "m", 1.0, &["metre", "metres", "meter", "meters"]),
    u(Length, "cm", "cm", 1e-2, &[]),
    u(Length, "mm", "mm", 1e-3, &["MM"]),
    u(Length, "um", "µm", 1e-6, &["micron"]),
    u(Length, "[ft_i]", "ft", FT, &["feet", "foot"]),
    u(Length, "[in_i]", "in", 0.0254, &["inch", "inches"]),

    u(Volume, "m3", "m³", 1.0, &["M3", "cum"]),
    u(Volume, "L", "L", 1e-3, &["litre", "litres", "liter", "liters"]),
    u(Volume, "mL", "mL", 1e-6, &["ml"]),
    u(Volume, "ML", "ML", 1e3, &["megalitre", "megalitres"]),
    u(Volume, "[gal_us]", "gal", GAL_US, &["USgal", "gallon", "gallons"]),
    u(Volume, "[gal_br]", "imp gal", GAL_BR, &[]),
    u(Volume, "[cft_i]", "ft³", FT3, &["cuft"]),

    // In water a part per million by mass is a milligram per litre, as the trade writes it.
    u(Concentration, "mg/L", "mg/L", 1e-3, &["ppm", "mg/l", "MG/L", "g/m3", "mgL-1"]),
    u(Concentration, "ug/L", "µg/L", 1e-6, &["ppb", "mg/m3"]),
    u(Concentration, "g/L", "g/L", 1.0, &["kg/m3"]),

    u(Conductivity, "uS/cm", "µS/cm", 1e-4, &[]),
    u(Conductivity, "mS/cm", "mS/cm", 1e-1, &[]),
    u(Conductivity, "S/m", "S/m", 1.0, &[]),

    // UCUM has no code for these; braces are its form for a unit by convention.
    u(Turbidity, "{NTU}", "NTU", 1.0, &[]),
    u(Turbidity, "{FNU}", "FNU", 1.0, &[]),
    u(Turbidity, "m{NTU}", "mNTU", 1e-3, &[]),

    u(Share, "%", "%", 1e-2, &["percent", "pct"]),
    u(Share, "1", "1", 1.0, &[]),

    u(Ph, "[pH]", "pH", 1.0, &[]),
];
