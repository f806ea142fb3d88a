//! Taking a delivery in: the first transaction. Parsed as it streams by, merged into the
//! stored days, days to be worked again marked, the receipt written last. When this returns,
//! the delivery is durable; what follows from it is for `work`.

use std::collections::{BTreeMap, BTreeSet};
use std::io::Read;

use sha2::{Digest, Sha256};

use super::{Batch, Parser, PostedReadings, Refusal, Summary, message, outcome, take_posted};
use crate::analysis::{LOOKBACK_US, tags_needed};
use crate::base::{Column, Counts, Instant, Receipt, SourceId, Span, Tag, TrainId};
use crate::plant::{Plant, Source};
use crate::store::{Intake, Store, StoreError, new_id};

/// Values held before they go to the store: some two days of fifty tags by the minute.
const BATCH_CELLS: usize = 150_000;
/// Bytes read at once.
const CHUNK_BYTES: usize = 1 << 18;

/// A delivery as its door found it.
pub struct Delivery<'a> {
    /// Its source.
    pub source: &'a Source,
    /// File name as the sender gave it.
    pub file: &'a str,
    /// When it was received.
    pub received: Instant,
}

/// What became of a delivery.
#[derive(Clone, Debug, PartialEq)]
pub enum Accepted {
    /// Taken; durable.
    New {
        /// What was answered.
        receipt: Receipt,
        /// Days of the plant that have to be worked again.
        days: usize,
    },
    /// The same file was taken before under the same mapping; nothing was written.
    Known(Receipt),
}

/// Why a delivery was not taken. Nothing was written.
#[derive(Debug, thiserror::Error)]
pub enum AcceptError {
    /// It cannot be read at all.
    #[error("the file was refused")]
    Refused(Refusal),
    /// The bytes could not be read.
    #[error("the file could not be read")]
    Read(#[from] std::io::Error),
    /// The store refused.
    #[error("the store refused")]
    Store(#[from] StoreError),
}

/// The digest of bytes: `sha256:` and hex.
///
/// # Errors
/// If the bytes cannot be read.
pub fn digest(mut bytes: impl Read) -> std::io::Result<String> {
    let mut hash = Sha256::new();
    let mut chunk = vec![0; CHUNK_BYTES];
    loop {
        let n = bytes.read(&mut chunk)?;
        if n == 0 {
            break;
        }
        hash.update(&chunk[..n]);
    }
    let hex: String = hash.finalize().iter().map(|b| format!("{b:02x}")).collect();
    Ok(format!("sha256:{hex}"))
}

/// Takes an export file. `digest` is that of the same bytes.
///
/// # Errors
/// If the file cannot be read as an export of its source, or the store refuses.
pub async fn accept_file(
    store: &Store,
    plant: &Plant,
    delivery: &Delivery<'_>,
    digest: &str,
    mut bytes: impl Read,
) -> Result<Accepted, AcceptError> {
    let source = &delivery.source.id;
    if let Some(known) = store.receipt_by_digest(&plant.id, source, digest, &plant.mapping).await? {
        return Ok(Accepted::Known(known));
    }
    let earlier = store.newest_receipt_of(&plant.id, source, digest).await?;
    let newest = store.newest_reading(&plant.id, source).await?;
    let mut parser = Parser::new(plant, delivery.source, delivery.received, newest);
    let mut taking = Taking::begin(store, plant).await?;
    let mut batch = Batch::default();
    let mut chunk = vec![0; CHUNK_BYTES];
    loop {
        let n = bytes.read(&mut chunk)?;
        if n == 0 {
            break;
        }
        parser.feed(&chunk[..n], &mut batch).map_err(AcceptError::Refused)?;
        if batch.cells() >= BATCH_CELLS {
            taking.merge(source, batch.take()).await?;
        }
    }
    let summary = parser.finish(&mut batch).map_err(AcceptError::Refused)?;
    taking.merge(source, batch.take()).await?;
    let about = About {
        source: source.clone(),
        file: delivery.file,
        received: delivery.received,
        digest,
        time_zone: delivery.source.time.zone.name(),
        earlier: earlier.map(|r| r.id),
    };
    taking.finish(&about, summary).await
}

/// Takes readings posted one by one. `digest` is that of the request's body.
///
/// # Errors
/// If the store refuses.
pub async fn accept_readings(
    store: &Store,
    plant: &Plant,
    default: Option<&Source>,
    posted: &PostedReadings,
    digest: &str,
    received: Instant,
) -> Result<Accepted, AcceptError> {
    let first = plant.sources.first().map_or_else(|| SourceId::new(""), |s| s.id.clone());
    let source = default.map_or(first, |s| s.id.clone());
    if let Some(known) = store.receipt_by_digest(&plant.id, &source, digest, &plant.mapping).await?
    {
        return Ok(Accepted::Known(known));
    }
    let (batches, summary) = take_posted(plant, default.map(|s| &s.id), &posted.readings, received);
    let mut taking = Taking::begin(store, plant).await?;
    for (source, batch) in batches {
        taking.merge(&source, batch).await?;
    }
    let about =
        About { source, file: "", received, digest, time_zone: plant.zone.name(), earlier: None };
    taking.finish(&about, summary).await
}

/// What a receipt says of where it came from.
struct About<'a> {
    source: SourceId,
    file: &'a str,
    received: Instant,
    digest: &'a str,
    time_zone: &'a str,
    earlier: Option<String>,
}

/// A delivery on its way into the store.
struct Taking<'a> {
    plant: &'a Plant,
    intake: Intake,
    id: String,
    users: BTreeMap<(SourceId, Tag), Vec<TrainId>>,
    counts: Counts,
    dirty: BTreeSet<(TrainId, Instant)>,
}

