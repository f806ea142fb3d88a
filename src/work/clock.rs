//! Data time: which hours are closed, and which of them are due to be decided.

use std::collections::BTreeMap;

use crate::analysis::tags_needed;
use crate::base::{DAY_US, HOUR_US, Instant, SourceId, Span, Tag, TrainId};
use crate::plant::{Plant, Train};
use crate::store::{Store, StoreError};

/// A train that posts later than this after another is not waited for.
const WAIT_US: i64 = 3 * HOUR_US;
/// A train without data for this long is not waited for at all.
const ABSENT_US: i64 = DAY_US;

/// Steps over the closed hours of data time.
pub struct Clock {
    /// Up to which hour decisions had been taken before.
    pub stepped_before: Option<Instant>,
    /// Up to which hour they have been taken now.
    pub stepped: Option<Instant>,
    /// End of the last hour that may be decided.
    due: Option<Instant>,
    first: Option<Instant>,
}

impl Clock {
    /// Reads where decisions stand. `newest` holds each train's newest reading.
    pub async fn new(
        store: &Store,
        plant: &Plant,
        newest: &BTreeMap<TrainId, Instant>,
    ) -> Result<Self, StoreError> {
        let stepped = store.stepped_to(&plant.id).await?;
        Ok(Self { stepped_before: stepped, stepped, due: due(plant, newest), first: None })
    }

    /// End of the next hour within a day that is due and has not been decided.
    pub fn next_due(&mut self, plant: &Plant, day: Span) -> Option<Instant> {
        let due = self.due?;
        let first = *self.first.get_or_insert(day.from);
        let after = self.stepped.unwrap_or(first).max(day.from);
        // Hours are counted from the day's midnight; the last may be shorter.
        let passed = after.since(day.from).div_euclid(HOUR_US);
        let end = plant.zone.day(day.from).to.min(day.from.plus((passed + 1) * HOUR_US));
        (after < day.to && end <= due).then_some(end)
    }

    /// Notes that an hour was decided.
    pub fn step(&mut self, hour_end: Instant) {
        self.stepped = self.stepped.max(Some(hour_end));
    }
}

/// End of the last hour that may be decided: closed for every train with data in the last
/// day, or one is three hours past it.
fn due(plant: &Plant, newest: &BTreeMap<TrainId, Instant>) -> Option<Instant> {
    let last = *newest.values().max()?;
    let closed = |train: &Train| {
        let newest = newest.get(&train.id).filter(|n| last.since(**n) < ABSENT_US)?;
        Some(hour_floor(plant, newest.plus(crate::analysis::every_us(plant, train))))
    };
    let ends: Vec<Instant> = plant.trains.iter().filter_map(closed).collect();
    let all = *ends.iter().min()?;
    let one = ends.iter().max()?.plus(-WAIT_US);
    Some(all.max(one))
}

fn hour_floor(plant: &Plant, at: Instant) -> Instant {
    let day = plant.zone.day(at);
    day.from.plus(at.since(day.from).div_euclid(HOUR_US) * HOUR_US)
}

/// Each train's newest reading.
///
/// # Errors
/// If the store refuses.
pub async fn newest_by_train(
    store: &Store,
    plant: &Plant,
) -> Result<BTreeMap<TrainId, Instant>, StoreError> {
    let mut keys: Vec<(SourceId, Tag)> = plant.trains.iter().flat_map(driving_tags).collect();
    keys.sort();
    keys.dedup();
    let newest = store.newest_readings(&plant.id, &keys).await?;
    let by_tag: BTreeMap<&(SourceId, Tag), Option<Instant>> = keys.iter().zip(newest).collect();
    let of = |train: &Train| driving_tags(train).iter().filter_map(|k| *by_tag.get(k)?).max();
    Ok(plant.trains.iter().filter_map(|t| Some((t.id.clone(), of(t)?))).collect())
}

/// Tags that are the train's own: a thermometer of the whole plant does not make it present.
fn driving_tags(train: &Train) -> Vec<(SourceId, Tag)> {
    use crate::plant::Role;
    let own = |s: &&crate::plant::Signal| matches!(s.role, Role::PermeateFlow | Role::State);
    let needed = tags_needed(train);
    train
        .signals
        .iter()
        .filter(own)
        .map(|s| (s.source.clone(), s.tag.clone()))
        .filter(|k| needed.contains(k))
        .collect()
}

/// Age of data from which a train's answers are no advice: three times the spacing of exports.
pub fn stale_after_us(plant: &Plant, train: &Train) -> i64 {
    train
        .signals
        .first()
        .and_then(|s| plant.source(&s.source))
        .map_or(3 * HOUR_US, |s| 3 * s.expected_every_us)
}
