//! Units: one internal unit a quantity, and every conversion of the program, keyed by UCUM
//! code. Internally SI: Pa, m3/s, m2, m/s, m/(s.Pa), 1/m, s, m, m3, kg/m3, S/m; temperatures
//! in degrees Celsius, shares from 0 to 1.
//!
//! Whether a pressure is gauge or absolute is a property of the tag, never of the unit.

use super::unit_table::UNITS;

/// What a unit measures.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord, Hash)]
pub enum Dimension {
    /// Pa.
    Pressure,
    /// Pa/s: the decay of an integrity test.
    PressureRate,
    /// m3/s.
    Flow,
    /// m2.
    Area,
    /// m/s.
    Flux,
    /// m/(s.Pa).
    Permeability,
    /// 1/m.
    Resistance,
    /// Degrees Celsius; a difference of temperatures is not one.
    Temperature,
    /// s.
    Time,
    /// m.
    Length,
    /// m3.
    Volume,
    /// kg/m3.
    Concentration,
    /// S/m.
    Conductivity,
    /// Turbidity units, as calibrated.
    Turbidity,
    /// 1; 20 % is 0.2.
    Share,
    /// pH.
    Ph,
}

impl Dimension {
    /// With its article, for messages: `a pressure`.
    pub fn in_words(self) -> &'static str {
        match self {
            Self::Pressure => "a pressure",
            Self::PressureRate => "a rate of pressure",
            Self::Flow => "a flow",
            Self::Area => "an area",
            Self::Flux => "a flux",
            Self::Permeability => "a permeability",
            Self::Resistance => "a resistance",
            Self::Temperature => "a temperature",
            Self::Time => "a time",
            Self::Length => "a length",
            Self::Volume => "a volume",
            Self::Concentration => "a concentration",
            Self::Conductivity => "a conductivity",
            Self::Turbidity => "a turbidity",
            Self::Share => "a share",
            Self::Ph => "a pH",
        }
    }
    /// How one is written, for messages: `0.9 bar`.
    pub fn example(self) -> &'static str {
        match self {
            Self::Pressure => "0.9 bar",
            Self::PressureRate => "0.2 kPa/min",
            Self::Flow => "200 m3/h",
            Self::Area => "3200 m2",
            Self::Flux => "60 L/(m2.h)",
            Self::Permeability => "270 L/(m2.h.bar)",
            Self::Resistance => "1.4e12 m-1",
            Self::Temperature => "20 degC",
            Self::Time => "8 h",
            Self::Length => "0.4 m",
            Self::Volume => "12 m3",
            Self::Concentration => "500 mg/L",
            Self::Conductivity => "450 uS/cm",
            Self::Turbidity => "0.15 NTU",
            Self::Share => "20 %",
            Self::Ph => "11.5",
        }
    }
}

/// A unit, with its exact conversion to the internal one.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Unit {
    /// UCUM code, case sensitive.
    pub ucum: &'static str,
    /// For people.
    pub label: &'static str,
    /// What it measures.
    pub dimension: Dimension,
    /// SI = value * factor + offset.
    pub factor: f64,
    /// See `factor`; not zero for two units of temperature only.
    pub offset: f64,
}

impl Unit {
    /// A value in this unit, as the internal one.
    pub fn to_si(&self, value: f64) -> f64 {
        value * self.factor + self.offset
    }
    /// A value in the internal unit, as this one.
    pub fn from_si(&self, value_si: f64) -> f64 {
        (value_si - self.offset) / self.factor
    }
}

/// The unit of a UCUM code, to the letter.
pub fn unit_by_ucum(code: &str) -> Option<Unit> {
    UNITS.iter().map(|e| e.unit).find(|u| u.ucum == code)
}

/// The unit of a UCUM code or of a spelling of the trade: `m3/h`, `m³/h`, `cmh`, `gpm`.
///
/// Case counts where it tells units apart (`mL`, `ML`) and in every name that begins with m,
/// which may mean milli or mega; otherwise it does not.
pub fn unit_by_name(name: &str) -> Option<Unit> {
    if let Some(unit) = unit_by_ucum(name.trim()) {
        return Some(unit);
    }
    let name = fold(name);
    if let Some((_, unit)) = names().find(|(n, _)| *n == name) {
        return Some(unit);
    }
    if name.starts_with(['m', 'M']) {
        return None;
    }
    let mut alike = names().filter(|(n, _)| n.eq_ignore_ascii_case(&name));
    let (_, first) = alike.next()?;
    alike.all(|(_, u)| u.ucum == first.ucum).then_some(first)
}

/// Every folded spelling of every unit.
pub(super) fn names() -> impl Iterator<Item = (String, Unit)> {
    UNITS.iter().flat_map(|e| {
        [fold(e.unit.ucum), fold(e.unit.label)]
            .into_iter()
            .chain(e.aliases.iter().map(|a| (*a).to_owned()))
            .map(|n| (n, e.unit))
    })
}

