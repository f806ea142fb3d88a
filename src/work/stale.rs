//! What the wall clock alone brings about: data that are too old, shelves that end.

use crate::alarms::{self, Alarm, AlarmChange, AlarmKind, Condition, Look, Scope};
use crate::analysis::DERIVATION_VERSION;
use crate::base::{Instant, SourceId};
use crate::plant::Plant;
use crate::store::{Entry, ItemFilter, ItemKind, Said, Store, StoreError, new_id};

/// More alarms than this are not open at once in any plant.
const MANY: u32 = 10_000;

/// Looks once at the age of every source's data and at the shelves, by the wall clock. Writes
/// only where something changes; answers how many alarms did.
///
/// # Errors
/// If the store refuses; nothing is changed then.
pub async fn watch(store: &Store, plant: &Plant, now: Instant) -> Result<usize, StoreError> {
    if look(store, plant, now).await?.is_empty() {
        return Ok(0);
    }
    let mut changes = store.begin_changes(&plant.id).await?;
    // Looked at again: somebody may have written until now, and nobody does from now on.
    let found = look(store, plant, now).await?;
    for change in &found {
        let alarm = &change.alarm;
        let said = Said { change: change.turn.code().to_owned(), ..Said::default() };
        let entry = Entry::new(
            ItemKind::Alarm,
            &alarm.id,
            alarm.train.as_ref(),
            !alarm.is_normal(),
            alarm,
            said,
            now,
            &plant.revision,
            DERIVATION_VERSION,
        )?;
        changes.add_entry(&entry).await?;
    }
    changes.commit().await?;
    Ok(found.len())
}

async fn look(store: &Store, plant: &Plant, now: Instant) -> Result<Vec<AlarmChange>, StoreError> {
    let open = ItemFilter { open: Some(true), limit: MANY, ..Default::default() };
    let known = store.items::<Alarm>(&plant.id, ItemKind::Alarm, &open).await?;
    let known: Vec<Alarm> = known.into_iter().map(|(_, alarm)| alarm).collect();
    let mut ages = Vec::with_capacity(plant.sources.len());
    for source in &plant.sources {
        let newest = store.newest_reading(&plant.id, &source.id).await?;
        ages.push((&source.id, newest, source.expected_every_us));
    }
    Ok(changes(&known, &ages, now))
}

/// What changes of the alarms there are, by each source's newest reading and usual spacing.
fn changes(
    known: &[Alarm],
    ages: &[(&SourceId, Option<Instant>, i64)],
    now: Instant,
) -> Vec<AlarmChange> {
    let conditions: Vec<Condition> = ages
        .iter()
        .filter_map(|(source, newest, every)| Condition::data_stale(source, *newest, *every, now))
        .collect();
    let scope = Scope { kinds: &[AlarmKind::DataStale], train: None, source: None };
    let look = Look { scope, as_of: now, now };
    alarms::step(known, &conditions, &look, &mut new_id)
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::alarms::{AlarmState, acknowledge, shelve};
    use crate::base::HOUR_US;

    fn at(hour: i64) -> Instant {
        Instant::from_micros(hour * HOUR_US)
    }

    #[test]
    fn a_source_is_stale_until_it_delivers_and_a_shelf_ends_by_the_clock() {
        let (a, b) = (SourceId::new("scada"), SourceId::new("lab"));
        let look = |known: &[Alarm], newest: i64, now: i64| {
            let ages = [(&a, Some(at(newest)), HOUR_US), (&b, None, HOUR_US)];
            changes(known, &ages, at(now))
        };
        assert!(look(&[], 10, 13).is_empty(), "three times the spacing is not yet too old");
        let raised = look(&[], 10, 14);
        assert_eq!(raised.len(), 1, "a source that never delivered is not late");
        let alarm = raised[0].alarm.clone();
        assert_eq!((alarm.source.as_ref(), alarm.raised), (Some(&a), at(14)));
        let known = std::slice::from_ref(&alarm);
        assert!(look(known, 10, 15).is_empty(), "said once");
        let silent = shelve(&alarm, "shift A", at(20), "export being repaired", at(15)).unwrap();
        assert!(look(std::slice::from_ref(&silent), 10, 19).is_empty());
        let sounds = look(std::slice::from_ref(&silent), 10, 20);
        assert_eq!(sounds[0].alarm.state, AlarmState::Unacknowledged);
        let told = acknowledge(&alarm, "shift A", at(15)).unwrap();
        let over = look(std::slice::from_ref(&told), 15, 16);
        assert_eq!(over[0].alarm.state, AlarmState::Normal);
    }
}
