//! What a delivery does to a stored day: nothing here knows of a database.

use crate::base::{CellValue, Column, Counts, Instant, Span};

/// A value that took the place of another. Words are places in [`Merged::column`]'s list.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Revision {
    /// Time of the reading.
    pub time: Instant,
    /// What was stored; a bad value where a good one came late.
    pub old: CellValue,
    /// What counts from now.
    pub new: CellValue,
}

/// A stored column after a delivery.
#[derive(Clone, Debug, Default, PartialEq)]
pub struct Merged {
    /// Strictly ascending in time.
    pub column: Column,
    /// Accepted, repeated and revised values. Bad ones are counted by who read the file.
    pub counts: Counts,
    /// Values that were replaced, in time order, and in order of delivery at one time.
    pub revisions: Vec<Revision>,
    /// From the first to just after the last reading that is new or another; `None` where the
    /// stored column stays as it was.
    pub changed: Option<Span>,
}

/// Applies a delivery, in its order, to what is stored: a later row revises an earlier one of
/// the same time. A bad value never replaces anything; over nothing it is stored as bad.
/// `stored` must be strictly ascending in time.
pub fn merge(stored: Option<&Column>, delivered: &Column) -> Merged {
    let mut merged = Merged::default();
    let empty = Column::default();
    let stored = stored.unwrap_or(&empty);
    merged.column.words.clone_from(&stored.words);
    let places: Vec<u32> = delivered.words.iter().map(|word| merged.column.intern(word)).collect();
    merged.column.times.reserve(stored.len() + delivered.len());
    merged.column.values.reserve(stored.len() + delivered.len());

    let ascending = delivered.times.windows(2).all(|w| matches!(w, [a, b] if a < b));
    let after = match (stored.times.last(), delivered.times.first()) {
        (Some(last), Some(first)) => last < first,
        _ => true,
    };
    if ascending && after {
        merged.append(stored, delivered, &places);
        return merged;
    }
    let rows = delivered.times.iter().zip(&delivered.values);
    let rows = rows.map(|(time, value)| (*time, placed(*value, &places)));
    let mut rest = Stored { column: stored, at: 0 };
    if ascending {
        rows.for_each(|(time, value)| merged.deliver(&mut rest, time, value));
    } else {
        // Stable, so that rows of one time stay in their order. Rows of different times do not
        // touch each other, so that the order between them does not matter.
        let mut rows: Vec<_> = rows.collect();
        rows.sort_by_key(|(time, _)| *time);
        rows.into_iter().for_each(|(time, value)| merged.deliver(&mut rest, time, value));
    }
    rest.copy_all(&mut merged.column);
    merged
}

/// What is left of the stored column.
struct Stored<'a> {
    column: &'a Column,
    at: usize,
}

impl Stored<'_> {
    fn copy_until(&mut self, time: Instant, out: &mut Column) {
        let times = self.column.times.get(self.at..).unwrap_or(&[]);
        let n = match times.last() {
            Some(last) if *last <= time => times.len(),
            _ => times.iter().take_while(|t| **t <= time).count(),
        };
        self.copy(n, out);
    }
    fn copy_all(&mut self, out: &mut Column) {
        self.copy(self.column.len() - self.at, out);
    }
    fn copy(&mut self, n: usize, out: &mut Column) {
        if n > 0 {
            let range = self.at..self.at + n;
            out.times.extend_from_slice(self.column.times.get(range.clone()).unwrap_or(&[]));
            out.values.extend_from_slice(self.column.values.get(range).unwrap_or(&[]));
            self.at += n;
        }
    }
}

impl Merged {
    /// What nearly every delivery is: new readings after the stored ones.
    fn append(&mut self, stored: &Column, delivered: &Column, places: &[u32]) {
        self.column.times.extend_from_slice(&stored.times);
        self.column.values.extend_from_slice(&stored.values);
        self.column.times.extend_from_slice(&delivered.times);
        self.column.values.extend(delivered.values.iter().map(|v| placed(*v, places)));
        self.counts.accepted = delivered.values.iter().filter(|v| v.is_good()).count() as u64;
        if let (Some(first), Some(last)) = (delivered.times.first(), delivered.times.last()) {
            self.changed = Some(Span::new(*first, last.plus(1)));
        }
    }
    fn deliver(&mut self, rest: &mut Stored<'_>, time: Instant, new: CellValue) {
        rest.copy_until(time, &mut self.column);
        let standing = match (self.column.times.last(), self.column.values.last_mut()) {
            (Some(last), Some(value)) if *last == time => value,
            _ => {
                self.column.push(time, new);
                self.counts.accepted += u64::from(new.is_good());
                self.touch(time);
                return;
            }
        };
        let old = *standing;
        if !new.is_good() {
            return;
        }
        if old.is_good() && same(old, new) {
            self.counts.repeated += 1;
            return;
        }
        *standing = new;
        if old.is_good() {
            self.counts.revised += 1;
        } else {
            self.counts.accepted += 1;
        }
        self.revisions.push(Revision { time, old, new });
        self.touch(time);
    }
    fn touch(&mut self, time: Instant) {
        let from = self.changed.map_or(time, |s| s.from);
        self.changed = Some(Span::new(from, time.plus(1)));
    }
}

fn placed(value: CellValue, places: &[u32]) -> CellValue {
    let place = |w: u32| places.get(w as usize).copied().unwrap_or(w);
    match value {
        CellValue::Number(_) => value,
        CellValue::Word(w) => CellValue::Word(place(w)),
        CellValue::Bad(w) => CellValue::Bad(place(w)),
    }
}

