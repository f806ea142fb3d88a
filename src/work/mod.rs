//! Floor 9: load, decide, save. One road for a post, an import, late data and a rebuild: days
//! whose facts changed are worked again in order, later stages follow from the first of them,
//! and decisions are taken at every closed hour of data time that has not been decided yet.
//!
//! Everything is written through one [`crate::store::Changes`]: all of it or nothing.

mod acts;
mod clock;
mod decide;
mod load;
mod stale;
mod train;
mod wall;
mod worker;

use std::collections::{BTreeMap, BTreeSet};

use crate::analysis::{DERIVATION_VERSION, LOOKBACK_US, Readings, Viscosity};
use crate::base::{Instant, SourceId, Span, Tag, TrainId};
use crate::plant::Plant;
use crate::store::{Changes, DirtyDay, Store, StoreError};

pub use acts::{ActError, CleaningRefused, Desk, Done, NewCleaning};
pub use clock::{newest_by_train, stale_after_us};
pub use load::{TrainState, train_state, train_states};
pub use stale::watch;
pub use wall::WallClock;
pub use worker::Worker;

use clock::Clock;
use decide::{Decisions, Instance};
use train::{Past, TrainWork};

/// Runs are written anew from this long before the first day that was worked again: a clean and
/// its joined steps lie within.
const RUNS_BACK_US: i64 = 40 * crate::base::DAY_US;

/// What work is done for.
#[derive(Clone, Copy, Debug)]
pub struct Cause<'a> {
    /// Service time.
    pub now: Instant,
    /// Delivery that brought it about.
    pub receipt: Option<&'a str>,
}

/// What was done.
#[derive(Clone, Debug, Default, PartialEq)]
pub struct Worked {
    /// From when each train's answers changed.
    pub changed_from: BTreeMap<TrainId, Instant>,
    /// Train-days worked from readings.
    pub train_days: usize,
}

/// Called as days are done: (done, of).
pub type Progress<'a> = &'a mut (dyn FnMut(usize, usize) + Send);

/// Works whatever is to be worked, and takes the decisions that are due.
///
/// # Errors
/// If the store refuses; nothing is changed then, and the work stays to be done.
pub async fn catch_up(
    store: &Store,
    plant: &Plant,
    cause: &Cause<'_>,
    progress: Progress<'_>,
) -> Result<Worked, StoreError> {
    let idle = store.dirty_days(&plant.id).await?.is_empty()
        && store.pending_receipts(&plant.id).await?.is_empty();
    if idle {
        return Ok(Worked::default());
    }
    let mut changes = store.begin_changes(&plant.id).await?;
    if is_of_another(store, plant).await? {
        // Rows of two plant files beside each other would be worse than late ones.
        return rebuild_in(changes, store, plant, cause, progress).await;
    }
    // Read again now that nothing else can be written: what came meanwhile is worked too.
    let dirty = store.dirty_days(&plant.id).await?;
    let pending = store.pending_receipts(&plant.id).await?;
    let decisions = Decisions::load(store, plant, cause, &mut changes).await?;
    let mut road = Road::new(store, plant, changes, &dirty, false).await?;
    road.decisions = Some(decisions);
    road.walk(progress).await?;
    road.reconsider("late_data").await?;
    road.finish(&dirty, &pending).await
}

/// Whether the derived rows are of another plant file or version of the derivation.
///
/// # Errors
/// If the store refuses.
pub async fn is_of_another(store: &Store, plant: &Plant) -> Result<bool, StoreError> {
    let of = store.derivation(&plant.id).await?;
    Ok(of.is_some_and(|(version, revision)| {
        version != DERIVATION_VERSION || revision != plant.revision
    }))
}

/// Works every derived row again from the facts. Writes no history but for hours that had not
/// been decided; where the plant file changed, what is open is looked at once, at the newest
/// instant.
///
/// # Errors
/// If the store refuses; the old rows stand then.
pub async fn rebuild(
    store: &Store,
    plant: &Plant,
    cause: &Cause<'_>,
    progress: Progress<'_>,
) -> Result<Worked, StoreError> {
    let changes = store.begin_changes(&plant.id).await?;
    rebuild_in(changes, store, plant, cause, progress).await
}

