//! Filtration cycles of a train.

use axum::extract::{Path, State};
use axum::http::Uri;
use serde::Deserialize;
use utoipa::IntoParams;

use super::App;
use super::http::{
    Answer, ApiQuery, Cursor, LIST_MOST, LIST_USUAL, json, limit, linked, next_address, span,
};
use super::permeability::as_of;
use super::trains::train_of;
use crate::analysis::Site;
use crate::answers::{CyclesView, UnitSystem, Units, cycles_view};
use crate::base::{DAY_US, Instant, Span};

const LIST: &str = "cycles";
const USUAL_US: i64 = 7 * DAY_US;

/// Which cycles.
#[derive(Debug, Deserialize, IntoParams)]
#[into_params(parameter_in = Query)]
pub struct CyclesQuery {
    /// Only those that begin at or after this time.
    from: Option<String>,
    /// Only those that begin before this time.
    to: Option<String>,
    /// Instead: a duration up to the newest data, such as P7D, which is usual.
    last: Option<String>,
    /// `si` or `us`.
    #[param(inline)]
    units: Option<UnitSystem>,
    /// At most so many, up to 1,000; 100 if left out.
    #[param(minimum = 1, maximum = 1000)]
    limit: Option<u32>,
    /// From `next` of the page before.
    cursor: Option<String>,
}

/// Cycles of a train, in order of time
#[utoipa::path(
    get, path = "/v1/trains/{train}/cycles", tag = "answers", operation_id = "listCycles",
    params(("train" = String, Path, description = "Id of the train"), CyclesQuery),
    responses((status = 200, description = "A page of cycles", body = CyclesView))
)]
pub async fn list(
    State(app): State<App>,
    Path(id): Path<String>,
    uri: Uri,
    ApiQuery(query): ApiQuery<CyclesQuery>,
) -> Answer {
    let plant = app.plant();
    let train = train_of(&plant, &id)?;
    let units = Units::new(query.units.unwrap_or_default());
    let n = limit(query.limit, LIST_USUAL, LIST_MOST)?;
    let as_of = as_of(&app, &plant, train).await?;
    let newest = as_of.unwrap_or_else(|| app.clock.now());
    let (from, to, last) = (query.from.as_deref(), query.to.as_deref(), query.last.as_deref());
    let mut asked = span(from, to, last, newest, USUAL_US)?;
    if let Some(cursor) = Cursor::parse(LIST, query.cursor.as_deref())? {
        asked.from = Instant::from_micros(cursor.number()?);
    }
    // One more than the page: it says what the last backwash took off, and where to go on.
    let far = Span::new(asked.from, Instant::from_micros(i64::MAX));
    let mut cycles = app.store.cycles(&plant.id, &train.id, far, n + 1).await?;
    let within = cycles.partition_point(|c| c.start < asked.to).min(n as usize);
    let after = cycles.get(within).cloned();
    cycles.truncate(within);
    let follows = after.as_ref().filter(|c| c.start < asked.to);
    let next =
        follows.map(|c| next_address(&uri, &Cursor::text(LIST, &c.start.micros().to_string())));
    let site = Site::new(&plant, train);
    let view =
        cycles_view(&plant.zone, &site, &units, &cycles, after.as_ref(), as_of, next.clone());
    Ok(linked(json(&view)?, next.as_deref()))
}