/// Whether two good values are one. A zero's sign is a matter of how an export rounds.
fn same(old: CellValue, new: CellValue) -> bool {
    match (old, new) {
        (CellValue::Number(a), CellValue::Number(b)) => a == b || a.to_bits() == b.to_bits(),
        _ => old == new,
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use CellValue::{Bad, Number, Word};
    use proptest::prelude::*;

    fn column(rows: &[(i64, CellValue)], words: &[&str]) -> Column {
        let mut c =
            Column { words: words.iter().map(|w| (*w).to_owned()).collect(), ..Column::default() };
        rows.iter().for_each(|(t, v)| c.push(Instant::from_micros(*t), *v));
        c
    }

    fn counts(accepted: u64, repeated: u64, revised: u64) -> Counts {
        Counts { accepted, repeated, revised, ..Counts::default() }
    }

    #[test]
    fn new_repeated_and_revised_values_are_told_apart() {
        let stored = column(&[(10, Number(1.0)), (20, Number(0.0)), (30, Number(3.0))], &[]);
        let delivered = column(
            &[(10, Number(1.0)), (15, Number(9.0)), (20, Number(-0.0)), (30, Number(4.0))],
            &[],
        );
        let merged = merge(Some(&stored), &delivered);
        assert_eq!(merged.counts, counts(1, 2, 1));
        assert_eq!(merged.column.times.len(), 4);
        assert_eq!(merged.column.values[2].to_owned(), Number(0.0));
        let at = Instant::from_micros;
        assert_eq!(
            merged.revisions,
            [Revision { time: at(30), old: Number(3.0), new: Number(4.0) }]
        );
        assert_eq!(merged.changed, Some(Span::new(at(15), at(31))));
        let again = merge(Some(&merged.column), &delivered);
        assert_eq!((again.changed, again.counts), (None, counts(0, 4, 0)));
        assert_eq!(again.column, merged.column);
    }

    #[test]
    fn a_bad_value_replaces_nothing_and_a_good_one_replaces_it() {
        let stored = column(&[(10, Number(1.0)), (20, Bad(0))], &["Bad"]);
        let delivered =
            column(&[(10, Bad(0)), (20, Bad(0)), (30, Bad(0)), (20, Number(2.0))], &["No reply"]);
        let merged = merge(Some(&stored), &delivered);
        assert_eq!(merged.counts, counts(1, 0, 0));
        assert_eq!(merged.column.values, [Number(1.0), Number(2.0), Bad(1)]);
        assert_eq!(merged.column.word(1), "No reply");
        assert_eq!((merged.revisions.len(), merged.revisions[0].old), (1, Bad(0)));
    }

    #[test]
    fn a_later_row_revises_an_earlier_one_of_the_same_delivery() {
        let delivered = column(
            &[(20, Number(5.0)), (10, Number(1.0)), (10, Number(2.0)), (10, Number(2.0))],
            &[],
        );
        let merged = merge(None, &delivered);
        assert_eq!(merged.counts, counts(2, 1, 1));
        assert_eq!(merged.column.values, [Number(2.0), Number(5.0)]);
    }

    #[test]
    fn words_are_compared_as_text() {
        let stored = column(&[(10, Word(0)), (20, Word(1))], &["RUN", "STOP"]);
        let delivered =
            column(&[(10, Word(1)), (20, Word(0)), (30, Number(1.0))], &["IDLE", "RUN"]);
        let merged = merge(Some(&stored), &delivered);
        assert_eq!(merged.counts, counts(1, 1, 1));
        assert_eq!(merged.column.word(2), "IDLE");
        assert_eq!(merged.column.values, [Word(0), Word(2), Number(1.0)]);
    }

    proptest! {
        /// Against the plainest statement of the rule: one reading after the other into a map.
        #[test]
        fn any_delivery_ends_as_if_taken_one_by_one(
            stored in prop::collection::btree_map(0i64..40, 0u8..5, 0..30),
            delivered in prop::collection::vec((0i64..40, 0u8..5), 0..60),
        ) {
            let value = |v: u8| if v == 0 { Bad(0) } else { Number(f64::from(v)) };
            let before: Vec<_> = stored.iter().map(|(t, v)| (*t, value(*v))).collect();
            let rows: Vec<_> = delivered.iter().map(|(t, v)| (*t, value(*v))).collect();
            let mut map: std::collections::BTreeMap<_, _> = before.iter().copied().collect();
            let mut want = Counts::default();
            for (t, v) in &rows {
                match map.get(t).copied() {
                    None => { map.insert(*t, *v); want.accepted += u64::from(v.is_good()); }
                    Some(_) if !v.is_good() => {}
                    Some(old) if old == *v => want.repeated += 1,
                    Some(old) => {
                        map.insert(*t, *v);
                        if old.is_good() { want.revised += 1 } else { want.accepted += 1 }
                    }
                }
            }
            let before = column(&before, &["Bad"]);
            let merged = merge(Some(&before), &column(&rows, &["Bad"]));
            let got: Vec<_> = merged.column.times.iter().map(|t| t.micros())
                .zip(merged.column.values.iter().copied()).collect();
            prop_assert_eq!(got, map.into_iter().collect::<Vec<_>>());
            prop_assert_eq!(merged.counts, want);
            prop_assert!(merged.changed.is_some() || merged.column == before);
        }
    }
}