/// One spelling for what differs in typography only: superscripts, dots, spaces, degree signs.
fn fold(name: &str) -> String {
    let mut folded = String::with_capacity(name.len());
    for c in name.chars() {
        match c {
            '²' => folded.push('2'),
            '³' => folded.push('3'),
            '¹' => folded.push('1'),
            '⁻' | '−' => folded.push('-'),
            '·' | '⋅' | '*' | '×' => folded.push('.'),
            'µ' | 'μ' => folded.push('u'),
            '°' | 'º' => folded.push_str("deg"),
            '℃' => folded.push_str("degC"),
            '℉' => folded.push_str("degF"),
            '^' => {}
            c if c.is_whitespace() => {}
            c => folded.push(c),
        }
    }
    folded
}

#[cfg(test)]
mod tests {
    use proptest::prelude::*;

    use super::*;

    fn si(value: f64, name: &str) -> f64 {
        unit_by_name(name).unwrap_or_else(|| panic!("{name}")).to_si(value)
    }

    fn close(a: f64, b: f64, relative: f64) {
        assert!((a - b).abs() <= relative * b.abs(), "{a} is not {b}");
    }

    #[test]
    fn factors_are_those_published() {
        // NIST Special Publication 811 (2008), appendix B.8, to the digits printed there; the
        // values are quoted from memory.
        close(si(1.0, "psi"), 6.894_757e3, 2e-7);
        close(si(1.0, "gal"), 3.785_412e-3, 2e-7);
        close(si(1.0, "ft2"), 9.290_304e-2, 0.0);
        close(si(1.0, "cfs"), 2.831_685e-2, 2e-7);
        close(si(1.0, "gpm"), 6.309_020e-5, 1e-6);
        close(si(1.0, "mH2O"), 9.806_65e3, 1e-12);
        close(si(1.0, "inHg"), 3.386_389e3, 1e-5);
        // Products of those, worked with exact fractions: 1 gfd = 1.697743056 L/(m2 h),
        // 1 gfd/psi = 24.62368 L/(m2 h bar).
        let lmh = unit_by_ucum("L/(m2.h)").unwrap();
        close(lmh.from_si(si(1.0, "gfd")), 1.697_743_056, 1e-9);
        let lmh_bar = unit_by_ucum("L/(m2.h.bar)").unwrap();
        close(lmh_bar.from_si(si(1.0, "gfd/psi")), 24.623_68, 1e-7);
        close(si(1.0, "MGD"), 1e6 * 3.785_411_784e-3 / 86_400.0, 1e-15);
        close(si(1.0, "ML/d"), 1000.0 / 86_400.0, 1e-15);
    }

    #[test]
    fn temperatures_meet_at_their_fixed_points() {
        assert!(si(32.0, "°F").abs() < 1e-12);
        close(si(212.0, "degF"), 100.0, 1e-14);
        assert_eq!(si(273.15, "K"), 0.0);
        close(unit_by_name("°F").unwrap().from_si(20.0), 68.0, 1e-14);
    }

    #[test]
    fn spellings_of_the_trade_are_known() {
        for (name, ucum) in [
            ("m³/h", "m3/h"),
            ("m^3 / h", "m3/h"),
            ("CMH", "m3/h"),
            ("l/s", "L/s"),
            ("PSI", "[psi]"),
            ("°C", "Cel"),
            ("deg C", "Cel"),
            ("ft²", "[sft_i]"),
            ("sq ft", "[sft_i]"),
            ("LMH/bar", "L/(m2.h.bar)"),
            ("L/(m²·h·bar)", "L/(m2.h.bar)"),
            ("1/m", "m-1"),
            ("m⁻¹", "m-1"),
            ("ppm", "mg/L"),
            ("NTU", "{NTU}"),
            ("mgd", "10*6.[gal_us]/d"),
            ("10*6.[gal_us]/d", "10*6.[gal_us]/d"),
            ("µS/cm", "uS/cm"),
            ("years", "a"),
            ("BAR", "bar"),
        ] {
            assert_eq!(unit_by_name(name).map(|u| u.ucum), Some(ucum), "{name}");
        }
    }

    #[test]
    fn milli_is_never_taken_for_mega() {
        assert_eq!(unit_by_name("mPa"), None);
        assert_eq!(unit_by_name("Mbar"), None);
        assert_eq!(unit_by_name("mL").unwrap().factor, 1e-6);
        assert_eq!(unit_by_name("ML").unwrap().factor, 1e3);
        assert_eq!(unit_by_name("mwc"), unit_by_ucum("m[H2O]"));
        assert_eq!(unit_by_name(""), None);
    }

    #[test]
    fn no_spelling_means_two_units_and_aliases_stand_folded() {
        let all: Vec<_> = names().collect();
        for (i, (name, unit)) in all.iter().enumerate() {
            for (other, twin) in &all[..i] {
                assert!(name != other || unit.ucum == twin.ucum, "{name}");
            }
        }
        for entry in UNITS {
            assert!(entry.aliases.iter().all(|a| fold(a) == *a), "{}", entry.unit.ucum);
            assert_eq!(unit_by_ucum(entry.unit.ucum), Some(entry.unit));
        }
    }

    proptest! {
        #[test]
        fn there_and_back_is_where_it_was(at in 0..UNITS.len(), value in -1e6_f64..1e6) {
            let unit = UNITS[at].unit;
            let back = unit.from_si(unit.to_si(value));
            prop_assert!((back - value).abs() <= 1e-12 * (value.abs() + 1e3));
        }
    }
}
