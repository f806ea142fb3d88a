//! A clean limit whose early date falls within the planning horizon.

use super::{Evidence, FindingKind, Measure};
use crate::analysis::Site;
use crate::analysis::limits::LimitKind;
use crate::analysis::standing::Standing;

/// The limit of permeability loss.
pub fn permeability(site: &Site, standing: &Standing) -> Option<Evidence> {
    evidence(site, standing, LimitKind::LossClean, standing.loss?.share)
}

/// The limit of TMP.
pub fn tmp(site: &Site, standing: &Standing) -> Option<Evidence> {
    evidence(site, standing, LimitKind::TmpClean, standing.end_tmp_pa?.0)
}

fn evidence(site: &Site, standing: &Standing, kind: LimitKind, value: f64) -> Option<Evidence> {
    // A limit that has held is not ahead.
    if standing.hold(kind).held.is_some() {
        return None;
    }
    let dates = standing.dates_of(kind)?;
    let horizon = standing.as_of.plus(site.train.limits.planning_horizon_us);
    if dates.p10? > horizon {
        return None;
    }
    let tmp = kind.is_tmp();
    Some(Evidence {
        finding: if tmp { FindingKind::TmpLimitAhead } else { FindingKind::PermeabilityLimitAhead },
        limit_kind: Some(kind),
        value,
        limit: kind.value(&site.train.limits),
        measure: if tmp { Measure::Pressure } else { Measure::Share },
        baseline: if tmp { None } else { standing.baseline.map(|b| b.kind) },
        from: standing.run_start.unwrap_or(standing.as_of),
        to: standing.assessed?,
        dates: Some(dates),
        verdict: None,
        reasons: Vec::new(),
    })
}
