//! One train on the road: what it has shown so far, and its next day.

use crate::analysis::{
    self, Assessment, Clean, DAYS_KEPT, Day, DayRows, HOURS_KEPT_US, Memory, PhaseRow,
    RecordedClean, Rows, Run, Site, Standing,
};
use crate::base::{DAY_US, HOUR_US, Instant, SourceId, Span, Tag};
use crate::orders::{Actuals, LastChemical, Named, number_of};
use crate::plant::{Phase, Plant, Train};
use crate::store::{Changes, Cleaning, CleaningFilter, Store, StoreError};

/// Pieces of cleans are kept at hand this long: longer than a clean and its rinses.
pub const PIECES_BACK_US: i64 = 30 * DAY_US;
/// Assessments kept at hand: decisions may lag behind by a few hours over a midnight.
const ASSESSMENTS_KEPT: usize = 4;
/// As many recorded cleans are kept at hand: a year of daily ones, and more.
const TOLD_NEWEST: u32 = 500;
/// Where a fact is told of a time further back than this, all of them are.
const TOLD_BACK_US: i64 = 300 * DAY_US;
/// A clean that ended this long ago goes on no more.
const ENDED_US: i64 = HOUR_US / 4;

/// Standing looks at a day of hours before its own day; this is twice that.
const STANDING_BACK_US: i64 = 2 * DAY_US;

/// How much of the past to load.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Past {
    /// None: everything is worked again.
    Nothing,
    /// What a walk will look at: little, while the open day is all there is to walk.
    Walk,
    /// All that is kept at hand.
    Whole,
}

/// One train's state on the road.
pub struct TrainWork<'a> {
    /// The train.
    pub site: Site<'a>,
    /// Tags whose readings it needs.
    pub tags: Vec<(SourceId, Tag)>,
    /// What it has shown.
    pub memory: Memory,
    /// The first day of the walk that concerns it; `None` where nothing does.
    pub fold_from: Option<Instant>,
    assessments: Vec<Assessment>,
    pieces: Vec<PhaseRow>,
    recorded: Vec<RecordedClean>,
    told: Vec<Cleaning>,
    day: Option<Day>,
    newest: Option<Instant>,
    every_us: i64,
    runs_stored: Vec<Run>,
}

impl<'a> TrainWork<'a> {
    /// Loads what the walk needs to know of the time before its first day: the first one that
    /// changed, or the first that has not been assessed.
    pub async fn load(
        store: &Store,
        plant: &'a Plant,
        train: &'a Train,
        changed: Option<Instant>,
        newest: Option<Instant>,
        past: Past,
    ) -> Result<Self, StoreError> {
        let afresh = past == Past::Nothing;
        let old = changed.zip(newest).is_some_and(|(c, n)| n.since(c) > TOLD_BACK_US);
        let told = told(store, plant, train, afresh || old).await?;
        let mut out = Self {
            site: Site::new(plant, train),
            tags: analysis::tags_needed(train).into_iter().collect(),
            memory: Memory::default(),
            fold_from: changed,
            assessments: Vec::new(),
            pieces: Vec::new(),
            recorded: told.iter().map(recorded).collect(),
            told,
            day: None,
            newest,
            every_us: analysis::every_us(plant, train),
            runs_stored: Vec::new(),
        };
        if afresh {
            return Ok(out);
        }
        let far = Instant::from_micros(i64::MAX);
        let last = store.assessments_before(&plant.id, &train.id, far, 1).await?;
        let next = last.first().map(|a| a.as_of);
        out.fold_from = match (changed, next) {
            (Some(c), Some(n)) => Some(c.min(n)),
            (Some(c), None) => Some(c.min(first_day(store, plant, train).await?.unwrap_or(c))),
            (None, n) => n.or(first_day(store, plant, train).await?),
        };
        if let Some(from) = out.fold_from {
            let ends = out.is_over(plant.zone.day(from));
            out.remember(store, plant, from, ends || past == Past::Whole).await?;
        }
        Ok(out)
    }

