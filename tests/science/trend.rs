//! Mann-Kendall, Hamed-Rao, autocorrelation.

use washbell::science::{
    HamedRao, TrendTest, autocorrelation, mann_kendall, mann_kendall_hamed_rao, theil_sen,
};

use crate::table::{SERIES, Table, close, series};

fn compare(got: &TrendTest, name: &str, method: &str) {
    let table = Table::read(include_str!("../data/mann_kendall_results.csv"));
    let want = |column: &str| table.number(column, name, method);
    assert_eq!(got.s as f64, want("S"), "{name} {method}");
    close(got.variance, want("var_S"), 1e-11);
    close(got.z, want("z"), 1e-11);
    close(got.tau, want("tau"), 1e-14);
    // The table takes p from 1 - cdf, which has nothing left below 1e-16.
    assert!((got.p - want("p")).abs() < 1e-12, "{name} {method}: {}", got.p);
}

#[test]
fn mann_kendall_as_computed_elsewhere() {
    for name in SERIES {
        let got = mann_kendall(&series(name)).unwrap();
        compare(&got, name, "original");
        assert_eq!(got.variance_factor, 1.0);
    }
}

#[test]
fn hamed_rao_as_computed_elsewhere() {
    let cases = [("hamed_rao", None), ("hamed_rao_lag1", Some(1)), ("hamed_rao_lag3", Some(3))];
    for (method, max_lag) in cases {
        // monotone10 lies on its line: nothing is left to correlate and the table has nan.
        for name in SERIES.into_iter().filter(|name| *name != "monotone10") {
            let correction = HamedRao { alpha: 0.05, max_lag, may_narrow: true };
            let got = mann_kendall_hamed_rao(&series(name), correction).unwrap();
            compare(&got, name, method);
        }
    }
}

#[test]
fn the_nile_falls_whichever_way_it_is_tested() {
    let nile = series("nile");
    let plain = mann_kendall(&nile).unwrap();
    assert_eq!(plain.s, -1387);
    assert!((plain.z + 4.128_067).abs() < 5e-7);
    for (max_lag, p) in [(None, 0.004_802_68), (Some(3), 0.009_068_17)] {
        let correction = HamedRao { alpha: 0.05, max_lag, may_narrow: false };
        let got = mann_kendall_hamed_rao(&nile, correction).unwrap();
        assert!((got.p - p).abs() < 5e-9, "{max_lag:?}: {}", got.p);
        assert!(got.variance_factor > 1.5 && got.effective_n < 60.0);
        close(got.effective_n * got.variance_factor, 100.0, 1e-12);
    }
}

#[test]
fn a_flat_series_is_no_trend_once_the_variance_may_not_narrow() {
    // By the published method negative autocorrelation leaves 6 % of the variance, and noise
    // around 100 comes out as a trend with p = 0.0007.
    let flat = series("flat40");
    let strict = HamedRao { alpha: 0.05, max_lag: Some(3), may_narrow: true };
    assert!(mann_kendall_hamed_rao(&flat, strict).unwrap().p < 0.001);
    let careful = HamedRao { may_narrow: false, ..strict };
    assert_eq!(mann_kendall_hamed_rao(&flat, careful), mann_kendall(&flat));
}

#[test]
fn autocorrelation_at_lag_1_as_the_table_implies() {
    // Yue and Wang's correction at lag 1 is var (1 + 2 (1 - 1/n) r1), r1 of the values less their
    // Sen line: so the table holds r1, though it does not print it.
    let table = Table::read(include_str!("../data/mann_kendall_results.csv"));
    for name in ["ties12", "nile", "perm60_ar", "flat40", "outlier11"] {
        let values = series(name);
        let n = values.len() as f64;
        let index: Vec<f64> = (0..values.len()).map(|i| i as f64).collect();
        let line = theil_sen(&index, &values, 0.95).unwrap();
        let left: Vec<f64> = values.iter().zip(&index).map(|(v, i)| v - line.at(*i)).collect();
        let ratio =
            table.number("var_S", name, "yue_wang_lag1") / table.number("var_S", name, "original");
        let implied = (ratio - 1.0) / (2.0 * (1.0 - 1.0 / n));
        close(autocorrelation(&left, 1).unwrap(), implied, 1e-9);
    }
}