async fn rebuild_in(
    mut changes: Changes,
    store: &Store,
    plant: &Plant,
    cause: &Cause<'_>,
    progress: Progress<'_>,
) -> Result<Worked, StoreError> {
    let of_another_file =
        store.derivation(&plant.id).await?.is_some_and(|(_, revision)| revision != plant.revision);
    let done = store.dirty_days(&plant.id).await?;
    let pending = store.pending_receipts(&plant.id).await?;
    let all = every_day(store, plant).await?;
    let decisions = Decisions::load(store, plant, cause, &mut changes).await?;
    changes.clear_derived().await?;
    let mut road = Road::new(store, plant, changes, &all, true).await?;
    road.decisions = Some(decisions);
    road.walk(progress).await?;
    if of_another_file {
        road.told_late = plant.trains.iter().map(|t| t.id.clone()).collect();
        road.reconsider("plant_file_changed").await?;
    }
    road.finish(&done, &pending).await
}

/// Every plant day of every train from its first reading to its newest.
async fn every_day(store: &Store, plant: &Plant) -> Result<Vec<DirtyDay>, StoreError> {
    let mut out = Vec::new();
    for train in &plant.trains {
        let tags: Vec<(SourceId, Tag)> = crate::analysis::tags_needed(train).into_iter().collect();
        let Some(span) = store.readings_span(&plant.id, &tags).await? else { continue };
        let mut day = plant.zone.day(span.from);
        while day.from <= span.to {
            out.push(DirtyDay { day_start: day.from, train: train.id.clone(), mark: 0 });
            day = plant.zone.day(day.to);
        }
    }
    out.sort();
    Ok(out)
}

/// The walk over days.
struct Road<'a> {
    store: &'a Store,
    plant: &'a Plant,
    changes: Changes,
    trains: Vec<TrainWork<'a>>,
    /// Days to work from readings, by start, with their trains.
    dirty: BTreeMap<Instant, BTreeSet<TrainId>>,
    clock: Clock,
    decisions: Option<Decisions<'a>>,
    viscosity: Viscosity,
    /// Stored rows are not looked at: everything is worked again.
    afresh: bool,
    worked: Worked,
    /// Trains of which a fact of an earlier day was told: a clean, for one, changes no hour.
    told_late: BTreeSet<TrainId>,
}

impl<'a> Road<'a> {
    async fn new(
        store: &'a Store,
        plant: &'a Plant,
        changes: Changes,
        dirty_days: &[DirtyDay],
        afresh: bool,
    ) -> Result<Self, StoreError> {
        let newest = newest_by_train(store, plant).await?;
        // The day after a reading is marked with it; it may not have begun.
        let begun = |d: &&DirtyDay| newest.get(&d.train).is_some_and(|n| d.day_start <= *n);
        let mut dirty: BTreeMap<Instant, BTreeSet<TrainId>> = BTreeMap::new();
        for d in dirty_days.iter().filter(begun) {
            dirty.entry(d.day_start).or_default().insert(d.train.clone());
        }
        let clock = Clock::new(store, plant, &newest).await?;
        let today = clock.stepped_before.map(|t| plant.zone.day(t.plus(-1)).from);
        let late = |d: &&DirtyDay| !afresh && today.is_some_and(|t| d.day_start < t);
        let told_late = dirty_days.iter().filter(late).map(|d| d.train.clone()).collect();
        let past = if afresh { Past::Nothing } else { Past::Walk };
        let mut trains = Vec::with_capacity(plant.trains.len());
        for train in &plant.trains {
            let first =
                dirty_days.iter().filter(|d| d.train == train.id).map(|d| d.day_start).min();
            let at = newest.get(&train.id).copied();
            trains.push(TrainWork::load(store, plant, train, first, at, past).await?);
        }
        Ok(Self {
            store,
            plant,
            changes,
            trains,
            dirty,
            clock,
            decisions: None,
            viscosity: Viscosity::new(plant.temperature_law),
            afresh,
            worked: Worked::default(),
            told_late,
        })
    }

    /// Days to walk: those to work from readings, and later ones that have rows.
    async fn days(&self) -> Result<Vec<Span>, StoreError> {
        let mut starts: BTreeSet<Instant> = self.dirty.keys().copied().collect();
        let from = self.trains.iter().filter_map(|t| t.fold_from).min();
        if let Some(from) = from.filter(|_| !self.afresh) {
            let trains: Vec<&TrainId> = self.plant.trains.iter().map(|t| &t.id).collect();
            starts.extend(self.store.day_starts(&self.plant.id, &trains, from).await?);
        }
        Ok(starts.into_iter().map(|s| self.plant.zone.day(s)).collect())
    }

