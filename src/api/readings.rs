//! Readings posted one by one.

use axum::extract::State;
use serde::Deserialize;
use utoipa::IntoParams;

use super::App;
use super::http::{Answer, ApiJson, ApiQuery};
use super::sources::{answer, check_complete_to, or_known, source_of};
use crate::answers::ReceiptView;
use crate::base::SourceId;
use crate::ingest::{self, PostedReadings};

/// What is said of the readings as a whole.
#[derive(Debug, Deserialize, IntoParams)]
#[into_params(parameter_in = Query)]
pub struct ReadingsQuery {
    /// For sources that export changes only: data are complete up to this time.
    complete_to: Option<String>,
}

/// Take readings
///
/// Each is taken or rejected by itself; the receipt says which.
#[utoipa::path(
    post, path = "/v1/readings", tag = "doors in", operation_id = "postReadings",
    params(ReadingsQuery), request_body = PostedReadings,
    responses(
        (status = 201, description = "Taken", body = ReceiptView,
         headers(("Location" = String, description = "The receipt"))),
        (status = 200, description = "The same body was taken before; its first receipt", body = ReceiptView),
    )
)]
pub async fn post(
    State(app): State<App>,
    ApiQuery(query): ApiQuery<ReadingsQuery>,
    body: ApiJson<PostedReadings>,
) -> Answer {
    let plant = app.plant();
    let named = body.value.source.as_deref();
    let default = match named {
        Some(name) => Some(source_of(&plant, Some(name))?),
        None if query.complete_to.is_some() => Some(source_of(&plant, None)?),
        None => None,
    };
    if let Some(source) = default {
        check_complete_to(source, query.complete_to.as_deref())?;
    }
    let digest = ingest::digest(body.bytes.as_ref()).map_err(ingest::AcceptError::Read);
    let digest = digest.map_err(super::sources::refused)?;
    let now = app.clock.now();
    let taken =
        ingest::accept_readings(&app.store, &plant, default, &body.value, &digest, now).await;
    // A post that names no source is kept under the first one.
    let first = || plant.sources.first().map_or_else(|| SourceId::new(""), |s| s.id.clone());
    let source = default.map_or_else(first, |s| s.id.clone());
    let accepted = or_known(&app, &plant, &source, &digest, taken).await?;
    answer(&app, &plant, accepted).await
}
