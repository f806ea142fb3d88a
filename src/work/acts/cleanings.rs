//! Cleanings: recorded as they happened. What chemistry makes of a record is an alarm, never a
//! refusal.

use super::chemicals;
use super::{ActError, Desk, Done, Word, happened, words};
use crate::base::{Instant, Span, TrainId};
use crate::orders::{self, Actuals, Named, OrderLook, OrderTurn, WorkOrder, number_of, spoken};
use crate::plant::{Phase, Step, Train};
use crate::store::{Changes, Cleaning, CleaningFilter, ItemKind, StoreError, new_id};

/// A cleaning as a person tells it.
#[derive(Clone, Debug, PartialEq)]
pub struct NewCleaning {
    /// The train.
    pub train: TrainId,
    /// From start to end.
    pub span: Span,
    /// `CleanInPlace`, `MaintenanceClean` or `ChemicalBackwash`.
    pub kind: Phase,
    /// What was done, in order.
    pub steps: Vec<Step>,
    /// The work order it was done under, as `WO 41` or `41`.
    pub work_order: Option<String>,
    /// The client's own name for it, unique in the plant.
    pub reference: Option<String>,
    /// By whom.
    pub by: Option<String>,
}

/// Why a cleaning cannot be recorded. The text tells what to do.
#[derive(Clone, Debug, PartialEq, thiserror::Error)]
pub enum CleaningRefused {
    /// The plant file holds no such train.
    #[error("the plant file holds no train `{0}`")]
    NoSuchTrain(TrainId),
    /// The end is not after the start.
    #[error("`end` must be after `start`")]
    EndNotAfterStart,
    /// It has not happened yet.
    #[error("`end` must not lie in the future: record a cleaning when it is done")]
    NotYet,
    /// No steps.
    #[error("`steps` must hold what was done; one step of class `other` where it is not known")]
    NoSteps,
    /// The order that it names is not there.
    #[error("there is no work order `{0}`")]
    NoSuchOrder(String),
    /// The order that it names is another train's.
    #[error("{0} is for train `{1}`; name the order of this train, or none")]
    OrderOfAnother(String, TrainId),
    /// The reference was used for another cleaning.
    #[error(
        "the reference `{reference}` is that of the cleaning {id}, which is another; give this one a reference of its own"
    )]
    ReferenceTaken {
        /// The reference.
        reference: String,
        /// The cleaning that has it.
        id: String,
    },
    /// Another cleaning of the train was recorded for the same time.
    #[error(
        "the cleaning {id} of this train is recorded for part of that time; a train has one clean at a time, so see which of the two is right"
    )]
    Overlaps {
        /// The other.
        id: String,
        /// When it was.
        span: Span,
    },
}

impl CleaningRefused {
    /// The field that it is about, as a JSON pointer into the request.
    pub const fn pointer(&self) -> &'static str {
        match self {
            Self::NoSuchTrain(_) => "/train",
            Self::EndNotAfterStart | Self::NotYet => "/end",
            Self::NoSteps => "/steps",
            Self::NoSuchOrder(_) | Self::OrderOfAnother(..) => "/work_order",
            Self::ReferenceTaken { .. } => "/reference",
            Self::Overlaps { .. } => "/start",
        }
    }
    /// Whether it is what stands that is against it, not the words of the request.
    pub const fn is_conflict(&self) -> bool {
        matches!(self, Self::ReferenceTaken { .. } | Self::Overlaps { .. })
    }
}

