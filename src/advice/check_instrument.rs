//! Check an instrument: filtration goes on but its readings cannot be used.

use crate::analysis::{FindingKind, Reason};

use super::inspect::of_kind;
use super::{Action, Case, ClearsWhen, Proposal, StepsFrom, Urgency};

/// Reasons that point to an instrument or its line, not to how the train is run.
const INSTRUMENT: [Reason; 6] = [
    Reason::NoFlow,
    Reason::NoPressure,
    Reason::NoTemperature,
    Reason::TemperatureOutOfRange,
    Reason::TmpUnderFloor,
    Reason::Frozen,
];

/// The rule.
pub fn propose(case: &Case) -> Option<Proposal> {
    if !case.standing.troubles.iter().any(|r| INSTRUMENT.contains(r)) {
        return None;
    }
    Some(Proposal {
        action: Action::CheckInstrument,
        urgency: Urgency::ThisWeek,
        clean_by: None,
        start_by: None,
        evidence: of_kind(case.findings, FindingKind::CannotNormalise),
        clears_when: ClearsWhen::ReadingsUsable,
        steps: Vec::new(),
        steps_from: StepsFrom::None,
    })
}
