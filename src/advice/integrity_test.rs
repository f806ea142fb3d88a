//! Integrity test: after a clean the train passes more water than it should. Permeability can
//! never show a breach, nor that there is none; but too good to be true asks for the test.

use crate::analysis::{FindingKind, Verdict};

use super::inspect::of_kind;
use super::{Action, Case, ClearsWhen, Proposal, StepsFrom, Urgency};

/// The rule.
pub fn propose(case: &Case) -> Option<Proposal> {
    let run = case.standing.clean.as_ref()?;
    if run.verdict != Verdict::Doubtful {
        return None;
    }
    Some(Proposal {
        action: Action::IntegrityTest,
        urgency: Urgency::ThisShift,
        clean_by: None,
        start_by: None,
        evidence: of_kind(case.findings, FindingKind::CleanVerdict),
        clears_when: ClearsWhen::VerdictNoLongerDoubtful,
        steps: Vec::new(),
        steps_from: StepsFrom::None,
    })
}
