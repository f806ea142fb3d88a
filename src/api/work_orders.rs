//! Work orders, and what people do to them: one path an act.

use axum::extract::{Path, State};
use axum::http::header::LOCATION;
use axum::http::{HeaderValue, StatusCode, Uri};
use serde::Deserialize;
use utoipa::{IntoParams, ToSchema};

use super::App;
use super::acts::{desk, refused, wanted};
use super::http::{
    Answer, ApiJson, ApiQuery, Cursor, Failure, LIST_MOST, LIST_USUAL, instant, json, json_of,
    limit, linked, next_address,
};
use super::plant::UnitsQuery;
use super::posted::{Faults, StepBody, WindowBody, steps, window};
use super::trains::train_of;
use crate::analysis::Site;
use crate::answers::{
    Page, Problem, ProblemKind, UnitSystem, Units, WorkOrderView, work_order_view,
};
use crate::base::nearest;
use crate::orders::{ByHand, OrderState, Task, WorkOrder, number_of};
use crate::plant::Plant;
use crate::store::{ItemFilter, ItemKind};

const LIST: &str = "work-orders";

/// Which work orders.
#[derive(Debug, Deserialize, IntoParams)]
#[into_params(parameter_in = Query)]
pub struct WorkOrdersQuery {
    /// `draft`, `approved`, `scheduled`, `in_progress`, `waiting`, `done`, `verified`,
    /// `rejected` or `cancelled`; `open` for those still to be done, `all` (if left out) for
    /// every one.
    state: Option<String>,
    /// Only changed at or after this time, by the service's clock.
    changed_since: Option<String>,
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

/// What is to be done.
#[derive(Clone, Copy, Debug, Default, Deserialize, ToSchema)]
#[serde(rename_all = "snake_case")]
pub enum TaskKind {
    #[default]
    CleanInPlace,
    MaintenanceClean,
}

/// A work order asked for by hand.
#[derive(Clone, Debug, Deserialize, ToSchema)]
#[serde(deny_unknown_fields)]
pub struct WorkOrderBody {
    /// Id of the train.
    #[schema(example = "uf-1")]
    train: String,
    /// What is to be done; `clean_in_place` if left out.
    #[serde(default)]
    kind: TaskKind,
    /// The person who asks.
    by: String,
    /// Why.
    reason: Option<String>,
    /// The plan; the site's procedure if left out.
    steps: Option<Vec<StepBody>>,
    /// By when it is needed.
    #[schema(format = DateTime)]
    needed_by: Option<String>,
    /// When it suits.
    window: Option<WindowBody>,
}

pub(super) fn no_such(text: &str) -> Failure {
    Problem::no_such("work order", text, []).into()
}

/// The number of a path: `41` or `WO 41`.
pub(super) fn number(text: &str) -> Result<i64, Failure> {
    number_of(text).ok_or_else(|| no_such(text))
}

/// An order as it is shown; `None` for a train that the plant file no longer holds.
pub(super) fn shown(plant: &Plant, units: &Units, order: &WorkOrder) -> Option<WorkOrderView> {
    let train = plant.train(&order.train)?;
    Some(work_order_view(&plant.zone, &Site::new(plant, train), units, order))
}

/// Work orders, newest first
#[utoipa::path(
    get, path = "/v1/work-orders", tag = "answers", operation_id = "listWorkOrders",
    params(WorkOrdersQuery),
    responses((status = 200, description = "A page of work orders", body = Page<WorkOrderView>))
)]
pub async fn list(
    State(app): State<App>,
    uri: Uri,
    ApiQuery(query): ApiQuery<WorkOrdersQuery>,
) -> Answer {
    let plant = app.plant();
    let train = query.train.as_deref().map(|t| train_of(&plant, t)).transpose()?;
    let states = states(query.state.as_deref().unwrap_or("all"))?;
    let n = limit(query.limit, LIST_USUAL, LIST_MOST)?;
    let after = Cursor::parse(LIST, query.cursor.as_deref())?;
    let filter = ItemFilter {
        train: train.map(|t| t.id.clone()),
        changed_since: instant("changed_since", query.changed_since.as_deref())?,
        after: after.map(|c| c.number()).transpose()?,
        ..ItemFilter::default()
    };
    let keep = |o: &WorkOrder| states.contains(&o.state) && plant.train(&o.train).is_some();
    let (found, more) =
        wanted::<WorkOrder>(&app, &plant, ItemKind::WorkOrder, &filter, n, keep).await?;
    let last = found.last().filter(|_| more);
    let next = last.map(|(at, _)| next_address(&uri, &Cursor::text(LIST, &at.to_string())));
    let units = Units::new(query.units.unwrap_or_default());
    let items = found.iter().filter_map(|(_, o)| shown(&plant, &units, o)).collect();
    let page = Page { items, next };
    Ok(linked(json(&page)?, page.next.as_deref()))
}