    async fn walk(&mut self, progress: Progress<'_>) -> Result<(), StoreError> {
        let days = self.days().await?;
        for (done, day) in days.iter().enumerate() {
            progress(done, days.len());
            self.stages_1_and_2(*day).await?;
            self.step_hours(*day).await?;
            for train in &mut self.trains {
                train.stage_3(self.plant, *day, &mut self.changes).await?;
            }
        }
        progress(days.len(), days.len());
        Ok(())
    }

    /// Readings to rows for the trains whose facts changed; stored rows for the others.
    async fn stages_1_and_2(&mut self, day: Span) -> Result<(), StoreError> {
        let changed = self.dirty.get(&day.from).cloned().unwrap_or_default();
        let readings = self.readings(&changed, day).await?;
        for train in &mut self.trains {
            if changed.contains(&train.site.train.id) {
                let rows = crate::analysis::work_day(
                    self.plant,
                    train.site.train,
                    &readings,
                    day,
                    &mut self.viscosity,
                );
                self.worked.train_days += 1;
                let first = train.take(day, rows, &mut self.changes).await?;
                if let Some(first) = first {
                    let slot = self
                        .worked
                        .changed_from
                        .entry(train.site.train.id.clone())
                        .or_insert(first);
                    *slot = (*slot).min(first);
                }
            } else if train.fold_from.is_some_and(|f| f <= day.from) {
                train.take_stored(self.store, &self.plant.id, day).await?;
            }
        }
        Ok(())
    }

    async fn readings(
        &self,
        trains: &BTreeSet<TrainId>,
        day: Span,
    ) -> Result<Readings, StoreError> {
        let tags: BTreeSet<(SourceId, Tag)> = self
            .trains
            .iter()
            .filter(|t| trains.contains(&t.site.train.id))
            .flat_map(|t| t.tags.iter().cloned())
            .collect();
        if tags.is_empty() {
            return Ok(Readings::new());
        }
        let tags: Vec<(SourceId, Tag)> = tags.into_iter().collect();
        let window = Span::new(day.from.plus(-LOOKBACK_US), day.to);
        let columns = self.store.readings(&self.plant.id, &tags, window).await?;
        Ok(tags.into_iter().zip(columns).collect())
    }

    /// Decides the hours of a day that are due.
    async fn step_hours(&mut self, day: Span) -> Result<(), StoreError> {
        let Some(decisions) = &mut self.decisions else { return Ok(()) };
        while let Some(hour) = self.clock.next_due(self.plant, day) {
            for train in &self.trains {
                if let Some(standing) = train.standing(self.plant, hour) {
                    let look = Instance { train, standing: &standing, reason: None };
                    decisions.decide(&look, &mut self.changes).await?;
                }
            }
            self.clock.step(hour);
        }
        Ok(())
    }

    /// Looks once more, at the newest instant decided, at trains whose decided hours changed.
    async fn reconsider(&mut self, reason: &str) -> Result<(), StoreError> {
        let (Some(decisions), Some(before), Some(at)) =
            (&mut self.decisions, self.clock.stepped_before, self.clock.stepped)
        else {
            return Ok(());
        };
        for train in &self.trains {
            let id = &train.site.train.id;
            let changed = self.worked.changed_from.get(id).is_some_and(|c| *c < before);
            if (changed || self.told_late.contains(id))
                && let Some(standing) = train.standing(self.plant, at)
            {
                let look = Instance { train, standing: &standing, reason: Some(reason) };
                decisions.decide(&look, &mut self.changes).await?;
            }
        }
        Ok(())
    }

    async fn finish(
        mut self,
        dirty: &[DirtyDay],
        pending: &[String],
    ) -> Result<Worked, StoreError> {
        for train in &self.trains {
            if let Some(from) = train.fold_from {
                let from = from.plus(-RUNS_BACK_US);
                let id = &train.site.train.id;
                if train.runs_differ() {
                    self.changes.put_runs(id, from, &train.memory.runs).await?;
                }
            }
        }
        if let (Some(to), Some(_)) = (self.clock.stepped, &self.decisions) {
            self.changes.set_stepped(to).await?;
        }
        self.changes.clear_dirty(dirty).await?;
        for receipt in pending {
            self.changes.set_analysed(receipt, &self.worked.changed_from).await?;
        }
        self.changes.set_derivation(DERIVATION_VERSION, &self.plant.revision).await?;
        self.changes.commit().await?;
        Ok(self.worked)
    }
}
