//! The second transaction of a delivery: derived rows, history, and the work that is done
//! with. All of it or nothing; written as the days pass, so that memory holds no more than one.

use sqlx::{Sqlite, Transaction};

use super::{assessments, cycles, days, findings, hours, now, phases, runs};
use crate::analysis::{Assessment, Cycle, DayRows, Finding, Run};
use crate::base::{Instant, Span, TrainId};
use crate::store::history::{self, Entry, ItemKind};
use crate::store::{Act, Cleaning, DirtyDay, Store, StoreError, acts, cleanings, dirty, receipts};

pub(in crate::store) const DERIVATION: &str =
    "SELECT version, revision FROM derivation WHERE plant = ?1";
pub(in crate::store) const SET_DERIVATION: &str = "
    INSERT INTO derivation (plant, version, revision) VALUES (?1, ?2, ?3)
    ON CONFLICT (plant) DO UPDATE SET version = excluded.version, revision = excluded.revision";
pub(in crate::store) const SET_STEPPED: &str = "
    INSERT INTO stepped (plant, to_us) VALUES (?1, ?2)
    ON CONFLICT (plant) DO UPDATE SET to_us = max(to_us, excluded.to_us)";
pub(in crate::store) const STEPPED: &str = "SELECT to_us FROM stepped WHERE plant = ?1";
pub(in crate::store) const CLEAR_ALL: [&str; 8] = [
    "DELETE FROM cycle WHERE plant = ?1",
    "DELETE FROM hour WHERE plant = ?1",
    "DELETE FROM phase WHERE plant = ?1",
    "DELETE FROM train_now WHERE plant = ?1",
    "DELETE FROM day WHERE plant = ?1",
    "DELETE FROM run WHERE plant = ?1",
    "DELETE FROM assessment WHERE plant = ?1",
    "DELETE FROM finding WHERE plant = ?1",
];

/// Changes being written. It holds the one writing connection; dropping it undoes everything.
#[derive(Debug)]
pub struct Changes {
    tx: Transaction<'static, Sqlite>,
    plant: String,
}

impl Store {
    /// Begins to write what was worked out, once the write before it is done.
    pub async fn begin_changes(&self, plant: &str) -> Result<Changes, StoreError> {
        Ok(Changes { tx: self.write().await?, plant: plant.to_owned() })
    }

    /// Version of the derivation and revision of the plant file that the derived rows are of.
    pub async fn derivation(&self, plant: &str) -> Result<Option<(i64, String)>, StoreError> {
        Ok(sqlx::query_as(DERIVATION).bind(plant).fetch_optional(&self.readers).await?)
    }

    /// Up to which closed hour decisions have been taken.
    pub async fn stepped_to(&self, plant: &str) -> Result<Option<Instant>, StoreError> {
        let us: Option<i64> =
            sqlx::query_scalar(STEPPED).bind(plant).fetch_optional(&self.readers).await?;
        Ok(us.map(Instant::from_micros))
    }
}

impl Changes {
    /// Takes all derived rows of the plant away, to work everything again.
    pub async fn clear_derived(&mut self) -> Result<(), StoreError> {
        for statement in CLEAR_ALL {
            sqlx::query(statement).bind(self.plant.as_str()).execute(&mut *self.tx).await?;
        }
        Ok(())
    }

    /// Puts the rows of stages 1 and 2 of a train's day in place of those it had. Answers the
    /// first moment at which they differ.
    pub async fn put_day(
        &mut self,
        train: &TrainId,
        day: Span,
        rows: &DayRows,
    ) -> Result<Option<Instant>, StoreError> {
        let before = hours::of_day(&mut self.tx, &self.plant, train, day).await?;
        let had = if before.is_empty() {
            Vec::new()
        } else {
            cycles::of_day(&mut self.tx, &self.plant, train, day).await?
        };
        let hour = first_difference(&before, &rows.hours, |a, b| a == b, |h| h.start);
        let cycle = first_difference(&had, &rows.cycles, same_cycle, |c| c.start);
        // What stands before the first difference stays: an hourly post changes a day's end.
        if let Some((same, from)) = hour {
            self.clear(hours::CLEAR, train, Span::new(from, day.to), None).await?;
            hours::put(&mut self.tx, &self.plant, rows.hours.get(same..).unwrap_or(&[])).await?;
        }
        if let Some((same, from)) = cycle {
            self.clear(cycles::CLEAR, train, day, Some(from)).await?;
            cycles::put(&mut self.tx, &self.plant, rows.cycles.get(same..).unwrap_or(&[])).await?;
        }
        self.clear(phases::CLEAR, train, day, None).await?;
        phases::put(&mut self.tx, &self.plant, &rows.phases).await?;
        match &rows.day {
            Some(row) => days::put(&mut self.tx, &self.plant, row).await?,
            None => self.clear(days::CLEAR, train, day, None).await?,
        }
        match &rows.now {
            Some(n) => {
                now::put(&mut self.tx, &self.plant, day.from, n, &rows.unknown_codes).await?;
            }
            None => self.clear(now::CLEAR, train, day, None).await?,
        }
        // A cycle changes answers from when its end was known: it may have begun hours before.
        let decided = |(same, _): (usize, Instant)| {
            let both = had.get(same).into_iter().chain(rows.cycles.get(same));
            both.map(|c| c.decided).min()
        };
        Ok(hour.map(|(_, from)| from).into_iter().chain(cycle.and_then(decided)).min())
    }

