//! What people do to a work order.

use axum::extract::{Path, State};
use serde::Deserialize;
use utoipa::ToSchema;

use super::App;
use super::acts::{PersonBody, desk, follow_up, refused};
use super::http::{Answer, ApiJson, ApiQuery};
use super::plant::UnitsQuery;
use super::posted::{Faults, NumberOrText, StepBody, WindowBody, steps, volume, window};
use super::work_orders::{no_such, number, shown};
use crate::answers::{Units, WorkOrderView};
use crate::orders::{Actuals, Deed, External, IntegrityTest, OrderAct};

/// When it is meant to be done.
#[derive(Clone, Debug, Deserialize, ToSchema)]
#[serde(deny_unknown_fields)]
pub struct ScheduleBody {
    /// The person who schedules it.
    by: String,
    /// What there is to say to it.
    reason: Option<String>,
    /// When.
    window: WindowBody,
}

/// That work begins, or goes on.
#[derive(Clone, Debug, Deserialize, ToSchema)]
#[serde(deny_unknown_fields)]
pub struct StartBody {
    /// The person who starts it.
    by: String,
    /// What there is to say to it.
    reason: Option<String>,
    /// When work began; now if left out.
    #[schema(format = DateTime)]
    at: Option<String>,
}

/// That it is done, and how.
#[derive(Clone, Debug, Deserialize, ToSchema)]
#[serde(deny_unknown_fields)]
pub struct CompleteBody {
    /// The person who did it.
    by: String,
    /// What there is to say to it.
    reason: Option<String>,
    /// What was done.
    actuals: ActualsBody,
}

/// What was done.
#[derive(Clone, Debug, Deserialize, ToSchema)]
#[serde(deny_unknown_fields)]
pub struct ActualsBody {
    /// From.
    #[schema(format = DateTime)]
    start: String,
    /// Up to.
    #[schema(format = DateTime)]
    end: String,
    /// The steps as done; rinses with what was read, and by whom.
    steps: Vec<StepBody>,
    /// Spent solution and rinse water, with its unit.
    #[schema(example = "40 m3")]
    waste: Option<NumberOrText>,
    /// Hours of work of all people together.
    staff_hours: Option<f64>,
    /// What else there is to say; required where other chemicals were used than planned.
    notes: Option<String>,
}

/// That it is in order.
#[derive(Clone, Debug, Deserialize, ToSchema)]
#[serde(deny_unknown_fields)]
pub struct VerifyBody {
    /// The person who says so.
    by: String,
    /// What there is to say to it.
    reason: Option<String>,
    /// The test before return to service; required on a train that makes drinking water.
    integrity_test: Option<IntegrityTestBody>,
}

/// An integrity test.
#[derive(Clone, Debug, Deserialize, ToSchema)]
#[serde(deny_unknown_fields)]
pub struct IntegrityTestBody {
    /// Whether the train passed.
    passed: bool,
    /// When it was tested.
    #[schema(format = DateTime)]
    at: String,
    /// Who tested.
    by: String,
}

/// What the order is called in the maintenance system.
#[derive(Clone, Debug, Deserialize, ToSchema)]
#[serde(deny_unknown_fields)]
pub struct ExternalBody {
    /// Which system.
    system: String,
    /// Its number there.
    number: NumberOrText,
    /// Where to see it.
    url: Option<String>,
    /// The person who says so; the system itself if left out.
    by: Option<String>,
}

async fn act(
    app: &App,
    text: &str,
    units: &Units,
    (by, reason): (String, Option<String>),
    deed: Deed,
) -> Answer {
    let plant = app.plant();
    let completes = matches!(deed, Deed::Complete { .. });
    let done = desk(app, &plant)
        .on_order(number(text)?, &OrderAct { by, reason, deed })
        .await
        .map_err(|e| refused(&plant.zone, "work order", text, e))?;
    if completes && done.changed {
        follow_up(app).await;
    }
    super::http::json(&shown(&plant, units, &done.item).ok_or_else(|| no_such(text))?)
}

