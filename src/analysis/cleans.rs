//! Cleans in place: as recorded by people, and as seen in the state of the train.

use serde::{Deserialize, Serialize};

use crate::base::{HOUR_US, Instant, MINUTE_US, Span, TrainId};
use crate::plant::Phase;

use super::phases::PhaseSpan;

/// Pieces of a clean this close together are one clean: between its steps a train is rinsed,
/// drained and filled.
const JOIN_US: i64 = 4 * HOUR_US;
/// Anything shorter is a slip of the state, not a clean.
const SHORTEST_US: i64 = 30 * MINUTE_US;
/// A person's times may be this far from what the state shows.
const SLACK_US: i64 = 2 * HOUR_US;

/// What a train did other than filter and backwash, cut at the day's bounds. Keyed by train and start.
#[derive(Clone, Debug, PartialEq)]
pub struct PhaseRow {
    /// Whose.
    pub train: TrainId,
    /// From.
    pub start: Instant,
    /// Up to.
    pub end: Instant,
    /// What it did.
    pub phase: Phase,
}

/// A recorded clean, as far as the analysis needs it.
#[derive(Clone, Debug, PartialEq)]
pub struct RecordedClean {
    /// Its id.
    pub id: String,
    /// Whose.
    pub train: TrainId,
    /// From.
    pub start: Instant,
    /// Up to.
    pub end: Instant,
    /// `CleanInPlace`, `MaintenanceClean` or `ChemicalBackwash`.
    pub kind: Phase,
}

/// Where a clean is known from.
#[derive(Clone, Debug, PartialEq, Eq, Serialize, Deserialize)]
pub enum Origin {
    /// A person recorded it, under this id.
    Recorded(String),
    /// The train's state showed it.
    Inferred,
}

/// A clean in place.
#[derive(Clone, Debug, PartialEq)]
pub struct Clean {
    /// From.
    pub start: Instant,
    /// Up to: the return to service.
    pub end: Instant,
    /// Where it is known from.
    pub origin: Origin,
}

/// The rows of a day: every phase but filtration and backwash.
pub fn phase_rows(train: &TrainId, spans: &[PhaseSpan], day: Span) -> Vec<PhaseRow> {
    spans
        .iter()
        .filter(|s| !matches!(s.phase, Phase::Filtration | Phase::Backwash))
        .filter(|s| Span::new(s.from, s.to).overlaps(day))
        .map(|s| PhaseRow {
            train: train.clone(),
            start: s.from.max(day.from),
            end: s.to.min(day.to),
            phase: s.phase,
        })
        .collect()
}

/// Joins the pieces that the state shows and what people recorded to one list, in order of
/// time, as it could be told at `until`. A recorded clean stands for the pieces it overlaps.
pub fn cleans(phases: &[PhaseRow], recorded: &[RecordedClean], until: Instant) -> Vec<Clean> {
    let mut seen: Vec<Span> = Vec::new();
    for row in phases.iter().filter(|p| p.phase == Phase::CleanInPlace && p.start < until) {
        let end = row.end.min(until);
        match seen.last_mut() {
            Some(last) if row.start.since(last.to) <= JOIN_US => last.to = last.to.max(end),
            _ => seen.push(Span::new(row.start, end)),
        }
    }
    seen.retain(|s| s.length_us() >= SHORTEST_US);
    let mut out: Vec<Clean> = recorded
        .iter()
        .filter(|r| r.kind == Phase::CleanInPlace && r.start < until)
        .map(|r| Clean { start: r.start, end: r.end, origin: Origin::Recorded(r.id.clone()) })
        .collect();
    for piece in seen {
        let wide = Span::new(piece.from.plus(-SLACK_US), piece.to.plus(SLACK_US));
        match out.iter_mut().find(|c| wide.overlaps(Span::new(c.start, c.end))) {
            // The state knows better than a diary when filtration came back.
            Some(clean) => clean.end = clean.end.max(piece.to),
            None => out.push(Clean { start: piece.from, end: piece.to, origin: Origin::Inferred }),
        }
    }
    out.sort_by_key(|c| (c.start, c.end));
    out
}

#[cfg(test)]
mod tests {
    use super::*;

    fn at(hour: i64) -> Instant {
        Instant::from_micros(hour * HOUR_US)
    }

    fn piece(from: i64, to: i64) -> PhaseRow {
        PhaseRow {
            train: TrainId::new("uf-1"),
            start: at(from),
            end: at(to),
            phase: Phase::CleanInPlace,
        }
    }

    #[test]
    fn pieces_on_both_sides_of_midnight_are_one_clean() {
        let list = cleans(&[piece(20, 24), piece(24, 28), piece(60, 68)], &[], at(100));
        assert_eq!(list.len(), 2);
        assert_eq!((list[0].start, list[0].end), (at(20), at(28)));
        let at_midnight = cleans(&[piece(20, 24), piece(24, 28)], &[], at(22));
        assert_eq!((at_midnight[0].start, at_midnight[0].end), (at(20), at(22)));
    }

    #[test]
    fn a_recorded_clean_stands_for_what_the_state_shows() {
        let recorded = RecordedClean {
            id: "c1".to_owned(),
            train: TrainId::new("uf-1"),
            start: at(19),
            end: at(27),
            kind: Phase::CleanInPlace,
        };
        let list = cleans(&[piece(20, 28)], &[recorded], at(100));
        assert_eq!(list.len(), 1);
        assert_eq!(list[0].origin, Origin::Recorded("c1".to_owned()));
        assert_eq!(list[0].end, at(28));
    }
}
