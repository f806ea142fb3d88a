//! Stage 5: what is open, and what an hour changes of it. Never again for a past instant.

use std::collections::BTreeMap;

use crate::advice::{self, Action, Case, Change, Recommendation};
use crate::analysis::{self, DERIVATION_VERSION, Standing};
use crate::base::{DAY_US, TrainId};
use crate::plant::Plant;
use crate::store::{Changes, Entry, ItemFilter, ItemKind, Said, Store, StoreError, new_id};

use super::Cause;
use super::train::TrainWork;

/// Closed recommendations of the last days are known, so that a declined one stays declined.
const CLOSED_KNOWN_US: i64 = 8 * DAY_US;
/// More than this many are not open at once in any plant.
const MANY: u32 = 10_000;

/// What is open, and where changes of it go.
pub struct Decisions<'a> {
    plant: &'a Plant,
    cause: Cause<'a>,
    recommendations: BTreeMap<TrainId, Vec<Recommendation>>,
}

impl<'a> Decisions<'a> {
    /// Loads what is open.
    pub async fn load(
        store: &Store,
        plant: &'a Plant,
        cause: &Cause<'a>,
    ) -> Result<Self, StoreError> {
        let open = ItemFilter { open: Some(true), limit: MANY, ..Default::default() };
        let closed = ItemFilter {
            open: Some(false),
            changed_since: Some(cause.now.plus(-CLOSED_KNOWN_US)),
            limit: MANY,
            ..Default::default()
        };
        let mut recommendations: BTreeMap<TrainId, Vec<Recommendation>> = BTreeMap::new();
        for filter in [&open, &closed] {
            let kind = ItemKind::Recommendation;
            for (_, r) in store.items::<Recommendation>(&plant.id, kind, filter).await? {
                recommendations.entry(r.train.clone()).or_default().push(r);
            }
        }
        Ok(Self { plant, cause: *cause, recommendations })
    }

    /// Decides one train at one instant.
    pub async fn decide(
        &mut self,
        train: &TrainWork<'_>,
        standing: &Standing,
        reason: Option<&str>,
        changes: &mut Changes,
    ) -> Result<(), StoreError> {
        let findings = analysis::find(&train.site, standing);
        let known = self.recommendations.entry(standing.train.clone()).or_default();
        let open: Vec<Action> = known.iter().filter(|r| r.is_open()).map(|r| r.action).collect();
        let case = Case {
            plant: self.plant,
            site: &train.site,
            standing,
            findings: &findings,
            open: &open,
        };
        let proposals = advice::propose(&case);
        for change in advice::step(standing, &proposals, known, &mut new_id) {
            let item = change.item().clone();
            let said = Said {
                change: word(&change).to_owned(),
                as_of: Some(standing.as_of),
                by: None,
                reason: reason.map(str::to_owned),
                receipt: self.cause.receipt.map(str::to_owned),
            };
            let entry = Entry::new(
                ItemKind::Recommendation,
                &item.id,
                Some(&item.train),
                item.is_open(),
                &item,
                said,
                self.cause.now,
                &self.plant.revision,
                DERIVATION_VERSION,
            )?;
            changes.add_entry(&entry).await?;
            match known.iter_mut().find(|r| r.id == item.id) {
                Some(slot) => *slot = item,
                None => known.push(item),
            }
        }
        Ok(())
    }
}

fn word(change: &Change) -> &'static str {
    match change {
        Change::Raised(_) => "raised",
        Change::Updated(_) => "updated",
        Change::Closed(_) => "closed",
    }
}