/// Approve a draft
///
/// Its plan is checked: what must not meet is kept apart by rinses with checks, the train's last
/// chemical included, nothing is left at the end, and the membrane's limits hold.
#[utoipa::path(
    post, path = "/v1/work-orders/{number}/approve", tag = "acts",
    operation_id = "approveWorkOrder", request_body = PersonBody,
    params(("number" = String, Path, description = "`41` or `WO 41`"), UnitsQuery),
    responses((status = 200, description = "As it now is", body = WorkOrderView))
)]
pub async fn approve(
    State(app): State<App>,
    Path(text): Path<String>,
    ApiQuery(query): ApiQuery<UnitsQuery>,
    ApiJson { value: body, .. }: ApiJson<PersonBody>,
) -> Answer {
    act(&app, &text, &query.units(), (body.by, body.reason), Deed::Approve).await
}

/// Schedule an approved order
#[utoipa::path(
    post, path = "/v1/work-orders/{number}/schedule", tag = "acts",
    operation_id = "scheduleWorkOrder", request_body = ScheduleBody,
    params(("number" = String, Path, description = "`41` or `WO 41`"), UnitsQuery),
    responses((status = 200, description = "As it now is", body = WorkOrderView))
)]
pub async fn schedule(
    State(app): State<App>,
    Path(text): Path<String>,
    ApiQuery(query): ApiQuery<UnitsQuery>,
    ApiJson { value: body, .. }: ApiJson<ScheduleBody>,
) -> Answer {
    let mut faults = Faults::default();
    let taken = window(&mut faults, "/window", &body.window);
    let deed = Deed::Schedule { window: faults.none(taken)? };
    act(&app, &text, &query.units(), (body.by, body.reason), deed).await
}

/// Say that work begins, or goes on after waiting
#[utoipa::path(
    post, path = "/v1/work-orders/{number}/start", tag = "acts", operation_id = "startWorkOrder",
    params(("number" = String, Path, description = "`41` or `WO 41`"), UnitsQuery),
    request_body = StartBody,
    responses((status = 200, description = "As it now is", body = WorkOrderView))
)]
pub async fn start(
    State(app): State<App>,
    Path(text): Path<String>,
    ApiQuery(query): ApiQuery<UnitsQuery>,
    ApiJson { value: body, .. }: ApiJson<StartBody>,
) -> Answer {
    let mut faults = Faults::default();
    let at = faults.optional_time("/at", body.at.as_deref());
    let deed = Deed::Start { at: faults.none(Some(at))? };
    act(&app, &text, &query.units(), (body.by, body.reason), deed).await
}

/// Say that work waits, and why
#[utoipa::path(
    post, path = "/v1/work-orders/{number}/wait", tag = "acts", operation_id = "waitWorkOrder",
    params(("number" = String, Path, description = "`41` or `WO 41`"), UnitsQuery),
    request_body = PersonBody,
    responses((status = 200, description = "As it now is", body = WorkOrderView))
)]
pub async fn wait(
    State(app): State<App>,
    Path(text): Path<String>,
    ApiQuery(query): ApiQuery<UnitsQuery>,
    ApiJson { value: body, .. }: ApiJson<PersonBody>,
) -> Answer {
    act(&app, &text, &query.units(), (body.by, body.reason), Deed::Wait).await
}

/// Say that the work is done, and how: the clean is recorded with it
///
/// Every rinse that keeps chemicals apart, and the last, wants its readings and who read them.
#[utoipa::path(
    post, path = "/v1/work-orders/{number}/complete", tag = "acts",
    operation_id = "completeWorkOrder", request_body = CompleteBody,
    params(("number" = String, Path, description = "`41` or `WO 41`"), UnitsQuery),
    responses((status = 200, description = "As it now is", body = WorkOrderView))
)]
pub async fn complete(
    State(app): State<App>,
    Path(text): Path<String>,
    ApiQuery(query): ApiQuery<UnitsQuery>,
    ApiJson { value: body, .. }: ApiJson<CompleteBody>,
) -> Answer {
    let mut faults = Faults::default();
    let done = &body.actuals;
    let start = faults.time("/actuals/start", &done.start);
    let end = faults.time("/actuals/end", &done.end);
    let steps = steps(&mut faults, "/actuals/steps", &done.steps);
    let waste_m3 = volume(&mut faults, "/actuals/waste", done.waste.as_ref());
    if done.staff_hours.is_some_and(|h| !(0.0..=10_000.0).contains(&h)) {
        faults.at("/actuals/staff_hours", "hours of work are from 0 to 10,000");
    }
    let actuals = start.zip(end).map(|(start, end)| Actuals {
        start,
        end,
        steps,
        waste_m3,
        staff_hours: done.staff_hours,
        notes: done.notes.clone(),
    });
    let deed = Deed::Complete { actuals: faults.none(actuals)? };
    act(&app, &text, &query.units(), (body.by, body.reason), deed).await
}

