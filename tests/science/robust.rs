//! The Hampel identifier and the Theil-Sen line.

use washbell::science::{hampel, theil_sen};

use crate::table::{SERIES, Table, close, series};

#[test]
fn hampel_as_computed_elsewhere() {
    let table = Table::read(include_str!("../data/hampel.csv"));
    let values = table.numbers("x");
    let points = hampel(&values, 3, 3.0, 0.0);
    assert_eq!(points.len(), table.len());
    let medians = table.numbers("median_window7_truncated_ends");
    let sigmas = table.numbers("S_1.4826MAD");
    let outliers = table.numbers("outlier_T3");
    let filtered = table.numbers("filtered");
    for (at, point) in points.iter().enumerate() {
        close(point.median, medians[at], 1e-14);
        close(point.sigma, sigmas[at], 1e-12);
        assert_eq!(point.outlier, outliers[at] == 1.0, "{at}");
        assert_eq!(if point.outlier { point.median } else { values[at] }, filtered[at], "{at}");
    }
}

#[test]
fn theil_sen_and_both_intervals_as_scipy_has_them() {
    let table = Table::read(include_str!("../data/theil_sen_results.csv"));
    assert_eq!(table.len(), SERIES.len());
    for name in SERIES {
        let y = series(name);
        let x: Vec<f64> = (0..y.len()).map(|i| i as f64).collect();
        let want = |column: &str| table.numbers_where(column, "dataset", name)[0];
        let at_95 = theil_sen(&x, &y, 0.95).unwrap();
        close(at_95.slope, want("sen_slope"), 1e-12);
        close(at_95.intercept, want("sen_intercept_joint"), 1e-12);
        close(at_95.slope_low, want("ci95_low"), 1e-12);
        close(at_95.slope_high, want("ci95_high"), 1e-12);
        let at_90 = theil_sen(&x, &y, 0.90).unwrap();
        close(at_90.slope_low, want("ci90_low"), 1e-12);
        close(at_90.slope_high, want("ci90_high"), 1e-12);
    }
}

#[test]
fn theil_sen_minds_neither_order_nor_place_nor_scale() {
    let y = series("perm60_ar");
    let x: Vec<f64> = (0..y.len()).map(|i| i as f64).collect();
    let plain = theil_sen(&x, &y, 0.95).unwrap();
    let turned_x: Vec<f64> = x.iter().rev().map(|x| 86_400.0 * x).collect();
    let turned_y: Vec<f64> = y.iter().rev().copied().collect();
    let turned = theil_sen(&turned_x, &turned_y, 0.95).unwrap();
    close(turned.slope * 86_400.0, plain.slope, 1e-12);
    close(turned.slope_low * 86_400.0, plain.slope_low, 1e-12);
    close(turned.intercept, plain.intercept, 1e-12);
    close(plain.at(10.0), plain.intercept + 10.0 * plain.slope, 1e-15);
}

#[test]
fn no_robust_line_from_too_little() {
    assert_eq!(theil_sen(&[1.0], &[1.0], 0.95), None);
    assert_eq!(theil_sen(&[1.0, 1.0], &[1.0, 2.0], 0.95), None);
    assert_eq!(theil_sen(&[1.0, 2.0], &[1.0], 0.95), None);
    assert_eq!(theil_sen(&[1.0, 2.0], &[1.0, f64::INFINITY], 0.95), None);
    for confidence in [0.0, 1.0, -0.5, f64::NAN] {
        assert_eq!(theil_sen(&[1.0, 2.0], &[1.0, 2.0], confidence), None, "{confidence}");
    }
}
