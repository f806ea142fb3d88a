//! Reads the tables of `tests/data`: comments, a heading, rows without quotes.

/// A table as text.
pub struct Table {
    heading: Vec<&'static str>,
    rows: Vec<Vec<&'static str>>,
}

impl Table {
    pub fn read(text: &'static str) -> Self {
        assert!(text.starts_with("# "), "a table names its origin in its first line");
        let mut lines = text.lines().filter(|line| !line.starts_with('#'));
        let heading = lines.next().unwrap().split(',').collect();
        let rows: Vec<Vec<&str>> = lines.map(|line| line.split(',').collect()).collect();
        assert!(!rows.is_empty());
        Self { heading, rows }
    }

    /// Number of rows.
    pub fn len(&self) -> usize {
        self.rows.len()
    }

    fn place(&self, column: &str) -> usize {
        self.heading.iter().position(|h| *h == column).unwrap_or_else(|| panic!("no {column}"))
    }

    /// A column of numbers.
    pub fn numbers(&self, column: &str) -> Vec<f64> {
        let at = self.place(column);
        self.rows.iter().map(|row| row[at].parse().unwrap()).collect()
    }

    /// Numbers of one column in the rows in which another says something.
    pub fn numbers_where(&self, column: &str, key: &str, is: &str) -> Vec<f64> {
        let (at, key) = (self.place(column), self.place(key));
        self.rows.iter().filter(|row| row[key] == is).map(|row| row[at].parse().unwrap()).collect()
    }

    /// The number of one column in the only row that has both texts.
    pub fn number(&self, column: &str, first: &str, second: &str) -> f64 {
        let at = self.place(column);
        let mut found =
            self.rows.iter().filter(|row| row.contains(&first) && row.contains(&second));
        let row = found.next().unwrap_or_else(|| panic!("no {first}, {second}"));
        assert!(found.next().is_none(), "{first}, {second} twice");
        row[at].parse().unwrap()
    }
}

/// Worked cases of handbooks.
pub fn handbook(case: &str, quantity: &str) -> f64 {
    Table::read(include_str!("../data/handbook_cases.csv")).number("value", case, quantity)
}

/// The series of the trend tests, by name.
pub fn series(dataset: &str) -> Vec<f64> {
    let table = Table::read(include_str!("../data/trend_datasets.csv"));
    let values = table.numbers_where("value", "dataset", dataset);
    assert!(!values.is_empty(), "no {dataset}");
    values
}

/// Every series of the trend tests.
pub const SERIES: [&str; 6] = ["monotone10", "ties12", "nile", "perm60_ar", "flat40", "outlier11"];

/// Fails unless `got` is within a share of `want`.
#[track_caller]
pub fn close(got: f64, want: f64, share: f64) {
    assert!((got - want).abs() <= share * want.abs(), "got {got:e}, want {want:e}");
}
