//! The plant.

use axum::extract::State;
use serde::Deserialize;
use utoipa::IntoParams;

use super::App;
use super::http::{Answer, ApiQuery, json};
use crate::answers::{PlantView, UnitSystem, Units, plant_view};

/// In which units to answer.
#[derive(Debug, Deserialize, IntoParams)]
#[into_params(parameter_in = Query)]
pub struct UnitsQuery {
    /// `si` (bar, °C, L/(m²·h)) or `us` (psi, °F, gfd).
    #[param(inline)]
    units: Option<UnitSystem>,
}

impl UnitsQuery {
    /// How quantities are shown.
    pub fn units(&self) -> Units {
        Units::new(self.units.unwrap_or_default())
    }
}

/// The plant, as its file describes it
#[utoipa::path(
    get, path = "/v1/plant", tag = "answers", operation_id = "getPlant", params(UnitsQuery),
    responses((status = 200, description = "The plant", body = PlantView))
)]
pub async fn plant(State(app): State<App>, ApiQuery(query): ApiQuery<UnitsQuery>) -> Answer {
    json(&plant_view(&app.plant(), &query.units(), app.clock.now()))
}
