//! A simulated plant with its own store.

use std::path::Path;

use washbell::base::Instant;
use washbell::ingest::{self, Accepted, Delivery};
use washbell::plant::{self, Plant};
use washbell::sim::{self, Recipe, Simulation};
use washbell::store::Store;
use washbell::work::{self, Cause, Worked};

/// A simulated plant, its plant file and a store of its own.
pub struct Plantlet {
    pub plant: Plant,
    pub store: Store,
    pub sim: Simulation,
    pub recipe: Recipe,
    pub end: Instant,
    _folder: tempfile::TempDir,
}

impl Plantlet {
    pub async fn demo(end: Instant) -> Self {
        Self::of(sim::demo(7, end), end).await
    }

    pub async fn of(recipe: Recipe, end: Instant) -> Self {
        let folder = tempfile::tempdir().unwrap();
        let file = sim::plant_toml(&recipe, "127.0.0.1:0", "washbell.db");
        let reading = plant::read(&file, Path::new("")).unwrap_or_else(|m| panic!("{m:?}"));
        let store = Store::open(&folder.path().join("washbell.db")).await.unwrap();
        Self {
            plant: reading.plant,
            store,
            sim: Simulation::new(recipe.clone()),
            recipe,
            end,
            _folder: folder,
        }
    }

    /// Writes and takes everything up to the end, as one file.
    pub async fn import_all(&mut self) {
        let mut text = sim::header(&self.recipe);
        self.sim.write_rows(self.end, &mut text);
        self.take("all.csv", &text, self.end).await;
    }

    pub async fn take(&mut self, name: &str, text: &str, received: Instant) -> Accepted {
        let delivery = Delivery { source: &self.plant.sources[0], file: name, received };
        let digest = ingest::digest(text.as_bytes()).unwrap();
        ingest::accept_file(&self.store, &self.plant, &delivery, &digest, text.as_bytes())
            .await
            .unwrap()
    }

    pub async fn work(&self) -> Worked {
        let cause = Cause { now: self.end, receipt: None };
        work::catch_up(&self.store, &self.plant, &cause, &mut |_, _| {}).await.unwrap()
    }
}
