//! What a scenario measured, what was hoped for, and what must hold.

use std::fmt::Write;

/// Where a number should lie.
#[derive(Clone, Copy, Debug, PartialEq)]
pub enum Within {
    AtMost(f64),
    AtLeast(f64),
    Between(f64, f64),
    /// Only told.
    Anything,
}

impl Within {
    fn holds(self, value: f64) -> bool {
        match self {
            Self::AtMost(most) => value <= most,
            Self::AtLeast(least) => value >= least,
            Self::Between(low, high) => (low..=high).contains(&value),
            Self::Anything => true,
        }
    }
    fn text(self, unit: &str) -> String {
        match self {
            Self::AtMost(most) => format!("at most {} {unit}", short(most)),
            Self::AtLeast(least) => format!("at least {least} {unit}"),
            Self::Between(low, high) => format!("{low} to {high} {unit}"),
            Self::Anything => "told only".to_owned(),
        }
    }
}

/// Two decimals at most.
fn short(value: f64) -> f64 {
    (value * 100.0).round() / 100.0
}

/// One line of the table.
#[derive(Clone, Debug)]
pub struct Score {
    what: &'static str,
    measure: String,
    value: f64,
    unit: &'static str,
    goal: Within,
    bound: Within,
    of: usize,
}

impl Score {
    /// A number out of so many cases.
    pub fn new(
        what: &'static str,
        measure: &str,
        value: f64,
        unit: &'static str,
        of: usize,
    ) -> Self {
        let (goal, bound) = (Within::Anything, Within::Anything);
        Self { what, measure: measure.to_owned(), value, unit, goal, bound, of }
    }
    /// What is hoped for; told, not asserted.
    pub fn goal(mut self, goal: Within) -> Self {
        self.goal = goal;
        self
    }
    /// What must hold.
    pub fn bound(mut self, bound: Within) -> Self {
        self.bound = bound;
        self
    }
    /// A goal that must hold.
    pub fn must(self, within: Within) -> Self {
        self.goal(within).bound(within)
    }
    /// Whether the bound holds; a value that is no number breaks any.
    pub fn holds(&self) -> bool {
        self.of > 0 && self.value.is_finite() && self.bound.holds(self.value)
    }
    /// In words.
    pub fn told(&self) -> String {
        let bound = self.bound.text(self.unit);
        format!("{}, {}: {:.3} {}, {bound}", self.what, self.measure, self.value, self.unit)
    }
}

/// The table, in Markdown.
pub fn table(scores: &[Score]) -> String {
    let mut out =
        String::from("| | measured | value | cases | goal | met |\n|---|---|---|---|---|---|\n");
    let mut before = "";
    for s in scores {
        let what = if s.what == before { "" } else { s.what };
        before = s.what;
        let met = match s.goal {
            Within::Anything => "",
            goal if goal.holds(s.value) => "yes",
            _ => "no",
        };
        let decimals = if s.value.abs() >= 10.0 || s.value.fract() == 0.0 { 0 } else { 2 };
        let _ = writeln!(
            out,
            "| {what} | {} | {:.decimals$} {} | {} | {} | {met} |",
            s.measure,
            s.value,
            s.unit,
            s.of,
            s.goal.text(s.unit)
        );
    }
    out
}

/// Share of `values` that hold, per cent.
pub fn percent(values: impl Iterator<Item = bool>) -> f64 {
    let (mut held, mut all) = (0, 0);
    for value in values {
        held += usize::from(value);
        all += 1;
    }
    100.0 * held as f64 / all as f64
}

/// The value below which a share of them lies; by the nearest rank, so that it is one of them.
pub fn quantile(values: &[f64], share: f64) -> f64 {
    let mut sorted = values.to_vec();
    sorted.sort_by(f64::total_cmp);
    let rank = (share * sorted.len() as f64).ceil().max(1.0) as usize - 1;
    sorted.get(rank).copied().unwrap_or(f64::NAN)
}

/// The middle one.
pub fn median(values: &[f64]) -> f64 {
    quantile(values, 0.5)
}

/// A small generator for what differs between cases; its own, so that it is not the plant's.
pub struct Dice(pub u64);

impl Dice {
    /// Even between two numbers.
    pub fn between(&mut self, low: f64, high: f64) -> f64 {
        self.0 =
            self.0.wrapping_mul(6_364_136_223_846_793_005).wrapping_add(1_442_695_040_888_963_407);
        low + (high - low) * (self.0 >> 11) as f64 / (1_u64 << 53) as f64
    }
}
