//! How fouled a train is.

use axum::extract::{Path, State};

use super::App;
use super::http::{Answer, ApiQuery, Failure, json};
use super::plant::UnitsQuery;
use super::trains::train_of;
use crate::answers::{FoulingCase, FoulingView, ProblemKind, fouling_view};
use crate::base::{DAY_US, Span};
use crate::work::train_state;

/// More cycles than a day has: one every minute and a half.
const CYCLES_OF_A_DAY: u32 = 1_000;

/// How fouled a train is, in what way, how fast, and until when
#[utoipa::path(
    get, path = "/v1/trains/{train}/fouling", tag = "answers", operation_id = "getFouling",
    params(("train" = String, Path, description = "Id of the train"), UnitsQuery),
    responses((status = 200, description = "Its fouling", body = FoulingView))
)]
pub async fn one(
    State(app): State<App>,
    Path(id): Path<String>,
    ApiQuery(query): ApiQuery<UnitsQuery>,
) -> Answer {
    let plant = app.plant();
    let train = train_of(&plant, &id)?;
    let state = train_state(&app.store, &plant, train).await?;
    let standing = state.standing.as_ref().ok_or_else(|| {
        let detail = format!(
            "Nothing is known of `{id}` yet: there are no readings of it. Post an export first."
        );
        Failure::from(ProblemKind::NotFound.problem(detail))
    })?;
    let day = Span::new(standing.as_of.plus(-DAY_US), standing.as_of);
    let cycles = app.store.cycles(&plant.id, &train.id, day, CYCLES_OF_A_DAY).await?;
    let case = FoulingCase {
        plant: &plant,
        site: &state.site,
        standing,
        assessment: state.assessment.as_ref(),
        runs: &state.runs,
        cycles: &cycles,
    };
    json(&fouling_view(&query.units(), &case))
}
