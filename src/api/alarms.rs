//! Alarms, and what people do to them.

use axum::extract::{Path, State};
use axum::http::Uri;
use serde::Deserialize;
use utoipa::{IntoParams, ToSchema};

use super::App;
use super::acts::{PersonBody, desk, refused, wanted};
use super::http::{
    Answer, ApiJson, ApiQuery, Cursor, Failure, LIST_MOST, LIST_USUAL, json, limit, linked,
    next_address,
};
use super::plant::UnitsQuery;
use super::posted::Faults;
use super::trains::train_of;
use crate::alarms::{Alarm, AlarmState};
use crate::answers::{AlarmView, Page, Problem, ProblemKind, UnitSystem, Units, alarm_view};
use crate::base::nearest;
use crate::store::{ItemFilter, ItemKind};

const LIST: &str = "alarms";

/// Which alarms.
#[derive(Debug, Deserialize, IntoParams)]
#[into_params(parameter_in = Query)]
pub struct AlarmsQuery {
    /// `unacknowledged`, `acknowledged`, `returned_unacknowledged`, `shelved`,
    /// `suppressed_by_design`, `out_of_service` or `normal`; `open` (if left out) for all that
    /// are not over, `all` for every one.
    state: Option<String>,
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

/// To silence an alarm for a time.
#[derive(Clone, Debug, Deserialize, ToSchema)]
#[serde(deny_unknown_fields)]
pub struct ShelveBody {
    /// The person who does it.
    by: String,
    /// Until when: a moment within the next 24 hours.
    #[schema(format = DateTime)]
    until: String,
    /// Why: the next shift reads it.
    reason: String,
}

/// Alarms, newest first
#[utoipa::path(
    get, path = "/v1/alarms", tag = "answers", operation_id = "listAlarms", params(AlarmsQuery),
    responses((status = 200, description = "A page of alarms", body = Page<AlarmView>))
)]
pub async fn list(
    State(app): State<App>,
    uri: Uri,
    ApiQuery(query): ApiQuery<AlarmsQuery>,
) -> Answer {
    let plant = app.plant();
    let train = query.train.as_deref().map(|t| train_of(&plant, t)).transpose()?;
    let (open, state) = match query.state.as_deref().unwrap_or("open") {
        "open" => (Some(true), None),
        "all" => (None, None),
        code => {
            let state = AlarmState::from_code(code).ok_or_else(|| no_state(code))?;
            (Some(state != AlarmState::Normal), Some(state))
        }
    };
    let n = limit(query.limit, LIST_USUAL, LIST_MOST)?;
    let after = Cursor::parse(LIST, query.cursor.as_deref())?;
    let filter = ItemFilter {
        open,
        train: train.map(|t| t.id.clone()),
        after: after.map(|c| c.number()).transpose()?,
        ..ItemFilter::default()
    };
    let keep = |alarm: &Alarm| state.is_none_or(|s| alarm.state == s);
    let (found, more) = wanted::<Alarm>(&app, &plant, ItemKind::Alarm, &filter, n, keep).await?;
    let last = found.last().filter(|_| more);
    let next = last.map(|(at, _)| next_address(&uri, &Cursor::text(LIST, &at.to_string())));
    let units = Units::new(query.units.unwrap_or_default());
    let items = found.iter().map(|(_, a)| alarm_view(&plant.zone, &units, a)).collect();
    let page = Page { items, next };
    Ok(linked(json(&page)?, page.next.as_deref()))
}

fn no_state(code: &str) -> Failure {
    let known: Vec<&str> = AlarmState::ALL.iter().map(|s| s.code()).collect();
    let near = nearest(code, known.iter().copied().chain(["open", "all"]));
    let near = near.map_or(String::new(), |n| format!(" Did you mean `{n}`?"));
    let there = known.join(", ");
    ProblemKind::BadRequest
        .problem(format!(
            "`{code}` is no state of an alarm; there are {there}, open and all.{near}"
        ))
        .into()
}

/// One alarm
#[utoipa::path(
    get, path = "/v1/alarms/{id}", tag = "answers", operation_id = "getAlarm",
    params(("id" = String, Path, description = "Id of the alarm"), UnitsQuery),
    responses((status = 200, description = "The alarm", body = AlarmView))
)]
pub async fn one(
    State(app): State<App>,
    Path(id): Path<String>,
    ApiQuery(query): ApiQuery<UnitsQuery>,
) -> Answer {
    let plant = app.plant();
    let found: Option<Alarm> = app.store.item(&plant.id, ItemKind::Alarm, &id).await?;
    let alarm = found.ok_or_else(|| Failure::from(Problem::no_such("alarm", &id, [])))?;
    json(&alarm_view(&plant.zone, &query.units(), &alarm))
}

/// Say that you know of an alarm
#[utoipa::path(
    post, path = "/v1/alarms/{id}/acknowledge", tag = "acts", operation_id = "acknowledgeAlarm",
    params(("id" = String, Path, description = "Id of the alarm"), UnitsQuery),
    request_body = PersonBody,
    responses((status = 200, description = "As it now is", body = AlarmView))
)]
pub async fn acknowledge(
    State(app): State<App>,
    Path(id): Path<String>,
    ApiQuery(query): ApiQuery<UnitsQuery>,
    body: ApiJson<PersonBody>,
) -> Answer {
    let plant = app.plant();
    let done = desk(&app, &plant)
        .acknowledge(&id, &body.value.by, body.value.reason.as_deref())
        .await
        .map_err(|e| refused(&plant.zone, "alarm", &id, e))?;
    json(&alarm_view(&plant.zone, &query.units(), &done.item))
}

/// Silence an alarm for a time
#[utoipa::path(
    post, path = "/v1/alarms/{id}/shelve", tag = "acts", operation_id = "shelveAlarm",
    params(("id" = String, Path, description = "Id of the alarm"), UnitsQuery),
    request_body = ShelveBody,
    responses((status = 200, description = "As it now is", body = AlarmView))
)]
pub async fn shelve(
    State(app): State<App>,
    Path(id): Path<String>,
    ApiQuery(query): ApiQuery<UnitsQuery>,
    body: ApiJson<ShelveBody>,
) -> Answer {
    let plant = app.plant();
    let mut faults = Faults::default();
    let until = faults.time("/until", &body.value.until);
    let until = faults.none(until)?;
    let done = desk(&app, &plant)
        .shelve(&id, &body.value.by, until, &body.value.reason)
        .await
        .map_err(|e| refused(&plant.zone, "alarm", &id, e))?;
    json(&alarm_view(&plant.zone, &query.units(), &done.item))
}