/// Verify what was done, once its verdict is known
#[utoipa::path(
    post, path = "/v1/work-orders/{number}/verify", tag = "acts", operation_id = "verifyWorkOrder",
    params(("number" = String, Path, description = "`41` or `WO 41`"), UnitsQuery),
    request_body = VerifyBody,
    responses((status = 200, description = "As it now is", body = WorkOrderView))
)]
pub async fn verify(
    State(app): State<App>,
    Path(text): Path<String>,
    ApiQuery(query): ApiQuery<UnitsQuery>,
    ApiJson { value: body, .. }: ApiJson<VerifyBody>,
) -> Answer {
    let mut faults = Faults::default();
    let test = body.integrity_test.as_ref().and_then(|t| {
        let at = faults.time("/integrity_test/at", &t.at)?;
        Some(IntegrityTest { passed: t.passed, at, by: t.by.trim().to_owned() })
    });
    let deed = Deed::Verify { integrity_test: faults.none(Some(test))? };
    act(&app, &text, &query.units(), (body.by, body.reason), deed).await
}

/// Reject a draft, and say why
#[utoipa::path(
    post, path = "/v1/work-orders/{number}/reject", tag = "acts", operation_id = "rejectWorkOrder",
    params(("number" = String, Path, description = "`41` or `WO 41`"), UnitsQuery),
    request_body = PersonBody,
    responses((status = 200, description = "As it now is", body = WorkOrderView))
)]
pub async fn reject(
    State(app): State<App>,
    Path(text): Path<String>,
    ApiQuery(query): ApiQuery<UnitsQuery>,
    ApiJson { value: body, .. }: ApiJson<PersonBody>,
) -> Answer {
    act(&app, &text, &query.units(), (body.by, body.reason), Deed::Reject).await
}

/// Cancel an order, and say why
#[utoipa::path(
    post, path = "/v1/work-orders/{number}/cancel", tag = "acts", operation_id = "cancelWorkOrder",
    params(("number" = String, Path, description = "`41` or `WO 41`"), UnitsQuery),
    request_body = PersonBody,
    responses((status = 200, description = "As it now is", body = WorkOrderView))
)]
pub async fn cancel(
    State(app): State<App>,
    Path(text): Path<String>,
    ApiQuery(query): ApiQuery<UnitsQuery>,
    ApiJson { value: body, .. }: ApiJson<PersonBody>,
) -> Answer {
    act(&app, &text, &query.units(), (body.by, body.reason), Deed::Cancel).await
}

/// Note what the order is called in the maintenance system
#[utoipa::path(
    put, path = "/v1/work-orders/{number}/external", tag = "acts",
    operation_id = "putWorkOrderExternal", request_body = ExternalBody,
    params(("number" = String, Path, description = "`41` or `WO 41`"), UnitsQuery),
    responses((status = 200, description = "As it now is", body = WorkOrderView))
)]
pub async fn external(
    State(app): State<App>,
    Path(text): Path<String>,
    ApiQuery(query): ApiQuery<UnitsQuery>,
    ApiJson { value: body, .. }: ApiJson<ExternalBody>,
) -> Answer {
    let plant = app.plant();
    let mut faults = Faults::default();
    let named = body.number.text();
    for (pointer, text) in [("/system", body.system.trim()), ("/number", named.as_str())] {
        if text.is_empty() {
            faults.at(pointer, format!("`{}` must not be empty", pointer.trim_start_matches('/')));
        }
    }
    let url = body.url.as_deref().map(str::trim).filter(|u| !u.is_empty());
    if url.is_some_and(|u| !u.starts_with("https://") && !u.starts_with("http://")) {
        faults.at("/url", "write an address that begins with https:// or http://");
    }
    let system = body.system.trim().to_owned();
    let external =
        faults.none(Some(External { system, number: named, url: url.map(str::to_owned) }))?;
    let done = desk(&app, &plant)
        .set_external(number(&text)?, &external, body.by.as_deref())
        .await
        .map_err(|e| refused(&plant.zone, "work order", &text, e))?;
    super::http::json(&shown(&plant, &query.units(), &done.item).ok_or_else(|| no_such(&text))?)
}
