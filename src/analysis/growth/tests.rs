use super::*;
use crate::analysis::Quality;
use crate::base::{DAY_US, Instant, TrainId};

fn day(number: i64, resistance_1_m: Option<f64>, volume_m: f64) -> Day {
    Day {
        train: TrainId::new("uf-1"),
        start: Instant::from_micros(number * DAY_US),
        end: Instant::from_micros((number + 1) * DAY_US),
        resistance_1_m,
        half_width_1_m: resistance_1_m.map(|_| 4e9),
        start_hours: 24,
        coarse: false,
        steady_resistance_1_m: None,
        flux_m_s: None,
        temperature_degc: None,
        end_tmp_max_pa: None,
        end_tmp_pa: None,
        laid_down_1_m: None,
        taken_off_1_m: None,
        volume_m,
        filtration_s: 8e4,
        coverage: 1.0,
        cycles: 46,
        cycles_left_out: 0,
        quality: Quality::Good,
        reasons: Vec::new(),
    }
}

const DOUBTFUL: Expected = Expected { per_day_1_m: 1.0e10, sd_1_m: 3e10 };

#[test]
fn a_straight_line_goes_on_from_noon_to_the_end_of_the_day() {
    let days: Vec<Day> = (0..30).map(|d| day(d, Some(1.5e12 + 1.3e10 * d as f64), 1.4)).collect();
    let growth = Growth::follow(&days, 1.4, DOUBTFUL).unwrap();
    let noon = 1.5e12 + 1.3e10 * 29.0;
    for ahead in [0.0, 7.0, 14.0] {
        let (mean, sd) = growth.ahead(ahead);
        let line = noon + 1.3e10 * (ahead + 0.5);
        assert!((mean - line).abs() < 0.02 * 1.3e10 * (1.0 + ahead), "{ahead}: {mean:e}");
        assert!(sd > 0.0 && sd < 1.3e10 * (1.0 + 0.4 * ahead), "{ahead}: {sd:e}");
    }
}

#[test]
fn half_the_volume_is_half_the_growth() {
    let mut level = 1.5e12;
    let days: Vec<Day> = (0..30)
        .map(|d| {
            let volume = if d % 4 < 2 { 1.4 } else { 0.7 };
            level += 1.3e10 * volume / 1.4 / 2.0;
            let noon = level;
            level += 1.3e10 * volume / 1.4 / 2.0;
            day(d, Some(noon), volume)
        })
        .collect();
    let growth = Growth::follow(&days, 1.4, DOUBTFUL).unwrap();
    assert!((growth.state[1] / 1.3e10 - 1.0).abs() < 0.02, "{growth:?}");
}

#[test]
fn neither_a_slip_nor_a_step_changes_the_rate() {
    let line = |d: i64| 1.5e12 + 1.3e10 * d as f64;
    let plain: Vec<Day> = (0..25).map(|d| day(d, Some(line(d)), 1.4)).collect();
    let (before, _) = Growth::follow(&plain, 1.4, DOUBTFUL).unwrap().ahead(14.0);
    let mut slip = plain.clone();
    slip[24].resistance_1_m = Some(1.3 * line(24));
    let (after, _) = Growth::follow(&slip, 1.4, DOUBTFUL).unwrap().ahead(14.0);
    assert!((after / before - 1.0).abs() < 0.005, "a slip: {after:e}");
    let mut step = plain;
    for d in &mut step[22..] {
        d.resistance_1_m = d.resistance_1_m.map(|r| r + 1.5e11);
    }
    let (after, _) = Growth::follow(&step, 1.4, DOUBTFUL).unwrap().ahead(14.0);
    assert!(((after - before) / 1.5e11 - 1.0).abs() < 0.1, "a step: {after:e}");
}

#[test]
fn a_day_without_a_level_passes_and_a_run_without_any_says_nothing() {
    let mut days: Vec<Day> =
        (0..20).map(|d| day(d, Some(1.5e12 + 1.3e10 * d as f64), 1.4)).collect();
    for d in &mut days[16..] {
        d.resistance_1_m = None;
    }
    let (mean, _) = Growth::follow(&days, 1.4, DOUBTFUL).unwrap().ahead(0.0);
    assert!((mean / (1.5e12 + 1.3e10 * 19.5) - 1.0).abs() < 0.003, "{mean:e}");
    let none: Vec<Day> = (0..20).map(|d| day(d, None, 1.4)).collect();
    assert_eq!(Growth::follow(&none, 1.4, DOUBTFUL), None);
}

#[test]
fn sums_are_those_written_out() {
    for n in [1, 2, 5, 14] {
        let once = |k: i32| (0..k).map(|i| WANDER_LIKENESS.powi(i)).sum::<f64>();
        assert!((faded_sum(f64::from(n)) - once(n)).abs() < 1e-9, "{n}");
        let squares: f64 = (1..=n).map(|k| once(k) * once(k)).sum();
        assert!((faded_squares(f64::from(n)) - squares).abs() < 1e-9, "{n}");
    }
}
