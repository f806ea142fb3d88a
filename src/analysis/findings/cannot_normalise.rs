//! Hours of filtration from which no permeability could be told.

use super::{Evidence, FindingKind, Measure};
use crate::analysis::Site;
use crate::analysis::standing::Standing;
use crate::base::DAY_US;

/// Found where a whole hour of the last day could not be used.
pub fn find(_site: &Site, standing: &Standing) -> Option<Evidence> {
    if standing.troubles.is_empty() {
        return None;
    }
    Some(Evidence {
        finding: FindingKind::CannotNormalise,
        limit_kind: None,
        value: standing.troubles.len() as f64,
        limit: None,
        measure: Measure::Count,
        baseline: None,
        from: standing.as_of.plus(-DAY_US),
        to: standing.as_of,
        dates: None,
        verdict: None,
        reasons: standing.troubles.clone(),
    })
}
