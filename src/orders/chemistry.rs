//! What must not have met: in a plan, in what was done, and in what was there before.

use serde::{Deserialize, Serialize};

use crate::base::Instant;
use crate::plant::{Step, StepClass, VerifiedRinse, classes_by_name, rinse_separates};

/// What comes of two classes that meet. Ordered: the worst first.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord, Serialize, Deserialize)]
#[serde(rename_all = "snake_case")]
pub enum ConflictKind {
    /// Hypochlorite and acid: chlorine gas.
    ChlorineGas,
    /// Sulphite and acid: sulphur dioxide.
    SulphurDioxide,
    /// Oxidisers with each other or with a reductant: heat, gas.
    Violent,
    /// Hypochlorite and organic matter: heat, chlorinated products, foam.
    Chlorination,
    /// Caustic and acid: heat, and neither cleans.
    Neutralisation,
    /// A chemical of unknown class: it must meet no other.
    Unknown,
}

impl ConflictKind {
    /// The kind of two classes; `None` where they may meet.
    pub fn of(a: StepClass, b: StepClass) -> Option<Self> {
        use StepClass::*;
        if !a.conflicts_with(b) {
            return None;
        }
        Some(match (a.min(b), a.max(b)) {
            (_, Other) => Self::Unknown,
            (Hypochlorite, Acid) => Self::ChlorineGas,
            (Acid, Reductant) => Self::SulphurDioxide,
            (Hypochlorite, Detergent) => Self::Chlorination,
            (Alkali, Acid) => Self::Neutralisation,
            _ => Self::Violent,
        })
    }
}

/// Two classes that must not meet and were not kept apart.
#[derive(Clone, Copy, Debug, PartialEq, Serialize, Deserialize)]
pub struct Conflict {
    /// What was there first.
    pub first: StepClass,
    /// What comes to it.
    pub second: StepClass,
    /// The step that brought the first; `None` for the train's last chemical before.
    pub from_step: Option<usize>,
    /// The step that brings the second; the same step where one mixes both.
    pub at_step: usize,
    /// What comes of it.
    pub kind: ConflictKind,
    /// Whether a rinse stands between them that does not show that it keeps them apart.
    pub unproven_rinse: bool,
}

/// Classes that may still be in a train: what its last cleaning did not prove to have rinsed out.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize)]
pub struct LastChemical {
    /// Which, ascending, at least one, never a rinse.
    pub classes: Vec<StepClass>,
    /// End of the cleaning that left them.
    pub at: Instant,
}

impl LastChemical {
    /// What a recorded cleaning left behind; `before` is what was in the train before it.
    /// `None` if every chemical was rinsed out and the readings of the rinse show it.
    pub fn left_by(steps: &[Step], before: Option<&Self>, end: Instant) -> Option<Self> {
        let classes = left(steps, before, &|k, a, b| shown(steps, k, a, b));
        (!classes.is_empty()).then_some(Self { classes, at: end })
    }
}

/// Whether the rinse at that step keeps two classes apart.
pub(super) type Apart<'a> = &'a dyn Fn(usize, StepClass, StepClass) -> bool;

/// Classes of a step: the one stated, and those that the chemical's name gives away.
pub(super) fn classes(step: &Step) -> Vec<StepClass> {
    let mut out = vec![step.class];
    if step.class == StepClass::Other {
        return out;
    }
    out.extend(step.chemical.as_deref().map(classes_by_name).unwrap_or_default());
    out.sort_unstable();
    out.dedup();
    if out.len() > 1 {
        out.retain(|c| *c != StepClass::Rinse);
    }
    out
}

/// Conflicts in a cleaning as recorded. `last` is what was in the train before; leave it out
/// where the train has filtered since, which no record of a rinse shows. A record is never
/// refused: what is found here raises an alarm.
pub fn conflicts(steps: &[Step], last: Option<&LastChemical>) -> Vec<Conflict> {
    find(steps, last, &|k, a, b| shown(steps, k, a, b))
}

/// Conflicts in a plan.
pub(super) fn planned(steps: &[Step], last: Option<&LastChemical>) -> Vec<Conflict> {
    find(steps, last, &|k, a, b| steps.get(k).is_some_and(|s| rinse_separates(s, a, b)))
}

/// Whether the readings of a recorded rinse show that it keeps two classes apart: they pass as
/// limits of a plan would, and pass the limits that the record itself may state.
pub(super) fn shown(steps: &[Step], k: usize, a: StepClass, b: StepClass) -> bool {
    let Some(rinse) = steps.get(k) else { return false };
    let Some(read) = &rinse.verified else { return false };
    let within = |v: f64| read.ph_range.is_none_or(|(low, high)| (low..=high).contains(&v));
    let under = |v: f64| v >= 0.0 && read.free_chlorine_max_mg_l.is_none_or(|max| v <= max);
    let as_limits = VerifiedRinse {
        ph_range: read.ph.filter(|v| within(*v)).map(|v| (v, v)),
        free_chlorine_max_mg_l: read.free_chlorine_mg_l.filter(|v| under(*v)),
        ..read.clone()
    };
    rinse_separates(&Step { verified: Some(as_limits), ..rinse.clone() }, a, b)
}

/// Conflicts, by a rule that says which rinse keeps what apart.
pub(super) fn find(steps: &[Step], last: Option<&LastChemical>, apart: Apart) -> Vec<Conflict> {
    let mut out = Vec::new();
    let before = last.map(|l| l.classes.as_slice()).unwrap_or_default();
    for (j, later) in steps.iter().enumerate() {
        let brought = classes(later);
        for (n, a) in brought.iter().enumerate() {
            let rest = brought.get(n + 1..).unwrap_or_default();
            out.extend(rest.iter().filter_map(|b| conflict(steps, *a, *b, Some(j), j, apart)));
        }
        for b in brought {
            out.extend(before.iter().filter_map(|a| conflict(steps, *a, b, None, j, apart)));
            for (i, earlier) in steps.iter().enumerate().take(j) {
                let met = classes(earlier);
                out.extend(met.iter().filter_map(|a| conflict(steps, *a, b, Some(i), j, apart)));
            }
        }
    }
    out
}

fn conflict(
    steps: &[Step],
    first: StepClass,
    second: StepClass,
    from_step: Option<usize>,
    at_step: usize,
    apart: Apart,
) -> Option<Conflict> {
    let kind = ConflictKind::of(first, second)?;
    let between = from_step.map_or(0, |i| i + 1)..at_step;
    if between.clone().any(|k| apart(k, first, second)) {
        return None;
    }
    let is_rinse = |k: usize| steps.get(k).is_some_and(|s| s.class == StepClass::Rinse);
    let unproven_rinse = between.clone().any(is_rinse);
    Some(Conflict { first, second, from_step, at_step, kind, unproven_rinse })
}

/// Classes that no later rinse took out, ascending.
pub(super) fn left(steps: &[Step], before: Option<&LastChemical>, apart: Apart) -> Vec<StepClass> {
    let mut out: Vec<StepClass> = Vec::new();
    let mut keep = |class: StepClass, after: usize| {
        let gone = (after..steps.len()).any(|k| apart(k, class, class));
        if class != StepClass::Rinse && !gone {
            out.push(class);
        }
    };
    for class in before.map(|l| l.classes.as_slice()).unwrap_or_default() {
        keep(*class, 0);
    }
    for (i, step) in steps.iter().enumerate() {
        for class in classes(step) {
            keep(class, i + 1);
        }
    }
    out.sort_unstable();
    out.dedup();
    out
}
