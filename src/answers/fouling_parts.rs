//! Where the resistance sits: what can be told of each part, and when it was last observed.

use serde::Serialize;
use utoipa::ToSchema;

use super::time::PlantTime;
use super::units::Units;
use crate::analysis::{Baseline, BaselineKind, Cycle, Run, Site, Verdict, as_new, best};
use crate::base::{DAY_US, Instant, Zone};
use crate::science;

/// The parts of the resistance. They add up: membrane, irrecoverable, chemically reversible and
/// hydraulically reversible make the total.
#[derive(Clone, Debug, PartialEq, Serialize, ToSchema)]
pub struct ResistancesView {
    /// All of it, at the end of a cycle.
    pub total: PartView,
    /// The new membrane.
    pub membrane: PartView,
    /// What the best clean so far has left on it.
    pub irrecoverable: PartView,
    /// Both, where they cannot be told apart.
    pub membrane_and_irrecoverable: PartView,
    /// What only chemicals bring back.
    pub chemically_reversible: PartView,
    /// What a backwash brings back.
    pub hydraulically_reversible: PartView,
}

/// One part of the resistance.
#[derive(Clone, Debug, Default, PartialEq, Serialize, ToSchema)]
pub struct PartView {
    /// In `units.resistances`; null where it cannot be told.
    pub value: Option<f64>,
    /// 95 % interval, widened by what may have changed since it was observed; null where the
    /// value is stated without one.
    pub interval: Option<[f64; 2]>,
    /// When it was last observed; null where it is stated.
    pub observed: Option<PlantTime>,
    /// Why it cannot be told, or what to mind about it.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub detail: Option<String>,
}

/// A resistance with half its interval and the moment it was observed.
#[derive(Clone, Copy)]
struct Seen {
    value: f64,
    half: f64,
    at: Option<Instant>,
}

const NO_CYCLES: &str = "No cycle of the last day counts, so it cannot be told now.";
const NO_CLEAN: &str = "No clean has been judged yet and the plant file states no permeability \
                        after a clean, so what a clean brings back cannot be told.";
const NO_AS_NEW: &str = "The plant file states no as_new_permeability, so only membrane and \
                         irrecoverable together can be told.";
const STATED: &str = "As the plant file states it.";
const BETTER_THAN_NEW: &str = "The best clean is better than as_new_permeability in the plant \
                               file; check that value.";

/// What can be told of the parts at `as_of`. `cycles` are those of the last day at least.
pub(super) fn parts(
    zone: &Zone,
    site: &Site,
    units: &Units,
    runs: &[Run],
    run_start: Option<Instant>,
    cycles: &[Cycle],
    as_of: Instant,
) -> ResistancesView {
    let show = |seen: Option<Seen>, why_not: &str| match seen {
        Some(s) => part(zone, units, s.value, Some((s.value - s.half, s.value + s.half)), s.at),
        None => not_told(why_not),
    };
    let recent: Vec<&Cycle> = cycles
        .iter()
        .filter(|c| c.left_out.is_none() && c.decided < as_of)
        .filter(|c| c.start >= as_of.plus(-DAY_US) && run_start.is_none_or(|s| c.start >= s))
        .collect();
    let start = middle(&recent, |c| c.start_resistance_1_m);
    let membrane = as_new(site).map(|b| b.resistance_1_m);
    let cleaned = cleaned(site, runs, as_of);
    ResistancesView {
        total: show(middle(&recent, |c| c.end_resistance_1_m), NO_CYCLES),
        membrane: match membrane {
            Some(r) => with_detail(part(zone, units, r, None, None), STATED),
            None => not_told(NO_AS_NEW),
        },
        irrecoverable: match (&cleaned, membrane) {
            (_, None) => not_told(NO_AS_NEW),
            (None, _) => not_told(NO_CLEAN),
            (Some(c), Some(m)) => {
                let bounds = (c.low - m, c.high - m);
                let told = part(zone, units, c.best.resistance_1_m - m, Some(bounds), c.best.at);
                let odd = c.best.resistance_1_m < m;
                if odd { with_detail(told, BETTER_THAN_NEW) } else { told }
            }
        },
        membrane_and_irrecoverable: match &cleaned {
            Some(c) => part(zone, units, c.best.resistance_1_m, Some((c.low, c.high)), c.best.at),
            None => not_told(NO_CLEAN),
        },
        chemically_reversible: match (&cleaned, start) {
            (None, _) => not_told(NO_CLEAN),
            (_, None) => not_told(NO_CYCLES),
            (Some(c), Some(s)) => {
                let bounds = (s.value - s.half - c.high, s.value + s.half - c.low);
                part(zone, units, s.value - c.best.resistance_1_m, Some(bounds), s.at)
            }
        },
        hydraulically_reversible: show(middle(&recent, Cycle::laid_down_1_m), NO_CYCLES),
    }
}

/// The best after a clean, and between which bounds it may lie by now: not below what was
/// observed, and not above what the last clean left.
struct Cleaned {
    best: Baseline,
    low: f64,
    high: f64,
}

fn cleaned(site: &Site, runs: &[Run], as_of: Instant) -> Option<Cleaned> {
    let best = best(site, runs, as_of).filter(|b| b.kind != BaselineKind::AsNew)?;
    let known = || {
        runs.iter()
            .filter(|r| r.verdict_known.is_some_and(|k| k <= as_of))
            .filter(|r| r.verdict != Verdict::Doubtful)
    };
    let own = known().find(|r| Some(r.start) == best.at).and_then(|r| r.after);
    let half = own.map_or(0.0, |l| l.half_width_1_m);
    let last = known().filter_map(|r| r.after).next_back();
    let high = best.resistance_1_m + half;
    Some(Cleaned {
        best,
        low: best.resistance_1_m - half,
        high: last.map_or(high, |l| high.max(l.resistance_1_m + l.half_width_1_m)),
    })
}

/// The median over cycles with half its 95 % interval, observed at the end of the last.
fn middle(cycles: &[&Cycle], of: impl Fn(&Cycle) -> Option<f64>) -> Option<Seen> {
    let told: Vec<(f64, Instant)> =
        cycles.iter().filter_map(|c| of(c).map(|v| (v, c.end))).collect();
    let values: Vec<f64> = told.iter().map(|t| t.0).collect();
    let spread = science::mad_sigma(&values).unwrap_or(0.0);
    // 1.96: 95 % of a normal; 1.2533: a median against a mean.
    let half = 1.96 * 1.2533 * spread / (values.len() as f64).sqrt();
    Some(Seen { value: science::median(&values)?, half, at: told.last().map(|t| t.1) })
}

fn part(
    zone: &Zone,
    units: &Units,
    value: f64,
    bounds: Option<(f64, f64)>,
    at: Option<Instant>,
) -> PartView {
    PartView {
        value: units.resistance.value(value),
        interval: bounds.and_then(|(low, high)| units.resistance.interval(low, high)),
        observed: PlantTime::optional(zone, at),
        detail: None,
    }
}

fn not_told(why: &str) -> PartView {
    PartView { detail: Some(why.to_owned()), ..PartView::default() }
}

fn with_detail(part: PartView, detail: &str) -> PartView {
    PartView { detail: Some(detail.to_owned()), ..part }
}
