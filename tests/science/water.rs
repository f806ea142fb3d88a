//! Viscosity and density every degree from 0 to 60.

use washbell::science::{
    TemperatureLaw, density_kg_m3, law_viscosity_pa_s, relative_viscosity, viscosity_pa_s,
};

use crate::table::{Table, close};

fn water() -> Table {
    let table = Table::read(include_str!("../data/water_viscosity_density_0_60C.csv"));
    assert_eq!(table.len(), 61);
    table
}

fn each(column: &str, mut check: impl FnMut(f64, f64)) {
    let table = water();
    for (degc, value) in table.numbers("T_C").into_iter().zip(table.numbers(column)) {
        check(degc, value);
    }
}

#[test]
fn viscosity_is_that_of_sr6_08() {
    each("mu_iapws_Liquid_0.1MPa_uPa_s", |degc, upa_s| {
        close(viscosity_pa_s(degc).unwrap(), 1e-6 * upa_s, 1e-8);
    });
}

#[test]
fn viscosity_is_near_that_of_r12_08() {
    // Another release, another equation, another program.
    each("mu_R12_08_iapws_Viscosity_at_CoolProp_rho_uPa_s", |degc, upa_s| {
        close(viscosity_pa_s(degc).unwrap(), 1e-6 * upa_s, 3.1e-5);
    });
}

#[test]
fn density_is_that_of_iapws_95() {
    each("rho_IAPWS95_iapws_101325Pa_kg_m3", |degc, kg_m3| {
        close(density_kg_m3(degc).unwrap(), kg_m3, 1e-5);
    });
}

#[test]
fn the_cubic_is_itself_up_to_40_degrees() {
    let at_20 = 994.0;
    each("mu_cubic_EPA_uPa_s", |degc, upa_s| {
        let relative = relative_viscosity(TemperatureLaw::Cubic, degc);
        if degc > 40.0 {
            assert_eq!(relative, None, "{degc}");
        } else {
            close(relative.unwrap(), upa_s / at_20, 1e-12);
        }
    });
}

#[test]
fn one_number_laws_raise_a_false_winter_alarm() {
    // methods: with k = 0.0239 a healthy train looks 5.6 % worse at 5 and 9.8 % at 0 degrees.
    let law = TemperatureLaw::Exponential { k_per_k: 0.0239 };
    for (degc, share) in [(5.0, 0.056), (0.0, 0.098)] {
        let looks = law_viscosity_pa_s(law, degc).unwrap() / viscosity_pa_s(degc).unwrap();
        assert!((1.0 - looks - share).abs() < 5e-4, "{degc}: {looks}");
    }
    let power = TemperatureLaw::PowerBase { c: 0.0239_f64.exp() };
    for degc in [0.0, 5.0, 33.0, 60.0] {
        let exponential = relative_viscosity(law, degc).unwrap();
        close(relative_viscosity(power, degc).unwrap(), exponential, 1e-13);
    }
}
