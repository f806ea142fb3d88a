//! Worked cases of cake filtration; the figures printed are mostly read off a graph, so the
//! checks are against the values recomputed from the inputs, and coarsely against the print.

use washbell::science::{ConstantFlux, ConstantPressure, FilterConditions, fit_line};

use crate::table::{close, handbook};

const LEAF_M2: f64 = 0.0439;
const SLURRY: FilterConditions =
    FilterConditions { area_m2: LEAF_M2, pressure_pa: 338e3, viscosity_pa_s: 8.937e-4 };

fn calcium_carbonate() -> (Vec<f64>, Vec<f64>) {
    let time_s = vec![4.4, 9.5, 16.3, 24.6, 34.7, 46.1, 59.0, 73.6, 89.4, 107.3];
    let litres = [0.498, 1.0, 1.501, 2.0, 2.498, 3.002, 3.506, 4.004, 4.502, 5.009];
    (time_s, litres.iter().map(|l| l * 1e-3).collect())
}

#[test]
fn calcium_carbonate_on_a_leaf() {
    let (time_s, volume_m3) = calcium_carbonate();
    let cake = ConstantPressure::fit(&time_s, &volume_m3).unwrap();
    close(0.5 * cake.kp_s_m6, handbook("GK1", "LSQ slope Kp/2 of t/V vs V"), 1e-9);
    close(cake.b_s_m3, handbook("GK1", "LSQ intercept B"), 1e-9);
    close(cake.specific_cake_resistance_m_kg(&SLURRY, 23.47), handbook("GK1", "alpha"), 1e-9);
    close(cake.medium_resistance_1_m(&SLURRY), handbook("GK1", "Rm"), 1e-9);
    // The book drew its line by hand: Kp 6.00e6 and B 6400.
    close(cake.kp_s_m6, 6.00e6, 0.05);
    close(cake.b_s_m3, 6400.0, 0.07);
    let quotient: Vec<f64> = time_s.iter().zip(&volume_m3).map(|(t, v)| t / v).collect();
    close(fit_line(&volume_m3, &quotient).unwrap().r_squared, handbook("GK1", "r2"), 1e-9);
}

#[test]
fn a_press_of_twenty_frames() {
    let (time_s, volume_m3) = calcium_carbonate();
    let leaf = ConstantPressure::fit(&time_s, &volume_m3).unwrap();
    let press = leaf.on_area(LEAF_M2, 20.0 * 0.873);
    close(press.time_s(3.37), handbook("GK2", "time (LSQ constants)"), 1e-9);

    let printed = ConstantPressure { kp_s_m6: 37.93, b_s_m3: 16.10 };
    let filtering_s = printed.time_s(3.37);
    close(filtering_s, handbook("GK2", "time (book constants)"), 1e-9);
    // Washed with 0.337 m3 at a quarter of the final rate, then 20 minutes to clean.
    let washing_s = 0.337 / (0.25 * printed.flow_m3_s(3.37));
    close(washing_s, handbook("GK3", "wash time"), 1e-9);
    close((filtering_s + washing_s + 1200.0) / 60.0, 27.73, 1e-4);
    // The table's cycle takes the filtering time as printed, 269.7 s.
    close((269.7 + washing_s + 1200.0) / 60.0, handbook("GK3", "cycle"), 1e-9);
}

#[test]
fn two_readings_of_a_leaf_filter() {
    // L is the medium's thickness in cake, v the cake a unit of filtrate: L/v = B / (Kp A).
    let cases = [
        ("CR7.1", 0.05, 71.3e3, [300.0, 600.0], [250e-6, 400e-6]),
        ("CR7.4", 0.02, 84.3e3, [60.0, 120.0], [300e-6, 440e-6]),
    ];
    for (case, area_m2, pressure_pa, time_s, volume_m3) in cases {
        let cake = ConstantPressure::fit(&time_s, &volume_m3).unwrap();
        let at = FilterConditions { area_m2, pressure_pa, viscosity_pa_s: 1e-3 };
        close(cake.cake_resistance_1_m2(&at) * 1e-3, handbook(case, "r*mu*v"), 1e-9);
        close(cake.b_s_m3 / (cake.kp_s_m6 * area_m2), handbook(case, "L/v"), 1e-9);
    }
}

#[test]
fn the_best_thickness_of_a_frame() {
    // Filtering time a L^2, no medium: the volume stands for half the thickness L.
    let frame = ConstantPressure { kp_s_m6: 2.0 * 1.025e6, b_s_m3: 0.0 };
    let half_m = frame.best_volume_m3(900.0);
    close(2e3 * half_m, handbook("CR7.2", "optimal frame thickness 2L"), 1e-9);
    // The best filtering time is the time down.
    close(frame.time_s(half_m), 900.0, 1e-12);
}

#[test]
fn constant_rate_raises_the_pressure_with_the_volume() {
    // 78 L/s on any area: here 60 m2 at 1 mPa.s, which cancels.
    let (flow_m3_s, area_m2, viscosity_pa_s) = (78e-3, 60.0, 1e-3);
    let flux_m_s = flow_m3_s / area_m2;
    let volume = |seconds: f64| flux_m_s * seconds;
    let resistance = |pa: f64| pa / (viscosity_pa_s * flux_m_s);
    let cake = ConstantFlux::fit(
        &[volume(120.0), volume(300.0)],
        &[resistance(3.23e3), resistance(6.53e3)],
    )
    .unwrap();
    let kpa = 1e-3 * cake.tmp_pa(volume(1800.0), viscosity_pa_s, flux_m_s);
    close(kpa, handbook("BW8.1", "dP at 1800 s"), 1e-9);
}
