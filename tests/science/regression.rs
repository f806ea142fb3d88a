//! Least squares.

use washbell::science::fit_line;

use crate::table::{SERIES, Table, close, series};

#[test]
fn norris_to_the_certified_digits() {
    // NIST StRD, Norris, certified values; the standard errors of the two and R2 from memory.
    let table = Table::read(include_str!("../data/nist_norris.csv"));
    let line = fit_line(&table.numbers("x"), &table.numbers("y")).unwrap();
    let errors = line.errors.unwrap();
    assert_eq!(line.n, 36);
    close(line.intercept, -0.262_323_073_774_029, 1e-11);
    close(line.slope, 1.002_116_818_020_45, 1e-13);
    close(errors.residual, 0.884_796_396_144_373, 1e-12);
    close(errors.intercept, 0.232_818_234_301_152, 1e-12);
    close(errors.slope, 0.429_796_848_199_937e-3, 1e-12);
    close(line.r_squared, 0.999_993_745_883_712, 1e-14);
}

#[test]
fn lines_and_their_errors_as_scipy_has_them() {
    let table = Table::read(include_str!("../data/theil_sen_results.csv"));
    for name in SERIES {
        let y = series(name);
        let x: Vec<f64> = (0..y.len()).map(|i| i as f64).collect();
        let line = fit_line(&x, &y).unwrap();
        let want = |column: &str| table.numbers_where(column, "dataset", name)[0];
        close(line.slope, want("ols_slope"), 1e-12);
        close(line.intercept, want("ols_intercept"), 1e-12);
        close(line.r_squared, want("ols_r2"), 1e-11);
        close(line.errors.unwrap().slope, want("ols_slope_se"), 1e-11);
    }
}
