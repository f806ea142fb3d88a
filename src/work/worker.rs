//! One worker for everybody who leaves work behind: posts, recorded facts, the job that looks
//! once a minute. One works at a time.

use std::collections::BTreeSet;
use std::sync::{Arc, PoisonError, RwLock};

use tokio::sync::Mutex;

use super::{Cause, WallClock, Worked, catch_up};
use crate::plant::Plant;
use crate::store::{Store, StoreError};

/// Works what is to be worked on one store, by the plant file as it now is. Clones share it.
#[derive(Clone, Debug)]
pub struct Worker {
    store: Store,
    clock: WallClock,
    plant: Arc<RwLock<Arc<Plant>>>,
    one: Arc<Mutex<()>>,
}

impl Worker {
    /// A worker.
    pub fn new(store: Store, plant: Plant, clock: WallClock) -> Self {
        let plant = Arc::new(RwLock::new(Arc::new(plant)));
        Self { store, clock, plant, one: Arc::default() }
    }
    /// The store it works on.
    pub const fn store(&self) -> &Store {
        &self.store
    }
    /// The wall clock.
    pub const fn clock(&self) -> WallClock {
        self.clock
    }
    /// The plant as its file describes it now.
    pub fn plant(&self) -> Arc<Plant> {
        Arc::clone(&self.plant.read().unwrap_or_else(PoisonError::into_inner))
    }
    /// Takes another plant file for everything that begins from now on.
    pub fn set_plant(&self, plant: Plant) {
        *self.plant.write().unwrap_or_else(PoisonError::into_inner) = Arc::new(plant);
    }

    /// How many plant days wait to be worked again.
    ///
    /// # Errors
    /// If the store refuses.
    pub async fn days_waiting(&self) -> Result<usize, StoreError> {
        let dirty = self.store.dirty_days(&self.plant().id).await?;
        Ok(dirty.iter().map(|d| d.day_start).collect::<BTreeSet<_>>().len())
    }

    /// Works whatever waits, once whoever works now is done. `receipt` is the delivery that
    /// brought it about.
    ///
    /// # Errors
    /// If the store refuses; the work stays to be done then.
    pub async fn catch_up(&self, receipt: Option<&str>) -> Result<Worked, StoreError> {
        let _one = self.one.lock().await;
        let cause = Cause { now: self.clock.now(), receipt };
        catch_up(&self.store, &self.plant(), &cause, &mut |_, _| {}).await
    }
}