impl Desk<'_> {
    /// Records a cleaning; one that names a work order completes it. The caller has to let the
    /// days be worked again. Said again it is the first one.
    ///
    /// # Errors
    /// If the train or the order is not there, the times are none, the reference is another
    /// cleaning's, or another clean of the train was recorded for that time.
    pub async fn record(&self, new: NewCleaning) -> Result<Done<Cleaning>, ActError> {
        let mut new = new;
        self.plant
            .train(&new.train)
            .ok_or_else(|| CleaningRefused::NoSuchTrain(new.train.clone()))?;
        if new.span.to <= new.span.from {
            return Err(CleaningRefused::EndNotAfterStart.into());
        }
        if new.span.to > self.now {
            return Err(CleaningRefused::NotYet.into());
        }
        if new.steps.is_empty() {
            return Err(CleaningRefused::NoSteps.into());
        }
        let mut changes = self.begin().await?;
        let order = match new.work_order.take() {
            Some(named) => Some(self.named_order(&mut changes, &named, &new.train).await?),
            None => None,
        };
        new.work_order = order.as_ref().map(|o| spoken(o.number));
        let done = self.put_cleaning(&mut changes, &new).await?;
        if !done.changed {
            return Ok(done);
        }
        if let Some(order) = order {
            self.complete_by(&mut changes, order, &done.item).await?;
        }
        changes.commit().await?;
        Ok(done)
    }

    async fn named_order(
        &self,
        changes: &mut Changes,
        named: &str,
        train: &TrainId,
    ) -> Result<WorkOrder, ActError> {
        let missing = || CleaningRefused::NoSuchOrder(named.to_owned());
        let number = number_of(named).ok_or_else(missing)?;
        let order: WorkOrder =
            changes.item(ItemKind::WorkOrder, &number.to_string()).await?.ok_or_else(missing)?;
        if order.train != *train {
            return Err(CleaningRefused::OrderOfAnother(spoken(number), order.train).into());
        }
        Ok(order)
    }

    /// Writes a cleaning with what follows from it, unless it is there already.
    pub(super) async fn put_cleaning(
        &self,
        changes: &mut Changes,
        new: &NewCleaning,
    ) -> Result<Done<Cleaning>, ActError> {
        let plant = self.plant.id.as_str();
        if let Some(reference) = &new.reference
            && let Some(known) = self.store.cleaning_by_reference(plant, reference).await?
        {
            if is_same(&known, new) {
                return Ok(Done::known(known));
            }
            let (reference, id) = (reference.clone(), known.id);
            return Err(CleaningRefused::ReferenceTaken { reference, id }.into());
        }
        let others = self.cleanings(&new.train, Some(new.span)).await?;
        if let Some(known) = others.iter().find(|c| is_same(c, new)) {
            return Ok(Done::known(known.clone()));
        }
        if let Some(Cleaning { id, span, .. }) = others.into_iter().next() {
            return Err(CleaningRefused::Overlaps { id, span }.into());
        }
        let cleaning = Cleaning {
            id: new_id(),
            train: new.train.clone(),
            span: new.span,
            kind: new.kind,
            steps: new.steps.clone(),
            work_order: new.work_order.clone(),
            reference: new.reference.clone(),
            recorded: self.now,
            by: words(new.by.as_deref()).map(str::to_owned),
        };
        changes.add_cleaning(&cleaning, &self.days_of(&cleaning)).await?;
        if let Some(by) = cleaning.by.as_deref() {
            let word = Word { what: "record", by, reason: None };
            let after = (None, Some("recorded"));
            self.note(changes, ("cleaning", &cleaning.id), &word, after).await?;
        }
        chemicals::look(self, changes, &cleaning).await?;
        Ok(Done::new(cleaning))
    }

    /// Plant days of a cleaning, from that of its start to that of its end.
    fn days_of(&self, cleaning: &Cleaning) -> Vec<(TrainId, Instant)> {
        let mut days = Vec::new();
        let mut day = self.plant.zone.day(cleaning.span.from);
        while day.from < cleaning.span.to {
            days.push((cleaning.train.clone(), day.from));
            day = self.plant.zone.day(day.to);
        }
        days
    }

    /// Recorded cleanings of a train that share a moment with a span, latest first.
    pub(super) async fn cleanings(
        &self,
        train: &TrainId,
        span: Option<Span>,
    ) -> Result<Vec<Cleaning>, StoreError> {
        let filter = CleaningFilter {
            train: Some(train.clone()),
            span,
            limit: u32::MAX,
            ..CleaningFilter::default()
        };
        self.store.cleanings(&self.plant.id, &filter).await
    }

    /// The order that a recorded cleaning names is done by it.
    async fn complete_by(
        &self,
        changes: &mut Changes,
        order: WorkOrder,
        cleaning: &Cleaning,
    ) -> Result<(), ActError> {
        let train: &Train = self.train_of(&order.train)?;
        let named = [Named {
            cleaning: cleaning.id.clone(),
            number: order.number,
            actuals: Actuals {
                start: cleaning.span.from,
                end: cleaning.span.to,
                steps: cleaning.steps.clone(),
                waste_m3: None,
                staff_hours: None,
                notes: None,
            },
        }];
        let number = order.number;
        let orders = [order];
        let look = OrderLook {
            train,
            orders: &orders,
            recommendation: None,
            cleans: &[],
            runs: &[],
            named: &named,
            last_chemical: None,
            as_of: cleaning.span.to,
        };
        // Without a recommendation nothing is drafted, so no number is asked for.
        for change in orders::step(&look, &mut || number) {
            let word = match change.turn {
                OrderTurn::Completed => "completed",
                _ => "annotated",
            };
            self.keep(changes, &change.order, happened(word, cleaning.span.to)).await?;
        }
        Ok(())
    }
}

fn is_same(known: &Cleaning, new: &NewCleaning) -> bool {
    known.train == new.train
        && known.span == new.span
        && known.kind == new.kind
        && known.steps == new.steps
        && known.work_order == new.work_order
        && (new.reference.is_none() || known.reference == new.reference)
        && known.by.as_deref() == words(new.by.as_deref())
}