    async fn clear(
        &mut self,
        statement: &'static str,
        train: &TrainId,
        span: Span,
        from: Option<Instant>,
    ) -> Result<(), StoreError> {
        let mut query = sqlx::query(statement)
            .bind(self.plant.as_str())
            .bind(train.as_str())
            .bind(span.from.micros())
            .bind(span.to.micros());
        if let Some(from) = from {
            query = query.bind(from.micros());
        }
        query.execute(&mut *self.tx).await?;
        Ok(())
    }

    /// Puts an assessment and the findings of its day in place of those there were.
    pub async fn put_assessment(
        &mut self,
        assessment: &Assessment,
        found: &[Finding],
    ) -> Result<(), StoreError> {
        assessments::put(&mut self.tx, &self.plant, assessment).await?;
        let (train, day) = (&assessment.train, assessment.day);
        findings::replace(&mut self.tx, &self.plant, train, day, found).await
    }

    /// Puts a train's runs in place of those that begin at or after a moment.
    pub async fn put_runs(
        &mut self,
        train: &TrainId,
        from: Instant,
        all: &[Run],
    ) -> Result<(), StoreError> {
        runs::replace(&mut self.tx, &self.plant, train, from, all).await
    }

    /// Adds an entry to the history and makes it the newest of its thing.
    pub async fn add_entry(&mut self, entry: &Entry) -> Result<(), StoreError> {
        history::add(&mut self.tx, &self.plant, entry).await
    }

    /// One thing as it is now. Nobody else can change it before these changes are done.
    pub async fn item<T: serde::de::DeserializeOwned>(
        &mut self,
        kind: ItemKind,
        item: &str,
    ) -> Result<Option<T>, StoreError> {
        history::item(&mut self.tx, &self.plant, kind, item).await
    }

    /// Adds what a person did to the journal of acts.
    pub async fn add_act(&mut self, act: &Act) -> Result<(), StoreError> {
        acts::insert(&mut self.tx, &self.plant, act).await
    }

    /// Records a clean, and marks the plant days that have to be worked again for it.
    ///
    /// # Errors
    /// [`StoreError::Exists`] if its reference is taken.
    pub async fn add_cleaning(
        &mut self,
        cleaning: &Cleaning,
        dirty: &[(TrainId, Instant)],
    ) -> Result<(), StoreError> {
        cleanings::insert(&mut self.tx, &self.plant, cleaning, dirty).await
    }

    /// The next number of a work order.
    pub async fn next_order_number(&mut self) -> Result<i64, StoreError> {
        history::next_order_number(&mut self.tx, &self.plant).await
    }

    /// Notes up to which closed hour decisions have been taken; never goes back.
    pub async fn set_stepped(&mut self, to: Instant) -> Result<(), StoreError> {
        sqlx::query(SET_STEPPED)
            .bind(self.plant.as_str())
            .bind(to.micros())
            .execute(&mut *self.tx)
            .await?;
        Ok(())
    }

    /// Notes of which plant file and version the rows now are.
    pub async fn set_derivation(&mut self, version: i64, revision: &str) -> Result<(), StoreError> {
        sqlx::query(SET_DERIVATION)
            .bind(self.plant.as_str())
            .bind(version)
            .bind(revision)
            .execute(&mut *self.tx)
            .await?;
        Ok(())
    }

    /// Clears days that were worked with those marks.
    pub async fn clear_dirty(&mut self, days: &[DirtyDay]) -> Result<(), StoreError> {
        dirty::clear(&mut self.tx, &self.plant, days).await
    }

    /// Notes on a receipt that its analysis is done, and from when answers changed.
    pub async fn set_analysed(
        &mut self,
        receipt: &str,
        changed_from: &std::collections::BTreeMap<TrainId, Instant>,
    ) -> Result<(), StoreError> {
        receipts::set_analysed(&mut self.tx, &self.plant, receipt, changed_from, true).await
    }

    /// Makes all of it durable.
    pub async fn commit(self) -> Result<(), StoreError> {
        Ok(self.tx.commit().await?)
    }
}

/// How many rows two lists in order of time begin with alike, and the moment from which they
/// differ; `None` where they do not.
fn first_difference<T>(
    old: &[T],
    new: &[T],
    alike: impl Fn(&T, &T) -> bool,
    time: impl Fn(&T) -> Instant,
) -> Option<(usize, Instant)> {
    let same = old.iter().zip(new).take_while(|(a, b)| alike(a, b)).count();
    let from = old.get(same).map(&time).into_iter().chain(new.get(same).map(&time)).min()?;
    Some((same, from))
}

/// Whether two cycles are the same row. What cannot be told is NaN, which is not itself, and
/// NULL as stored, which is.
fn same_cycle(a: &Cycle, b: &Cycle) -> bool {
    let told = |c: &Cycle| {
        let mut c = c.clone();
        for value in [&mut c.flux_m_s, &mut c.temperature_degc] {
            if value.is_nan() {
                *value = f64::MAX;
            }
        }
        c
    };
    a == b || told(a) == told(b)
}
