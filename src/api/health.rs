//! Whether the service runs, and whether it can do its work.

use axum::extract::State;
use axum::response::Response;

use super::App;
use super::http::{Answer, text};

/// Whether the service runs
#[utoipa::path(
    get, path = "/live", tag = "service", operation_id = "getLive",
    responses((status = 200, description = "It runs", body = String, content_type = "text/plain"))
)]
pub async fn live() -> Response {
    text("live\n".to_owned())
}

/// Whether the service can do its work
#[utoipa::path(
    get, path = "/ready", tag = "service", operation_id = "getReady",
    responses((status = 200, description = "It can", body = String, content_type = "text/plain"))
)]
pub async fn ready(State(app): State<App>) -> Answer {
    app.store.check(app.clock.now()).await?;
    Ok(text("ready\n".to_owned()))
}
