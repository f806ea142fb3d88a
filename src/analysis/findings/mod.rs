//! Stage 4: findings. One kind a file, each on its own; [`find`] is the list.

mod cannot_normalise;
mod clean_verdict;
mod limit_ahead;
mod limit_held;

use serde::{Deserialize, Serialize};

use crate::base::{Instant, TrainId};

use super::Site;
use super::limits::LimitKind;
use super::runs::{BaselineKind, Verdict};
use super::standing::Standing;

/// What a value is measured in.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Serialize, Deserialize)]
#[serde(rename_all = "snake_case")]
pub enum Measure {
    /// Share of 1.
    Share,
    /// Pa.
    Pressure,
    /// A count.
    Count,
}

/// What was found, flat, so that it can be kept and shown as it is.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize)]
pub struct Evidence {
    /// Kind of finding.
    pub finding: FindingKind,
    /// The limit it is about.
    pub limit_kind: Option<LimitKind>,
    /// What was read, in SI.
    pub value: f64,
    /// The limit, in SI.
    pub limit: Option<f64>,
    /// In what.
    pub measure: Measure,
    /// Against which baseline.
    pub baseline: Option<BaselineKind>,
    /// First moment of the data it stands on.
    pub from: Instant,
    /// End of them.
    pub to: Instant,
    /// P10, P50, P90, where it is about a date.
    pub dates: Option<super::forecast::Dates>,
    /// Verdict, where it is about a clean.
    pub verdict: Option<Verdict>,
    /// Reasons, where it is about readings.
    pub reasons: Vec<super::reason::Reason>,
}

/// The kinds of finding.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord, Serialize, Deserialize)]
#[serde(rename_all = "snake_case")]
pub enum FindingKind {
    /// Loss of permeability has been past a limit for the on-delay.
    PermeabilityLoss,
    /// TMP at the end of a cycle has been past a limit for the on-delay.
    TmpHigh,
    /// The clean limit of permeability is likely within the planning horizon.
    PermeabilityLimitAhead,
    /// The clean limit of TMP is likely within the planning horizon.
    TmpLimitAhead,
    /// The last clean was judged.
    CleanVerdict,
    /// Hours of filtration could not be normalised.
    CannotNormalise,
}

impl FindingKind {
    /// The code used in the API and the store.
    pub const fn code(self) -> &'static str {
        match self {
            Self::PermeabilityLoss => "permeability_loss",
            Self::TmpHigh => "tmp_high",
            Self::PermeabilityLimitAhead => "permeability_limit_ahead",
            Self::TmpLimitAhead => "tmp_limit_ahead",
            Self::CleanVerdict => "clean_verdict",
            Self::CannotNormalise => "cannot_normalise",
        }
    }
}

/// A finding about a train at a moment. Keyed by train, day and kind.
#[derive(Clone, Debug, PartialEq)]
pub struct Finding {
    /// Whose.
    pub train: TrainId,
    /// When it stood.
    pub as_of: Instant,
    /// What was found.
    pub evidence: Evidence,
}

type Find = fn(&Site, &Standing) -> Option<Evidence>;

/// The kinds of finding there are. A new kind is its file and a line here.
const FINDS: [Find; 6] = [
    limit_held::permeability,
    limit_held::tmp,
    limit_ahead::permeability,
    limit_ahead::tmp,
    clean_verdict::find,
    cannot_normalise::find,
];

/// Everything found for a train.
pub fn find(site: &Site, standing: &Standing) -> Vec<Finding> {
    FINDS
        .iter()
        .filter_map(|find| find(site, standing))
        .map(|evidence| Finding { train: standing.train.clone(), as_of: standing.as_of, evidence })
        .collect()
}
