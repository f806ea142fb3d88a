//! What stands now, for answers: the same rows and the same functions as on the road.

use crate::analysis::{Assessment, Day, Hour, Now, Run, Site, Standing};
use crate::base::{Instant, Span};
use crate::plant::{Plant, Train};
use crate::store::{Store, StoreError};

use super::train::{Past, TrainWork};

/// What stands for a train, and the rows that answers about it need beside that.
pub struct TrainState<'a> {
    /// The train.
    pub site: Site<'a>,
    /// What stands; `None` before its first hour.
    pub standing: Option<Standing>,
    /// What it does now; `None` before its first reading.
    pub now: Option<Now>,
    /// State codes that the plant file does not name.
    pub unknown_codes: Vec<String>,
    /// The last assessment.
    pub assessment: Option<Assessment>,
    /// All runs.
    pub runs: Vec<Run>,
    /// The newest whole or open day.
    pub day: Option<Day>,
    /// The last hours, in order of time.
    pub hours: Vec<Hour>,
}

/// What stands for a train as of its newest reading.
///
/// # Errors
/// If the store refuses.
pub async fn train_state<'a>(
    store: &Store,
    plant: &'a Plant,
    train: &'a Train,
) -> Result<TrainState<'a>, StoreError> {
    let now = store.train_now(&plant.id, &train.id).await?;
    let newest = now.as_ref().map(|n| n.now.newest);
    let mut work = TrainWork::load(store, plant, train, None, newest, Past::Whole).await?;
    let far = Instant::from_micros(i64::MAX);
    let from = work.fold_from.unwrap_or(Instant::from_micros(i64::MIN));
    let day = store.days(&plant.id, &train.id, Span::new(from, far), 1).await?.pop();
    if let Some(from) = work.fold_from {
        work.take_stored(store, &plant.id, Span::new(from, far)).await?;
    }
    let as_of = newest.map(|n| n.plus(crate::analysis::every_us(plant, train)));
    let standing = as_of.and_then(|at| work.standing(plant, at));
    let (now, unknown_codes) = now.map_or((None, Vec::new()), |n| (Some(n.now), n.unknown_codes));
    Ok(TrainState {
        standing,
        now,
        unknown_codes,
        assessment: work.last_assessment().cloned(),
        runs: work.memory.runs,
        day: day.or(work.memory.days.pop()),
        hours: work.memory.hours,
        site: work.site,
    })
}

/// What stands for every train, in the plant file's order.
///
/// # Errors
/// If the store refuses.
pub async fn train_states<'a>(
    store: &Store,
    plant: &'a Plant,
) -> Result<Vec<TrainState<'a>>, StoreError> {
    let mut out = Vec::with_capacity(plant.trains.len());
    for train in &plant.trains {
        out.push(train_state(store, plant, train).await?);
    }
    Ok(out)
}
