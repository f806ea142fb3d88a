//! Whether the service runs, and whether it can do its work.

use axum::Json;
use axum::extract::State;
use axum::http::header::CONTENT_TYPE;
use axum::http::{HeaderValue, StatusCode};
use axum::response::{IntoResponse, Response};
use serde::Serialize;
use utoipa::ToSchema;

use super::App;
use super::http::{Answer, ApiQuery, NoQuery, PROBLEM_JSON, chain, json, text};
use crate::answers::{PlantTime, Problem, ProblemKind, duration_text};
use crate::base::{Instant, zone_data_version};
use crate::plant::Plant;
use crate::store::{ReceiptFilter, StoreError};

/// Whether the service can do its work.
#[derive(Clone, Debug, PartialEq, Serialize, ToSchema)]
pub struct ReadyView {
    /// Whether all checks passed.
    pub ready: bool,
    /// What was looked at.
    pub checks: Vec<CheckView>,
    /// Version of the zone data in use.
    pub zone_data: String,
    /// When each source last delivered; nothing of this makes the service unready.
    pub sources: Vec<LastExportView>,
}

/// One thing that was looked at.
#[derive(Clone, Debug, PartialEq, Serialize, ToSchema)]
pub struct CheckView {
    /// `database`, `migrations` or `disk`.
    pub name: String,
    /// `ok`, `failed` or `not_measured`.
    pub status: String,
    /// The same in words.
    pub detail: String,
}

/// When a source last delivered.
#[derive(Clone, Debug, PartialEq, Serialize, ToSchema)]
pub struct LastExportView {
    /// Its id.
    pub source: String,
    /// When its newest delivery was received; null without any.
    pub last_export: Option<PlantTime>,
    /// How long ago, ISO 8601.
    pub age: Option<String>,
    /// How often it should.
    pub expected_every: String,
}

/// The same, where the service is not ready: a problem with the fields of the view.
#[derive(Debug, Serialize)]
struct NotReady {
    #[serde(flatten)]
    problem: Problem,
    #[serde(flatten)]
    view: ReadyView,
}

/// Whether the service runs
#[utoipa::path(
    get, path = "/live", tag = "service", operation_id = "getLive",
    responses((status = 200, description = "It runs", body = String, content_type = "text/plain"))
)]
pub async fn live(_: ApiQuery<NoQuery>) -> Response {
    text("live\n".to_owned())
}

/// Whether the service can do its work
#[utoipa::path(
    get, path = "/ready", tag = "service", operation_id = "getReady",
    responses(
        (status = 200, description = "It can", body = ReadyView),
        (status = 503, description = "It cannot: a problem that also has these fields",
         body = ReadyView, content_type = "application/problem+json"),
    )
)]
pub async fn ready(State(app): State<App>, _: ApiQuery<NoQuery>) -> Answer {
    let (plant, now) = (app.plant(), app.clock.now());
    let (database, migration) = (app.store.check(now).await, app.store.migration().await);
    let sources = last_exports(&app, &plant, now).await.unwrap_or_default();
    let ready = database.is_ok() && migration.is_ok();
    let checks = vec![
        check("database", database.map(|()| "It was read and written just now.".to_owned())),
        check("migrations", migration.map(|m| format!("The newest is {m}."))),
        CheckView {
            name: "disk".to_owned(),
            status: "not_measured".to_owned(),
            detail: "Free space is not measured; the database check writes.".to_owned(),
        },
    ];
    let view = ReadyView { ready, checks, zone_data: zone_data_version().to_owned(), sources };
    if ready { json(&view) } else { Ok(not_ready(view)) }
}

fn check(name: &str, found: Result<String, StoreError>) -> CheckView {
    let (status, detail) = match found {
        Ok(detail) => ("ok", detail),
        Err(error) => {
            tracing::error!(check = name, error = %chain(&error), "the service is not ready");
            ("failed", format!("The store says: {error}."))
        }
    };
    CheckView { name: name.to_owned(), status: status.to_owned(), detail }
}

async fn last_exports(
    app: &App,
    plant: &Plant,
    now: Instant,
) -> Result<Vec<LastExportView>, StoreError> {
    let mut out = Vec::with_capacity(plant.sources.len());
    for source in &plant.sources {
        let filter =
            ReceiptFilter { source: Some(source.id.clone()), limit: 1, ..Default::default() };
        let last = app.store.receipts(&plant.id, &filter).await?.pop().map(|r| r.received);
        out.push(LastExportView {
            source: source.id.to_string(),
            last_export: PlantTime::optional(&plant.zone, last),
            age: last.map(|t| duration_text(now.since(t))),
            expected_every: duration_text(source.expected_every_us),
        });
    }
    Ok(out)
}

fn not_ready(view: ReadyView) -> Response {
    let problem = ProblemKind::Unavailable
        .problem("A check failed; `checks` says which, and what to do.")
        .with_instance("/ready");
    let mut response = Json(NotReady { problem, view }).into_response();
    *response.status_mut() = StatusCode::SERVICE_UNAVAILABLE;
    response.headers_mut().insert(CONTENT_TYPE, HeaderValue::from_static(PROBLEM_JSON));
    response
}