/// The states that a word of the query means.
fn states(word: &str) -> Result<Vec<OrderState>, Failure> {
    let all = OrderState::ALL.into_iter();
    match word {
        "all" => return Ok(all.collect()),
        "open" => return Ok(all.filter(|s| s.is_open()).collect()),
        _ => {}
    }
    if let Some(state) = OrderState::from_code(word) {
        return Ok(vec![state]);
    }
    let known: Vec<&str> = OrderState::ALL.iter().map(|s| s.code()).collect();
    let near = nearest(word, known.iter().copied().chain(["open", "all"]));
    let near = near.map_or(String::new(), |n| format!(" Did you mean `{n}`?"));
    let there = known.join(", ");
    let detail =
        format!("`{word}` is no state of a work order; there are {there}, open and all.{near}");
    Err(ProblemKind::BadRequest.problem(detail).into())
}

/// One work order: what a crew can work from
#[utoipa::path(
    get, path = "/v1/work-orders/{number}", tag = "answers", operation_id = "getWorkOrder",
    params(("number" = String, Path, description = "`41` or `WO 41`"), UnitsQuery),
    responses((status = 200, description = "The work order", body = WorkOrderView))
)]
pub async fn one(
    State(app): State<App>,
    Path(text): Path<String>,
    ApiQuery(query): ApiQuery<UnitsQuery>,
) -> Answer {
    let plant = app.plant();
    let key = number(&text)?.to_string();
    let found: Option<WorkOrder> = app.store.item(&plant.id, ItemKind::WorkOrder, &key).await?;
    let view = found.and_then(|o| shown(&plant, &query.units(), &o));
    json(&view.ok_or_else(|| no_such(&text))?)
}

/// Ask for work by hand: a draft
#[utoipa::path(
    post, path = "/v1/work-orders", tag = "acts", operation_id = "postWorkOrder",
    params(UnitsQuery), request_body = WorkOrderBody,
    responses(
        (status = 201, description = "Drafted", body = WorkOrderView,
         headers(("Location" = String, description = "The work order"))),
        (status = 200, description = "The same was asked for before: that draft", body = WorkOrderView),
    )
)]
pub async fn post(
    State(app): State<App>,
    ApiQuery(query): ApiQuery<UnitsQuery>,
    body: ApiJson<WorkOrderBody>,
) -> Answer {
    let plant = app.plant();
    let body = body.value;
    let mut faults = Faults::default();
    let train = plant.train(&crate::base::TrainId::new(&body.train));
    if train.is_none() {
        faults.at("/train", format!("the plant file holds no train `{}`", body.train));
    }
    let asked = ByHand {
        task: match body.kind {
            TaskKind::CleanInPlace => Task::CleanInPlace,
            TaskKind::MaintenanceClean => Task::MaintenanceClean,
        },
        by: body.by,
        reason: body.reason,
        steps: body.steps.as_deref().map(|s| steps(&mut faults, "/steps", s)),
        needed_by: faults.optional_time("/needed_by", body.needed_by.as_deref()),
        window: body.window.as_ref().and_then(|w| window(&mut faults, "/window", w)),
    };
    let train = faults.none(train)?;
    let done = desk(&app, &plant)
        .order_by_hand(train, asked)
        .await
        .map_err(|e| refused(&plant.zone, "work order", "", e))?;
    let status = if done.changed { StatusCode::CREATED } else { StatusCode::OK };
    let place = format!("/v1/work-orders/{}", done.item.number);
    let view = shown(&plant, &query.units(), &done.item).ok_or_else(|| no_such(&place))?;
    let mut response = json_of(status, &view)?;
    if let Ok(place) = HeaderValue::from_str(&place) {
        response.headers_mut().insert(LOCATION, place);
    }
    Ok(response)
}