impl<'a> Taking<'a> {
    async fn begin(store: &Store, plant: &'a Plant) -> Result<Self, StoreError> {
        let mut users: BTreeMap<(SourceId, Tag), Vec<TrainId>> = BTreeMap::new();
        for train in &plant.trains {
            for key in tags_needed(train) {
                users.entry(key).or_default().push(train.id.clone());
            }
        }
        Ok(Self {
            plant,
            intake: store.begin_intake(&plant.id).await?,
            id: new_id(),
            users,
            counts: Counts::default(),
            dirty: BTreeSet::new(),
        })
    }

    async fn merge(&mut self, source: &SourceId, batch: Batch) -> Result<(), StoreError> {
        let columns: Vec<(SourceId, Tag, Column)> = batch
            .tags
            .into_iter()
            .zip(batch.columns)
            .filter(|(_, column)| !column.is_empty())
            .map(|(tag, column)| (source.clone(), tag, column))
            .collect();
        let outcomes = self.intake.merge(&columns, &self.id).await?;
        for ((source, tag, _), outcome) in columns.into_iter().zip(outcomes) {
            self.counts.add(&outcome.counts);
            let trains = self.users.get(&(source, tag)).map_or(&[][..], Vec::as_slice);
            for span in outcome.changed {
                for start in days_touched(self.plant, span) {
                    self.dirty.extend(trains.iter().map(|t| (t.clone(), start)));
                }
            }
        }
        Ok(())
    }

    async fn finish(
        mut self,
        about: &About<'_>,
        summary: Summary,
    ) -> Result<Accepted, AcceptError> {
        let dirty: Vec<(TrainId, Instant)> = self.dirty.into_iter().collect();
        self.intake.mark_dirty(&dirty).await?;
        self.counts.bad = summary.bad;
        self.counts.missing = summary.missing;
        self.counts.rejected = summary.rejected;
        let receipt = Receipt {
            id: self.id,
            source: about.source.clone(),
            file: about.file.to_owned(),
            received: about.received,
            digest: about.digest.to_owned(),
            from: summary.from,
            to: summary.to,
            rows: summary.rows,
            cells: summary.cells,
            outcome: outcome(&self.counts),
            message: message(&self.counts, &summary, &self.plant.zone),
            readings: self.counts,
            unmapped_columns: summary.unmapped_columns,
            time_zone: about.time_zone.to_owned(),
            repeated_hour_rows: summary.repeated_hour_rows,
            skipped_hour_rows: summary.skipped_hour_rows,
            rejections: summary.rejections,
            rejections_total: summary.rejections_total,
            changed_from: BTreeMap::new(),
            analysed: false,
            earlier: about.earlier.clone(),
            notes: summary.notes,
        };
        self.intake.commit(&receipt, &self.plant.mapping).await?;
        let days: BTreeSet<Instant> = dirty.iter().map(|(_, day)| *day).collect();
        Ok(Accepted::New { receipt, days: days.len() })
    }
}

/// Starts of the plant days whose rows depend on readings of a span: its own, and the next one
/// where it lies within the look-back. Both ends of the span count.
fn days_touched(plant: &Plant, span: Span) -> Vec<Instant> {
    let mut out = Vec::new();
    let mut day = plant.zone.day(span.from);
    while day.from <= span.to.plus(LOOKBACK_US) {
        out.push(day.from);
        day = plant.zone.day(day.to);
    }
    out
}