    /// What stood at the beginning of the day that starts at `from`; `whole` with what it takes
    /// to assess a day.
    async fn remember(
        &mut self,
        store: &Store,
        plant: &Plant,
        from: Instant,
        whole: bool,
    ) -> Result<(), StoreError> {
        let (plant_id, train) = (plant.id.as_str(), &self.site.train.id);
        let kept = ASSESSMENTS_KEPT as u32;
        self.assessments = store.assessments_before(plant_id, train, from, kept).await?;
        let back = Span::new(from.plus(-PIECES_BACK_US), from);
        let kind = Some(Phase::CleanInPlace);
        self.pieces = store.phases(plant_id, train, back, kind).await?;
        if !whole {
            let back = Span::new(from.plus(-STANDING_BACK_US), from);
            self.memory.hours = store.hours(plant_id, train, back, u32::MAX).await?;
        }
        if self.memory.hours.is_empty() {
            let back = Span::new(from.plus(-HOURS_KEPT_US), from);
            self.memory.hours = store.hours(plant_id, train, back, u32::MAX).await?;
        }
        self.runs_stored = store.runs(plant_id, train, Instant::from_micros(i64::MAX)).await?;
        let begun = self.runs_stored.iter().filter(|r| r.start < from);
        self.memory.runs = begun.map(|r| analysis::as_known(r, from)).collect();
        if let Some(last) = self.assessments.last() {
            self.memory.holds = last.holds;
            self.memory.assessed = Some(last.as_of);
            self.memory.run_days = last.run_days;
            if let Some(run) = self.memory.runs.last_mut() {
                run.slope_1_m_per_m = last.trend.map(|t| t.slope_1_m_per_m);
            }
        }
        if !whole {
            return Ok(());
        }
        let begin = self.memory.runs.last().map_or(Instant::from_micros(i64::MIN), |r| r.start);
        let days =
            store.days(plant_id, train, Span::new(begin, from), DAYS_KEPT as u32 + 10).await?;
        let cleans = analysis::cleans(&self.pieces, &self.recorded, from);
        self.memory.days =
            days.into_iter().filter(|d| analysis::is_run_day(d, &cleans, None)).collect();
        let extra = self.memory.days.len().saturating_sub(DAYS_KEPT);
        self.memory.days.drain(..extra);
        Ok(())
    }

    /// Takes the rows of a day that was worked from readings. Answers the first moment at which
    /// they differ from the stored ones.
    pub async fn take(
        &mut self,
        day: Span,
        rows: DayRows,
        changes: &mut Changes,
    ) -> Result<Option<Instant>, StoreError> {
        let train = &self.site.train.id;
        let first = changes.put_day(train, day, &rows).await?;
        self.memory.hours.retain(|h| !day.contains(h.start));
        self.memory.hours.extend(rows.hours);
        self.pieces.retain(|p| !day.contains(p.start));
        self.pieces.extend(rows.phases.into_iter().filter(|p| p.phase == Phase::CleanInPlace));
        let keep = day.from.plus(-PIECES_BACK_US);
        self.pieces.retain(|p| p.start >= keep);
        self.day = rows.day;
        Ok(first)
    }

    /// Takes the stored rows of a day.
    pub async fn take_stored(
        &mut self,
        store: &Store,
        plant: &str,
        day: Span,
    ) -> Result<(), StoreError> {
        let train = &self.site.train.id;
        self.memory.hours.extend(store.hours(plant, train, day, u32::MAX).await?);
        self.pieces.extend(store.phases(plant, train, day, Some(Phase::CleanInPlace)).await?);
        self.day = store.days(plant, train, day, 1).await?.pop();
        Ok(())
    }

    /// Assesses the day if it is over.
    pub async fn stage_3(
        &mut self,
        plant: &Plant,
        day: Span,
        changes: &mut Changes,
    ) -> Result<(), StoreError> {
        let over = self.is_over(day);
        let Some(row) = self.day.take().filter(|_| over) else { return Ok(()) };
        let cleans = analysis::cleans(&self.pieces, &self.recorded, day.to);
        let assessment = analysis::assess(plant, &self.site, &mut self.memory, &row, &cleans);
        self.assessments.push(assessment);
        let extra = self.assessments.len().saturating_sub(ASSESSMENTS_KEPT);
        self.assessments.drain(..extra);
        if let Some(a) = self.assessments.last() {
            let standing = self.standing_on(Some(a), day.to);
            let found = analysis::find(&self.site, &standing);
            changes.put_assessment(a, &found).await?;
        }
        Ok(())
    }

