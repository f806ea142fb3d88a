//! Permeability of a train in time.

use axum::extract::{Path, State};
use axum::http::{HeaderMap, Uri};
use serde::{Deserialize, Serialize};
use utoipa::{IntoParams, ToSchema};

use super::App;
use super::http::{
    Answer, ApiQuery, Cursor, Failure, SERIES_MOST, SERIES_USUAL, csv, json, limit, linked,
    next_address, prefers, span,
};
use super::trains::train_of;
use crate::analysis::{self, LOOKBACK_US, Site, Viscosity};
use crate::answers::{
    PermeabilityPoint, PermeabilityView, SeriesStep, UnitSystem, Units, day_points, hour_points,
    minute_points, permeability_csv, permeability_view,
};
use crate::base::{DAY_US, Instant, SourceId, Span, Tag};
use crate::plant::{Plant, Train};
use crate::store::StoreError;

const LIST: &str = "permeability";
/// Days whose readings are read for one page by the minute.
const DAYS_A_PAGE: usize = 31;
/// An hour row may be shorter than an hour; no day has more of them.
const HOURS_A_DAY: u32 = 26;

/// A form of answer.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Serialize, Deserialize, ToSchema)]
#[serde(rename_all = "lowercase")]
pub enum SeriesFormat {
    /// The view.
    Json,
    /// A table, a line a point.
    Csv,
}

/// Which part of the series.
#[derive(Debug, Deserialize, IntoParams)]
#[into_params(parameter_in = Query)]
pub struct PermeabilityQuery {
    /// Steps that begin at or after this time.
    from: Option<String>,
    /// Steps that begin before this time.
    to: Option<String>,
    /// Instead: a duration up to the newest data, such as P7D. Usual are a day by the minute,
    /// 7 days by the hour, 90 days by the day.
    last: Option<String>,
    /// PT1M, PT1H (usual) or P1D.
    #[param(inline)]
    step: Option<SeriesStep>,
    /// `json`, or `csv` for a table; else as `Accept` says.
    #[param(inline)]
    format: Option<SeriesFormat>,
    /// `si` or `us`.
    #[param(inline)]
    units: Option<UnitSystem>,
    /// At most so many points, up to 10,000; if left out 1,000, or 10,000 in a table.
    #[param(minimum = 1, maximum = 10000)]
    limit: Option<u32>,
    /// From `next` of the page before.
    cursor: Option<String>,
}

/// End of a train's newest data.
pub async fn as_of(app: &App, plant: &Plant, train: &Train) -> Result<Option<Instant>, StoreError> {
    let now = app.store.train_now(&plant.id, &train.id).await?;
    Ok(now.map(|n| n.now.newest.plus(analysis::every_us(plant, train))))
}

/// Points of a page, and where the next page begins.
type Points = (Vec<PermeabilityPoint>, Option<Instant>);

/// What a page is made for.
struct Asked<'a> {
    app: &'a App,
    plant: &'a Plant,
    site: Site<'a>,
    units: Units,
    span: Span,
    limit: u32,
}

/// Permeability in time
///
/// Only steady filtration counts; a step with none is left out, so that a page may hold fewer
/// points than asked for although there is a next one.
#[utoipa::path(
    get, path = "/v1/trains/{train}/permeability", tag = "answers",
    operation_id = "getPermeability",
    params(("train" = String, Path, description = "Id of the train"), PermeabilityQuery),
    responses((status = 200, description = "A page of the series",
        content((PermeabilityView = "application/json"), (String = "text/csv"))))
)]
pub async fn series(
    State(app): State<App>,
    Path(id): Path<String>,
    uri: Uri,
    headers: HeaderMap,
    ApiQuery(query): ApiQuery<PermeabilityQuery>,
) -> Answer {
    let plant = app.plant();
    let train = train_of(&plant, &id)?;
    let step = query.step.unwrap_or(SeriesStep::Hour);
    let as_csv = query.format.map_or_else(
        || prefers(&headers, &["application/json", "text/csv"]) == "text/csv",
        |f| f == SeriesFormat::Csv,
    );
    let as_of = as_of(&app, &plant, train).await?;
    let asked = Asked {
        app: &app,
        plant: &plant,
        site: Site::new(&plant, train),
        units: Units::new(query.units.unwrap_or_default()),
        span: asked_span(&query, step, as_of.unwrap_or_else(|| app.clock.now()))?,
        limit: limit(query.limit, if as_csv { SERIES_MOST } else { SERIES_USUAL }, SERIES_MOST)?,
    };
    let (points, next) = match step {
        SeriesStep::Minute => by_minute(&asked).await?,
        SeriesStep::Hour => by_hour(&asked).await?,
        SeriesStep::Day => by_day(&asked).await?,
    };
    let next = next.map(|t| next_address(&uri, &Cursor::text(LIST, &t.micros().to_string())));
    let Asked { site, units, .. } = &asked;
    let view = permeability_view(&plant, site, units, step, as_of, points, next);
    let answer = if as_csv {
        csv(&format!("{id}-permeability.csv"), permeability_csv(&view))
    } else {
        json(&view)?
    };
    Ok(linked(answer, view.next.as_deref()))
}

