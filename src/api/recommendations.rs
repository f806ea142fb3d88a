//! Recommendations, and what people say to them.

use axum::extract::{Path, State};
use axum::http::Uri;
use serde::Deserialize;
use utoipa::{IntoParams, ToSchema};

use super::App;
use super::acts::{desk, refused, wanted};
use super::http::{
    Answer, ApiJson, ApiQuery, Cursor, Failure, LIST_MOST, LIST_USUAL, json, limit, linked,
    next_address,
};
use super::plant::UnitsQuery;
use super::posted::Faults;
use super::trains::train_of;
use crate::advice::{Act, Recommendation};
use crate::answers::{Page, Problem, RecommendationView, UnitSystem, Units, recommendation_view};
use crate::plant::Plant;
use crate::store::{ItemFilter, ItemKind};

const LIST: &str = "recommendations";

/// Open, closed or all.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq, Deserialize, ToSchema)]
#[serde(rename_all = "snake_case")]
pub enum OpenOrClosed {
    /// Open ones.
    #[default]
    Open,
    /// Closed ones.
    Closed,
    /// Both.
    All,
}

/// Which recommendations.
#[derive(Debug, Deserialize, IntoParams)]
#[into_params(parameter_in = Query)]
pub struct RecommendationsQuery {
    /// `open` (if left out), `closed` or `all`.
    #[param(inline)]
    state: Option<OpenOrClosed>,
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

/// What a person says to a recommendation.
#[derive(Clone, Debug, Deserialize, ToSchema)]
#[serde(deny_unknown_fields)]
pub struct DecisionBody {
    /// The person who says it.
    by: String,
    /// Why; required to defer and to decline.
    reason: Option<String>,
    /// Until when, to defer.
    #[schema(format = DateTime)]
    until: Option<String>,
}

fn shown(plant: &Plant, units: &Units, r: &Recommendation) -> Option<RecommendationView> {
    // Of a train that the plant file no longer holds nothing can be shown.
    plant.train(&r.train).map(|train| recommendation_view(plant, train, units, r))
}

fn no_such(id: &str) -> Failure {
    Problem::no_such("recommendation", id, []).into()
}

/// Recommendations, newest first
#[utoipa::path(
    get, path = "/v1/recommendations", tag = "answers", operation_id = "listRecommendations",
    params(RecommendationsQuery),
    responses((status = 200, description = "A page of recommendations", body = Page<RecommendationView>))
)]
pub async fn list(
    State(app): State<App>,
    uri: Uri,
    ApiQuery(query): ApiQuery<RecommendationsQuery>,
) -> Answer {
    let plant = app.plant();
    let train = query.train.as_deref().map(|t| train_of(&plant, t)).transpose()?;
    let n = limit(query.limit, LIST_USUAL, LIST_MOST)?;
    let after = Cursor::parse(LIST, query.cursor.as_deref())?;
    let filter = ItemFilter {
        open: match query.state.unwrap_or_default() {
            OpenOrClosed::Open => Some(true),
            OpenOrClosed::Closed => Some(false),
            OpenOrClosed::All => None,
        },
        train: train.map(|t| t.id.clone()),
        after: after.map(|c| c.number()).transpose()?,
        ..ItemFilter::default()
    };
    let there = |r: &Recommendation| plant.train(&r.train).is_some();
    let (found, more) =
        wanted::<Recommendation>(&app, &plant, ItemKind::Recommendation, &filter, n, there).await?;
    let last = found.last().filter(|_| more);
    let next = last.map(|(at, _)| next_address(&uri, &Cursor::text(LIST, &at.to_string())));
    let units = Units::new(query.units.unwrap_or_default());
    let items = found.iter().filter_map(|(_, r)| shown(&plant, &units, r)).collect();
    let page = Page { items, next };
    Ok(linked(json(&page)?, page.next.as_deref()))
}

/// One recommendation, with what people said to it
#[utoipa::path(
    get, path = "/v1/recommendations/{id}", tag = "answers", operation_id = "getRecommendation",
    params(("id" = String, Path, description = "Id of the recommendation"), UnitsQuery),
    responses((status = 200, description = "The recommendation", body = RecommendationView))
)]
pub async fn one(
    State(app): State<App>,
    Path(id): Path<String>,
    ApiQuery(query): ApiQuery<UnitsQuery>,
) -> Answer {
    let plant = app.plant();
    let found: Option<Recommendation> =
        app.store.item(&plant.id, ItemKind::Recommendation, &id).await?;
    let view = found.and_then(|r| shown(&plant, &query.units(), &r));
    json(&view.ok_or_else(|| no_such(&id))?)
}

async fn decide(app: &App, id: &str, act: Act, body: &DecisionBody, units: &Units) -> Answer {
    let plant = app.plant();
    let mut faults = Faults::default();
    let until = faults.optional_time("/until", body.until.as_deref());
    let until = faults.none(Some(until))?;
    let done = desk(app, &plant)
        .decide(id, act, &body.by, body.reason.as_deref(), until)
        .await
        .map_err(|e| refused(&plant.zone, "recommendation", id, e))?;
    json(&shown(&plant, units, &done.item).ok_or_else(|| no_such(id))?)
}

/// Accept a recommendation: it stays open, and nothing is approved by it
#[utoipa::path(
    post, path = "/v1/recommendations/{id}/accept", tag = "acts",
    operation_id = "acceptRecommendation", request_body = DecisionBody,
    params(("id" = String, Path, description = "Id of the recommendation"), UnitsQuery),
    responses((status = 200, description = "As it now is", body = RecommendationView))
)]
pub async fn accept(
    State(app): State<App>,
    Path(id): Path<String>,
    ApiQuery(query): ApiQuery<UnitsQuery>,
    body: ApiJson<DecisionBody>,
) -> Answer {
    decide(&app, &id, Act::Accept, &body.value, &query.units()).await
}

/// Defer a recommendation: it stays open, and silent until then
#[utoipa::path(
    post, path = "/v1/recommendations/{id}/defer", tag = "acts",
    operation_id = "deferRecommendation", request_body = DecisionBody,
    params(("id" = String, Path, description = "Id of the recommendation"), UnitsQuery),
    responses((status = 200, description = "As it now is", body = RecommendationView))
)]
pub async fn defer(
    State(app): State<App>,
    Path(id): Path<String>,
    ApiQuery(query): ApiQuery<UnitsQuery>,
    body: ApiJson<DecisionBody>,
) -> Answer {
    decide(&app, &id, Act::Defer, &body.value, &query.units()).await
}

/// Decline a recommendation: it is closed, and not raised again for seven days unless its
/// urgency rises
#[utoipa::path(
    post, path = "/v1/recommendations/{id}/decline", tag = "acts",
    operation_id = "declineRecommendation", request_body = DecisionBody,
    params(("id" = String, Path, description = "Id of the recommendation"), UnitsQuery),
    responses((status = 200, description = "As it now is", body = RecommendationView))
)]
pub async fn decline(
    State(app): State<App>,
    Path(id): Path<String>,
    ApiQuery(query): ApiQuery<UnitsQuery>,
    body: ApiJson<DecisionBody>,
) -> Answer {
    decide(&app, &id, Act::Decline, &body.value, &query.units()).await
}
