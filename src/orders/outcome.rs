//! From a run's row to what an order's clean was worth.

use crate::analysis::Run;
use crate::base::Instant;

use super::order::Outcome;

/// The outcome as known at `at`; `None` before the verdict is.
pub fn outcome(run: &Run, at: Instant) -> Option<Outcome> {
    let known = run.verdict_known.filter(|k| *k <= at)?;
    Some(Outcome {
        verdict: run.verdict,
        known,
        restored_share: run.restored_share(),
        regained_share: run.regained_share(),
        like_flux: run.like_flux(),
        before: run.before,
        after: run.after,
        best: run.best,
    })
}