fn asked_span(
    query: &PermeabilityQuery,
    step: SeriesStep,
    newest: Instant,
) -> Result<Span, Failure> {
    let usual_us = match step {
        SeriesStep::Minute => DAY_US,
        SeriesStep::Hour => 7 * DAY_US,
        SeriesStep::Day => 90 * DAY_US,
    };
    let (from, to, last) = (query.from.as_deref(), query.to.as_deref(), query.last.as_deref());
    let mut span = span(from, to, last, newest, usual_us)?;
    if let Some(cursor) = Cursor::parse(LIST, query.cursor.as_deref())? {
        span.from = Instant::from_micros(cursor.number()?);
    }
    Ok(span)
}

async fn by_hour(asked: &Asked<'_>) -> Result<Points, StoreError> {
    let Asked { app, plant, site, units, .. } = asked;
    let n = asked.limit as usize;
    let mut hours = app.store.hours(&plant.id, &site.train.id, asked.span, asked.limit + 1).await?;
    let next = hours.get(n).map(|h| h.start);
    hours.truncate(n);
    Ok((hour_points(&plant.zone, site, units, &hours), next))
}

async fn by_day(asked: &Asked<'_>) -> Result<Points, StoreError> {
    let Asked { app, plant, site, units, .. } = asked;
    let n = asked.limit as usize;
    // All of them: the store gives the last days of a span, and a page is its first ones.
    let mut days = app.store.days(&plant.id, &site.train.id, asked.span, u32::MAX).await?;
    let next = days.get(n).map(|d| d.start);
    days.truncate(n);
    let hours = match (days.first(), days.last()) {
        (Some(first), Some(last)) => {
            let span = Span::new(first.start, last.end);
            let most = asked.limit.saturating_mul(HOURS_A_DAY);
            app.store.hours(&plant.id, &site.train.id, span, most).await?
        }
        _ => Vec::new(),
    };
    Ok((day_points(&plant.zone, site, units, &days, &hours), next))
}

/// From the readings themselves, a plant day after the other.
async fn by_minute(asked: &Asked<'_>) -> Result<Points, StoreError> {
    let Asked { app, plant, site, units, .. } = asked;
    let tags: Vec<(SourceId, Tag)> = analysis::tags_needed(site.train).into_iter().collect();
    let Some(there) = app.store.readings_span(&plant.id, &tags).await? else {
        return Ok((Vec::new(), None));
    };
    let to = asked.span.to.min(there.to.plus(1));
    let mut from = asked.span.from.max(there.from);
    let mut viscosity = Viscosity::new(plant.temperature_law);
    let mut points = Vec::new();
    for _ in 0..DAYS_A_PAGE {
        if from >= to {
            return Ok((points, None));
        }
        let day = plant.zone.day(from);
        let window = Span::new(day.from.plus(-LOOKBACK_US), day.to);
        let columns = app.store.readings(&plant.id, &tags, window).await?;
        let readings = tags.iter().cloned().zip(columns).collect();
        let (samples, normalised) =
            analysis::minutes(plant, site.train, &readings, day, &mut viscosity);
        let part = Span::new(from, day.to.min(to));
        let found = minute_points(&plant.zone, site, units, &samples, &normalised, part);
        let room = asked.limit as usize - points.len();
        if let Some(left_out) = found.get(room) {
            let next = Instant::parse(left_out.time.as_str()).ok();
            points.extend(found.into_iter().take(room));
            return Ok((points, next));
        }
        points.extend(found);
        from = day.to;
    }
    Ok((points, Some(from).filter(|f| *f < to)))
}
