//! What stands and asks for a response.

use crate::analysis::{Evidence, Finding, FindingKind, LimitKind, Origin, Standing, Verdict};
use crate::base::{Instant, SourceId, TrainId};
use crate::plant::{Phase, StepClass};

use super::alarm::{AlarmKind, Detail};

/// Data are stale after this many times the usual spacing of exports.
const STALE_AFTER: i64 = 3;

/// Why an alarm keeps quiet by itself.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Withheld {
    /// The train is being cleaned: what asks for a clean has its response.
    InClean,
    /// The train is out of service.
    OutOfService,
}

/// A condition that stands. With kind, train, source and subject it is one alarm.
#[derive(Clone, Debug, PartialEq)]
pub struct Condition {
    /// What it is about.
    pub kind: AlarmKind,
    /// Whose; `None` where it is not one train's.
    pub train: Option<TrainId>,
    /// Which source's.
    pub source: Option<SourceId>,
    /// What tells two of one kind and train apart; else empty.
    pub subject: String,
    /// On what evidence.
    pub evidence: Vec<Evidence>,
    /// What the evidence does not say.
    pub detail: Detail,
    /// Why it keeps quiet, if it does. Integrity and chemicals never do.
    pub withheld: Option<Withheld>,
}

impl Condition {
    fn new(kind: AlarmKind, train: Option<&TrainId>, subject: &str) -> Self {
        Self {
            kind,
            train: train.cloned(),
            source: None,
            subject: subject.to_owned(),
            evidence: Vec::new(),
            detail: Detail::None,
            withheld: None,
        }
    }

    /// A source that has delivered nothing for three times its spacing. `newest` is its newest
    /// reading, `None` before the first: what never came cannot be late. `now` is the wall clock.
    pub fn data_stale(
        source: &SourceId,
        newest: Option<Instant>,
        expected_every_us: i64,
        now: Instant,
    ) -> Option<Self> {
        let newest = newest?;
        if now.since(newest) <= expected_every_us.saturating_mul(STALE_AFTER) {
            return None;
        }
        let mut condition = Self::new(AlarmKind::DataStale, None, "");
        condition.source = Some(source.clone());
        condition.detail = Detail::NewestReading(newest);
        Some(condition)
    }

    /// An instrument that is not to be believed. `subject` is its tag; `train` is `None` where
    /// it serves several, so that one cause is one alarm.
    pub fn instrument(train: Option<&TrainId>, tag: &str, evidence: Vec<Evidence>) -> Self {
        Self { evidence, ..Self::new(AlarmKind::Instrument, train, tag) }
    }

    /// A failed integrity test, by its id.
    pub fn integrity(train: &TrainId, test: &str) -> Self {
        Self::new(AlarmKind::Integrity, Some(train), test)
    }

    /// A recorded cleaning, by its id, that brought classes together which must not meet. It
    /// stands until a later cleaning of the train is recorded without, or the record is
    /// corrected.
    pub fn chemical_conflict(
        train: &TrainId,
        cleaning: &str,
        first: StepClass,
        second: StepClass,
    ) -> Self {
        let detail = Detail::Met { first, second };
        Self { detail, ..Self::new(AlarmKind::ChemicalConflict, Some(train), cleaning) }
    }
}

/// Conditions of a train's process: a clean limit that has held, one whichever limits they are,
/// and a clean that is too good to be true. `phase` is what the train is doing now.
pub fn conditions(standing: &Standing, findings: &[Finding], phase: Phase) -> Vec<Condition> {
    let withheld = if standing.in_clean.is_some() {
        Some(Withheld::InClean)
    } else if phase == Phase::OutOfService {
        Some(Withheld::OutOfService)
    } else {
        None
    };
    clean_limit(standing, findings, withheld)
        .into_iter()
        .chain(clean_doubtful(standing, findings))
        .collect()
}

fn clean_limit(
    standing: &Standing,
    findings: &[Finding],
    withheld: Option<Withheld>,
) -> Option<Condition> {
    let first = LimitKind::ALL
        .into_iter()
        .filter(|k| k.is_clean())
        .filter_map(|k| standing.hold(k).held.map(|held| (held, k)))
        .min()?;
    let mut condition = Condition::new(AlarmKind::CleanLimit, Some(&standing.train), "");
    condition.detail = Detail::Limit(first.1);
    condition.evidence = evidence(findings, |e| {
        matches!(e.finding, FindingKind::PermeabilityLoss | FindingKind::TmpHigh)
            && e.limit_kind.is_some_and(LimitKind::is_clean)
    });
    condition.withheld = withheld;
    Some(condition)
}

fn clean_doubtful(standing: &Standing, findings: &[Finding]) -> Option<Condition> {
    let run = standing.clean.as_ref().filter(|r| r.verdict == Verdict::Doubtful)?;
    let subject = match &run.origin {
        Origin::Recorded(id) => id.clone(),
        Origin::Inferred => run.clean_start.to_utc_text(),
    };
    let mut condition = Condition::new(AlarmKind::CleanDoubtful, Some(&standing.train), &subject);
    condition.evidence = evidence(findings, |e| e.finding == FindingKind::CleanVerdict);
    Some(condition)
}

fn evidence(findings: &[Finding], wanted: impl Fn(&Evidence) -> bool) -> Vec<Evidence> {
    findings.iter().map(|f| &f.evidence).filter(|e| wanted(e)).cloned().collect()
}
