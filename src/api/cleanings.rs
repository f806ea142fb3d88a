//! Cleans: as people record them, and as the state of the train showed them.

use std::collections::BTreeMap;

use axum::extract::{Path, State};
use axum::http::header::LOCATION;
use axum::http::{HeaderValue, StatusCode, Uri};
use serde::Deserialize;
use utoipa::{IntoParams, ToSchema};

use super::App;
use super::acts::{desk, follow_up, refused};
use super::http::{
    Answer, ApiJson, ApiQuery, Cursor, Failure, LIST_MOST, LIST_USUAL, json, json_of, limit,
    linked, next_address,
};
use super::plant::UnitsQuery;
use super::posted::{CleanKind, Faults, NumberOrText, StepBody, steps};
use super::trains::train_of;
use crate::analysis::{Origin, Run, Site, every_us};
use crate::answers::{
    CleaningView, Page, Problem, ProblemKind, RecordedCleaning, UnitSystem, Units,
    inferred_cleaning, inferred_id, recorded_cleaning,
};
use crate::base::{Instant, Span, TrainId, Zone};
use crate::plant::{Plant, Train};
use crate::store::{Cleaning, CleaningFilter, StoreError};
use crate::work::NewCleaning;

const LIST: &str = "cleanings";

/// Which cleans.
#[derive(Debug, Deserialize, IntoParams)]
#[into_params(parameter_in = Query)]
pub struct CleaningsQuery {
    /// Only of this train.
    train: Option<String>,
    /// `si` or `us`.
    #[param(inline)]
    units: Option<UnitSystem>,
    /// At most so many, up to 1,000; 100 if left out.
    #[param(minimum = 1, maximum = 1000)]
    limit: Option<u32>,
    /// From `next` of the page before.
    cursor: Option<String>,
}

/// A clean as it happened.
#[derive(Clone, Debug, Deserialize, ToSchema)]
#[serde(deny_unknown_fields)]
pub struct CleaningBody {
    /// Id of the train.
    #[schema(example = "uf-1")]
    train: String,
    /// From.
    #[schema(format = DateTime)]
    start: String,
    /// Up to; not in the future.
    #[schema(format = DateTime)]
    end: String,
    /// What kind of clean it was.
    kind: CleanKind,
    /// What was done, in order; one step of class `other` where it is not known.
    steps: Vec<StepBody>,
    /// The work order that it completes: `WO 41` or 41.
    work_order: Option<NumberOrText>,
    /// Your own name for it, unique in the plant.
    reference: Option<String>,
    /// Who cleaned.
    by: Option<String>,
}

/// A train with what its cleans are judged by.
struct Judged<'a> {
    site: Site<'a>,
    runs: Vec<Run>,
    as_of: Instant,
}

impl<'a> Judged<'a> {
    async fn load(app: &App, plant: &Plant, train: &'a Train) -> Result<Self, StoreError> {
        let far = Instant::from_micros(i64::MAX);
        let now = app.store.train_now(&plant.id, &train.id).await?;
        let newest = now.map(|n| n.now.newest.plus(every_us(plant, train)));
        Ok(Self {
            site: Site::new(plant, train),
            runs: app.store.runs(&plant.id, &train.id, far).await?,
            as_of: newest.unwrap_or(Instant::from_micros(i64::MIN)),
        })
    }

    fn recorded(&self, zone: &Zone, units: &Units, c: &Cleaning) -> CleaningView {
        let run =
            self.runs.iter().find(|r| matches!(&r.origin, Origin::Recorded(id) if *id == c.id));
        let told = RecordedCleaning {
            id: &c.id,
            train: &c.train,
            start: c.span.from,
            end: c.span.to,
            kind: c.kind,
            steps: &c.steps,
            work_order: c.work_order.as_deref(),
            reference: c.reference.as_deref(),
            recorded: c.recorded,
            by: c.by.as_deref(),
        };
        recorded_cleaning(zone, &self.site, units, &told, run, self.as_of)
    }

    fn inferred(&self) -> impl Iterator<Item = &Run> {
        self.runs.iter().filter(|r| r.origin == Origin::Inferred)
    }

    fn shown(&self, zone: &Zone, units: &Units, run: &Run) -> CleaningView {
        inferred_cleaning(zone, &self.site, units, run, self.as_of)
    }
}

/// Where a list goes on: after the clean of that start and id.
fn place(cursor: Option<Cursor>) -> Result<Option<(Instant, String)>, Failure> {
    let Some(cursor) = cursor else { return Ok(None) };
    let wrong = || {
        Failure::from(
            ProblemKind::BadRequest.problem("`cursor` is not one that this list gave out."),
        )
    };
    let (us, id) = cursor.place.split_once(' ').ok_or_else(wrong)?;
    let us = us.parse().map_err(|_| wrong())?;
    Ok(Some((Instant::from_micros(us), id.to_owned())))
}

