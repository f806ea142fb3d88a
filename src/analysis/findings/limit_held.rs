//! A limit that has held: exceeded for the whole on-delay of filtration.

use super::{Evidence, FindingKind, Measure};
use crate::analysis::Site;
use crate::analysis::limits::LimitKind;
use crate::analysis::standing::Standing;

/// Loss of permeability past its clean or, failing that, its advisory limit.
pub fn permeability(site: &Site, standing: &Standing) -> Option<Evidence> {
    let kind = [LimitKind::LossClean, LimitKind::LossAdvisory]
        .into_iter()
        .find(|k| standing.hold(*k).held.is_some())?;
    evidence(site, standing, kind, standing.loss?.share)
}

/// TMP past its clean or, failing that, its advisory limit.
pub fn tmp(site: &Site, standing: &Standing) -> Option<Evidence> {
    let kind = [LimitKind::TmpClean, LimitKind::TmpAdvisory]
        .into_iter()
        .find(|k| standing.hold(*k).held.is_some())?;
    evidence(site, standing, kind, standing.end_tmp_pa?.0)
}

fn evidence(site: &Site, standing: &Standing, kind: LimitKind, value: f64) -> Option<Evidence> {
    Some(Evidence {
        finding: if kind.is_tmp() { FindingKind::TmpHigh } else { FindingKind::PermeabilityLoss },
        limit_kind: Some(kind),
        value,
        limit: kind.value(&site.train.limits),
        measure: if kind.is_tmp() { Measure::Pressure } else { Measure::Share },
        baseline: if kind.is_tmp() { None } else { standing.baseline.map(|b| b.kind) },
        from: standing.hold(kind).since?,
        to: standing.as_of,
        dates: None,
        verdict: None,
        reasons: Vec::new(),
    })
}
