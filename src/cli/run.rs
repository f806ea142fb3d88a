//! What several commands do: open the store of a plant, and bring it up to the plant file.

use std::path::Path;

use anyhow::Context;

use super::Failure;
use crate::plant::Plant;
use crate::store::{PlantFile, Store};
use crate::work::{self, Cause, WallClock};

/// Opens a plant's store, notes the plant file in it, and works everything again if it is of
/// another plant file or version.
pub async fn open_store(plant: &Plant, file: &Path) -> Result<Store, Failure> {
    let store = Store::open(&plant.service.database).await?;
    note_plant_file(&store, plant, file, WallClock::default()).await?;
    if work::is_of_another(&store, plant).await? {
        eprintln!("The plant file or the program has changed: every derived row is worked again.");
        let cause = Cause { now: WallClock::default().now(), receipt: None };
        work::rebuild(&store, plant, &cause, &mut |_, _| {}).await?;
    }
    Ok(store)
}

/// Keeps the plant file as a fact.
pub async fn note_plant_file(
    store: &Store,
    plant: &Plant,
    file: &Path,
    clock: WallClock,
) -> Result<(), Failure> {
    let text = std::fs::read_to_string(file)
        .with_context(|| format!("cannot read the plant file {}", file.display()))?;
    let fact = PlantFile {
        revision: plant.revision.clone(),
        mapping: plant.mapping.clone(),
        content: text,
        seen: clock.now(),
    };
    store.save_plant_file(&plant.id, &fact).await?;
    store.save_train_tags(plant).await?;
    Ok(())
}
