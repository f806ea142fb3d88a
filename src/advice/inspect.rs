//! Inspect: two cleans running gave too little. A third would cost membrane life and most
//! likely give no more: look for clogging, or an instrument that is wrong.

use crate::analysis::{Finding, FindingKind};

use super::{Action, Case, ClearsWhen, Proposal, StepsFrom, Urgency, clean_in_place};

/// The rule.
pub fn propose(case: &Case) -> Option<Proposal> {
    if case.standing.in_clean.is_some() || !clean_in_place::two_poor_cleans(case) {
        return None;
    }
    Some(Proposal {
        action: Action::Inspect,
        urgency: Urgency::ThisWeek,
        clean_by: case.standing.binding().map(|(_, d)| d),
        start_by: None,
        evidence: of_kind(case.findings, FindingKind::CleanVerdict),
        clears_when: ClearsWhen::NextCleanRestored,
        steps: Vec::new(),
        steps_from: StepsFrom::None,
    })
}

/// The evidence of one kind of finding.
pub fn of_kind(findings: &[Finding], kind: FindingKind) -> Vec<crate::analysis::Evidence> {
    findings.iter().map(|f| &f.evidence).filter(|e| e.finding == kind).cloned().collect()
}