    /// Whether all readings of a day are in.
    fn is_over(&self, day: Span) -> bool {
        self.newest.is_some_and(|n| n.plus(self.every_us) >= day.to)
    }

    /// Whether its runs are others than those stored.
    pub fn runs_differ(&self) -> bool {
        self.memory.runs != self.runs_stored
    }

    /// The last assessment.
    pub fn last_assessment(&self) -> Option<&Assessment> {
        self.assessments.last()
    }

    /// Cleans that had ended well before a moment.
    pub fn ended_cleans(&self, at: Instant) -> Vec<Clean> {
        let mut list = analysis::cleans(&self.pieces, &self.recorded, at);
        list.retain(|c| c.end.plus(ENDED_US) <= at);
        list
    }

    /// Runs as they were known at a moment.
    pub fn runs_known(&self, at: Instant) -> Vec<Run> {
        let begun = self.memory.runs.iter().filter(|r| r.start < at);
        begun.map(|r| analysis::as_known(r, at)).collect()
    }

    /// Recorded cleans that had ended by a moment and name a work order.
    pub fn named(&self, at: Instant) -> Vec<Named> {
        self.told.iter().filter(|c| c.span.to <= at).filter_map(named).collect()
    }

    /// What the recorded cleans that had ended by a moment may have left in the train.
    pub fn last_chemical(&self, at: Instant) -> Option<LastChemical> {
        let ended = self.told.iter().filter(|c| c.span.to <= at);
        ended.fold(None, |left: Option<LastChemical>, c| {
            LastChemical::left_by(&c.steps, left.as_ref(), c.span.to)
        })
    }

    /// What the train mostly did in the last hour before a moment.
    pub fn phase_before(&self, at: Instant) -> Option<Phase> {
        self.memory.hours.iter().rev().find(|h| h.end <= at).map(|h| h.mostly)
    }

    /// What stood at the end of an hour; `None` for a train that has shown nothing yet.
    pub fn standing(&self, plant: &Plant, hour_end: Instant) -> Option<Standing> {
        let day = plant.zone.day(hour_end.plus(-1));
        let assessment = self.assessments.iter().rev().find(|a| a.as_of <= day.from);
        if assessment.is_none() && self.memory.hours.iter().all(|h| h.end > hour_end) {
            return None;
        }
        Some(self.standing_on(assessment, hour_end))
    }

    fn standing_on(&self, assessment: Option<&Assessment>, at: Instant) -> Standing {
        let rows = Rows {
            assessment,
            hours: &self.memory.hours,
            pieces: &self.pieces,
            recorded: &self.recorded,
            runs: &self.memory.runs,
        };
        analysis::standing(&self.site, &rows, at)
    }
}

async fn first_day(
    store: &Store,
    plant: &Plant,
    train: &Train,
) -> Result<Option<Instant>, StoreError> {
    let all = Span::new(Instant::from_micros(i64::MIN), Instant::from_micros(i64::MAX));
    let first = store.hours(&plant.id, &train.id, all, 1).await?;
    Ok(first.first().map(|h| plant.zone.day(h.start).from))
}

/// What people recorded of a train's cleans, in order of time: all, or the newest.
async fn told(
    store: &Store,
    plant: &Plant,
    train: &Train,
    all: bool,
) -> Result<Vec<Cleaning>, StoreError> {
    let filter = CleaningFilter {
        train: Some(train.id.clone()),
        limit: if all { u32::MAX } else { TOLD_NEWEST },
        ..Default::default()
    };
    let mut list = store.cleanings(&plant.id, &filter).await?;
    list.sort_by_key(|c| (c.span.from, c.span.to));
    Ok(list)
}

fn recorded(c: &Cleaning) -> RecordedClean {
    RecordedClean {
        id: c.id.clone(),
        train: c.train.clone(),
        start: c.span.from,
        end: c.span.to,
        kind: c.kind,
    }
}

fn named(c: &Cleaning) -> Option<Named> {
    Some(Named {
        cleaning: c.id.clone(),
        number: number_of(c.work_order.as_deref()?)?,
        actuals: Actuals {
            start: c.span.from,
            end: c.span.to,
            steps: c.steps.clone(),
            waste_m3: None,
            staff_hours: None,
            notes: None,
        },
    })
}
