//! Clean in place: the early date of a clean limit is within the planning horizon, or a clean
//! limit has held.

use crate::analysis::{Evidence, FindingKind, LimitKind, Verdict};
use crate::base::DAY_US;

use super::{Action, Case, ClearsWhen, Proposal, steps, urgency};

/// Once open, it stays open until the early date is this much further out than the horizon, so
/// that it does not come and go with the noise of a day.
const HOLD_ON: f64 = 1.5;

/// Whether the last two cleans gave too little: then the train is inspected, not cleaned again.
pub fn two_poor_cleans(case: &Case) -> bool {
    let poor = |v: &Verdict| matches!(v, Verdict::NotRestored | Verdict::PartlyRestored);
    let last = case.standing.clean.as_ref().map(|r| r.verdict);
    last.as_ref().is_some_and(poor) && case.standing.earlier_verdicts.first().is_some_and(poor)
}

/// The rule.
pub fn propose(case: &Case) -> Option<Proposal> {
    let standing = case.standing;
    if standing.in_clean.is_some() || two_poor_cleans(case) {
        return None;
    }
    let now = standing.as_of;
    let train = case.site.train;
    let held = LimitKind::ALL
        .into_iter()
        .filter(|k| k.is_clean())
        .any(|k| standing.hold(k).held.is_some());
    let dates = standing.binding().map(|(_, d)| d);
    let reach =
        if case.open.iter().any(|(a, _)| *a == Action::CleanInPlace) { HOLD_ON } else { 1.0 };
    let horizon = now.plus((train.limits.planning_horizon_us as f64 * reach) as i64);
    let near = dates.and_then(|d| d.p10).is_some_and(|p10| p10 <= horizon);
    if !held && !near {
        return None;
    }
    let clean_by = dates?;
    let start_by = clean_by.p10.map(|t| t.plus(-train.clean_duration_us - train.clean_notice_us));
    let (steps, steps_from) = steps::in_place(train);
    let urgency = urgency::of_start(case.plant, now, start_by, held);
    // Dates move by hours from day to day: what was urgent stays so until it is well clear.
    let earlier = start_by.map(|t| t.plus(-DAY_US));
    let clear = urgency::of_start(case.plant, now, earlier, held);
    let before = case.open.iter().find(|(a, _)| *a == Action::CleanInPlace).map(|(_, u)| *u);
    Some(Proposal {
        action: Action::CleanInPlace,
        urgency: before.map_or(urgency, |b| urgency.max(b.min(clear))),
        clean_by: Some(clean_by),
        start_by,
        evidence: evidence(case),
        clears_when: ClearsWhen::CleanedOrLimitFar,
        steps,
        steps_from,
    })
}

/// A clean that gave too little is told with the next one: was it done to procedure, warm enough
/// and strong enough?
fn poor_clean(e: &Evidence) -> bool {
    matches!(e.verdict, Some(Verdict::NotRestored | Verdict::PartlyRestored))
}

fn evidence(case: &Case) -> Vec<Evidence> {
    case.findings
        .iter()
        .map(|f| &f.evidence)
        .filter(|e| {
            matches!(
                e.finding,
                FindingKind::PermeabilityLoss
                    | FindingKind::TmpHigh
                    | FindingKind::PermeabilityLimitAhead
                    | FindingKind::TmpLimitAhead
            ) || poor_clean(e)
        })
        .cloned()
        .collect()
}
