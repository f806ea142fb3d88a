//! What may still be in a train, and what met in it by the records of its cleanings.

use super::{Desk, happened};
use crate::alarms::{self, Alarm, AlarmKind, Condition, Look, Scope};
use crate::base::{DAY_US, Instant, Span, TrainId};
use crate::orders::{LastChemical, conflicts};
use crate::store::{Changes, Cleaning, StoreError, new_id};

/// A gap without any hour worked is not known to be without filtration if it is longer.
const UNKNOWN_GAP_US: i64 = DAY_US;

/// What may still be in a train from cleanings that began before a moment. Filtration since then
/// does not count: no reading shows that it took anything out of a dead leg or a tank.
pub(super) async fn last_chemical(
    desk: &Desk<'_>,
    train: &TrainId,
    before: Instant,
) -> Result<Option<LastChemical>, StoreError> {
    let list = desk.cleanings(train, None).await?;
    let earlier = list.iter().rev().filter(|c| c.span.from < before);
    Ok(earlier.fold(None, |last, c| LastChemical::left_by(&c.steps, last.as_ref(), c.span.to)))
}

/// Looks at what met in a train, once a cleaning of it was recorded, and raises or ends alarms.
pub(super) async fn look(
    desk: &Desk<'_>,
    changes: &mut Changes,
    recorded: &Cleaning,
) -> Result<(), StoreError> {
    let mut list = desk.cleanings(&recorded.train, None).await?;
    list.push(recorded.clone());
    list.sort_by_key(|c| (c.span.from, c.span.to));
    let conditions = standing(desk, &list).await?;
    let known: Vec<Alarm> = desk.live(Some(&recorded.train)).await?;
    let kinds = [AlarmKind::ChemicalConflict];
    let known: Vec<Alarm> = known.into_iter().filter(|a| kinds.contains(&a.kind)).collect();
    let scope = Scope { kinds: &kinds, train: Some(&recorded.train), source: None };
    let look = Look { scope, as_of: recorded.span.to, now: desk.now };
    for change in alarms::step(&known, &conditions, &look, &mut new_id) {
        let said = happened(change.turn.code(), look.as_of);
        desk.keep(changes, &change.alarm, said).await?;
    }
    Ok(())
}

/// Conflicts that stand: those of the newest cleanings, back to one without.
async fn standing(desk: &Desk<'_>, list: &[Cleaning]) -> Result<Vec<Condition>, StoreError> {
    let mut out = Vec::new();
    let mut rest = list;
    while !rest.is_empty() {
        let (earlier, together) = rest.split_at(begin(desk, rest).await?);
        let mut last = None;
        let mut found = Vec::new();
        for c in together {
            let worst = conflicts(&c.steps, last.as_ref()).into_iter().min_by_key(|x| x.kind);
            found.push(
                worst.map(|w| Condition::chemical_conflict(&c.train, &c.id, w.first, w.second)),
            );
            last = LastChemical::left_by(&c.steps, last.as_ref(), c.span.to);
        }
        for condition in found.into_iter().rev() {
            let Some(condition) = condition else { return Ok(out) };
            out.push(condition);
        }
        rest = earlier;
    }
    Ok(out)
}

/// Where the last cleanings begin between which the train did not filter.
async fn begin(desk: &Desk<'_>, list: &[Cleaning]) -> Result<usize, StoreError> {
    for (i, pair) in list.windows(2).enumerate().rev() {
        let [a, b] = pair else { continue };
        if filtered(desk, &a.train, Span::new(a.span.to, b.span.from)).await? {
            return Ok(i + 1);
        }
    }
    Ok(0)
}

/// Whether a train has filtered in a span. Where nothing is known of a long one it counts as
/// if it had: an alarm says what the records show, and plans reckon with the chemical anyway.
async fn filtered(desk: &Desk<'_>, train: &TrainId, gap: Span) -> Result<bool, StoreError> {
    let hours = desk.store.hours(&desk.plant.id, train, gap, u32::MAX).await?;
    if hours.is_empty() {
        return Ok(gap.length_us() > UNKNOWN_GAP_US);
    }
    Ok(hours.iter().any(|h| h.start >= gap.from && h.end <= gap.to && h.filtration_s > 0.0))
}