/// Cleans, recorded and seen, newest first, with their verdicts
#[utoipa::path(
    get, path = "/v1/cleanings", tag = "answers", operation_id = "listCleanings",
    params(CleaningsQuery),
    responses((status = 200, description = "A page of cleans", body = Page<CleaningView>))
)]
pub async fn list(
    State(app): State<App>,
    uri: Uri,
    ApiQuery(query): ApiQuery<CleaningsQuery>,
) -> Answer {
    let plant = app.plant();
    let n = limit(query.limit, LIST_USUAL, LIST_MOST)?;
    let after = place(Cursor::parse(LIST, query.cursor.as_deref())?)?;
    let trains = match query.train.as_deref() {
        Some(id) => vec![train_of(&plant, id)?],
        None => plant.trains.iter().collect(),
    };
    let mut judged: BTreeMap<TrainId, Judged<'_>> = BTreeMap::new();
    for train in &trains {
        judged.insert(train.id.clone(), Judged::load(&app, &plant, train).await?);
    }
    let filter = CleaningFilter {
        train: query.train.as_deref().map(TrainId::new),
        after: after.clone(),
        limit: n + 1,
        ..CleaningFilter::default()
    };
    let told = app.store.cleanings(&plant.id, &filter).await?;
    let units = Units::new(query.units.unwrap_or_default());
    let zone = &plant.zone;
    let recorded = told.iter().filter_map(|c| {
        let of = judged.get(&c.train)?;
        Some(((c.span.from, c.id.clone()), of.recorded(zone, &units, c)))
    });
    let seen = judged.values().flat_map(|of| {
        let units = &units;
        of.inferred().map(move |r| ((r.clean_start, inferred_id(r)), of.shown(zone, units, r)))
    });
    let mut found: Vec<((Instant, String), CleaningView)> = recorded
        .chain(seen.filter(|(at, _)| after.as_ref().is_none_or(|after| at < after)))
        .collect();
    found.sort_by(|a, b| b.0.cmp(&a.0));
    let more = found.len() > n as usize;
    found.truncate(n as usize);
    let last = found.last().filter(|_| more).map(|((at, id), _)| format!("{} {id}", at.micros()));
    let next = last.map(|at| next_address(&uri, &Cursor::text(LIST, &at)));
    let page = Page { items: found.into_iter().map(|(_, view)| view).collect(), next };
    Ok(linked(json(&page)?, page.next.as_deref()))
}

/// One clean, recorded or seen
#[utoipa::path(
    get, path = "/v1/cleanings/{id}", tag = "answers", operation_id = "getCleaning",
    params(("id" = String, Path, description = "Id of the clean"), UnitsQuery),
    responses((status = 200, description = "The clean", body = CleaningView))
)]
pub async fn one(
    State(app): State<App>,
    Path(id): Path<String>,
    ApiQuery(query): ApiQuery<UnitsQuery>,
) -> Answer {
    let plant = app.plant();
    let units = query.units();
    let none = || Failure::from(Problem::no_such("cleaning", &id, []));
    if let Some(told) = app.store.cleaning(&plant.id, &id).await? {
        let train = plant.train(&told.train).ok_or_else(none)?;
        let judged = Judged::load(&app, &plant, train).await?;
        return json(&judged.recorded(&plant.zone, &units, &told));
    }
    for train in plant.trains.iter().filter(|t| id.starts_with(t.id.as_str())) {
        let judged = Judged::load(&app, &plant, train).await?;
        let run = judged.inferred().find(|r| inferred_id(r) == id);
        if let Some(run) = run {
            return json(&judged.shown(&plant.zone, &units, run));
        }
    }
    Err(none())
}

/// Record a clean as it happened
///
/// A record is never refused for its chemistry: what must not have met raises an alarm. One that
/// names a work order completes it.
#[utoipa::path(
    post, path = "/v1/cleanings", tag = "doors in", operation_id = "postCleaning",
    params(UnitsQuery), request_body = CleaningBody,
    responses(
        (status = 201, description = "Recorded", body = CleaningView,
         headers(("Location" = String, description = "The clean"))),
        (status = 200, description = "The same was recorded before: the first one", body = CleaningView),
    )
)]
pub async fn post(
    State(app): State<App>,
    ApiQuery(query): ApiQuery<UnitsQuery>,
    body: ApiJson<CleaningBody>,
) -> Answer {
    let plant = app.plant();
    let new = taken(&body.value)?;
    let done = desk(&app, &plant)
        .record(new)
        .await
        .map_err(|e| refused(&plant.zone, "cleaning", "", e))?;
    if done.changed {
        follow_up(&app).await;
    }
    let told = done.item;
    let train = train_of(&plant, told.train.as_str())?;
    let judged = Judged::load(&app, &plant, train).await?;
    let status = if done.changed { StatusCode::CREATED } else { StatusCode::OK };
    let view = judged.recorded(&plant.zone, &query.units(), &told);
    let mut response = json_of(status, &view)?;
    if let Ok(place) = HeaderValue::from_str(&format!("/v1/cleanings/{}", told.id)) {
        response.headers_mut().insert(LOCATION, place);
    }
    Ok(response)
}

fn taken(body: &CleaningBody) -> Result<NewCleaning, Failure> {
    let mut faults = Faults::default();
    let start = faults.time("/start", &body.start);
    let end = faults.time("/end", &body.end);
    let steps = steps(&mut faults, "/steps", &body.steps);
    let reference = body.reference.as_deref().map(str::trim);
    if reference == Some("") {
        faults.at("/reference", "a reference is not empty; leave it out where there is none");
    }
    let span = start.zip(end).map(|(from, to)| Span::new(from, to));
    let new = span.map(|span| NewCleaning {
        train: TrainId::new(&body.train),
        span,
        kind: body.kind.phase(),
        steps,
        work_order: body.work_order.as_ref().map(NumberOrText::text),
        reference: reference.map(str::to_owned),
        by: body.by.clone(),
    });
    faults.none(new)
}
