//! The verdict on the clean that began the run.

use super::{Evidence, FindingKind, Measure};
use crate::analysis::Site;
use crate::analysis::runs::Verdict;
use crate::analysis::standing::Standing;

/// Found once the verdict is known.
pub fn find(_site: &Site, standing: &Standing) -> Option<Evidence> {
    let run = standing.clean.as_ref()?;
    let verdict = Some(run.verdict).filter(|v| *v != Verdict::CannotTellYet)?;
    let after = run.after?;
    Some(Evidence {
        finding: FindingKind::CleanVerdict,
        limit_kind: None,
        value: run.restored_share()?,
        limit: None,
        measure: Measure::Share,
        baseline: run.best.map(|b| b.kind),
        from: after.from,
        to: after.to,
        dates: None,
        verdict: Some(verdict),
        reasons: Vec::new(),
    })
}
