//! Trains and what stands for them.

use std::collections::BTreeMap;

use axum::extract::{Path, State};
use axum::http::Uri;
use serde::{Deserialize, Serialize};
use utoipa::{IntoParams, ToSchema};

use super::App;
use super::http::{
    Answer, ApiQuery, Cursor, Failure, LIST_MOST, LIST_USUAL, json, limit, linked, next_address,
};
use super::plant::UnitsQuery;
use crate::advice::Recommendation;
use crate::answers::{
    Page, Problem, TrainCase, TrainView, UnitSystem, Units, clean_by_order, train_view,
};
use crate::base::{Instant, TrainId};
use crate::plant::{Plant, Train};
use crate::store::{ItemFilter, ItemKind, StoreError};
use crate::work::{TrainState, stale_after_us, train_state, train_states};

const LIST: &str = "trains";
/// More than this many are not open at once in any plant.
const OPEN_MOST: u32 = 10_000;

/// An order of trains.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq, Serialize, Deserialize, ToSchema)]
#[serde(rename_all = "snake_case")]
pub enum TrainOrder {
    /// As the plant file has them.
    #[default]
    Plant,
    /// The one to clean first comes first.
    CleanBy,
}

/// Which trains, and how.
#[derive(Debug, Deserialize, IntoParams)]
#[into_params(parameter_in = Query)]
pub struct TrainsQuery {
    /// `plant`, or `clean_by`: the one to clean first comes first.
    #[param(inline)]
    order: Option<TrainOrder>,
    /// `si` or `us`.
    #[param(inline)]
    units: Option<UnitSystem>,
    /// At most so many, up to 1,000; 100 if left out.
    #[param(minimum = 1, maximum = 1000)]
    limit: Option<u32>,
    /// From `next` of the page before.
    cursor: Option<String>,
}

/// The train of that id, or a problem that names those there are.
pub fn train_of<'a>(plant: &'a Plant, id: &str) -> Result<&'a Train, Failure> {
    plant.train(&TrainId::new(id)).ok_or_else(|| {
        Problem::no_such("train", id, plant.trains.iter().map(|t| t.id.as_str())).into()
    })
}

/// Open recommendations by train.
async fn open_by_train(
    app: &App,
    plant: &Plant,
    train: Option<&TrainId>,
) -> Result<BTreeMap<TrainId, Vec<Recommendation>>, StoreError> {
    let filter = ItemFilter {
        open: Some(true),
        train: train.cloned(),
        limit: OPEN_MOST,
        ..ItemFilter::default()
    };
    let kind = ItemKind::Recommendation;
    let mut out: BTreeMap<TrainId, Vec<Recommendation>> = BTreeMap::new();
    for (_, r) in app.store.items::<Recommendation>(&plant.id, kind, &filter).await? {
        out.entry(r.train.clone()).or_default().push(r);
    }
    Ok(out)
}

fn shown(
    units: &Units,
    plant: &Plant,
    state: &TrainState<'_>,
    open: &BTreeMap<TrainId, Vec<Recommendation>>,
    wall: Instant,
) -> TrainView {
    let train = state.site.train;
    let case = TrainCase {
        plant,
        site: &state.site,
        standing: state.standing.as_ref(),
        open: open.get(&train.id).map_or(&[], Vec::as_slice),
        now: state.now.as_ref(),
        wall,
        stale_after_us: stale_after_us(plant, train),
        unknown_codes: &state.unknown_codes,
    };
    train_view(units, &case)
}

/// All trains in an order.
pub async fn shown_all(
    app: &App,
    plant: &Plant,
    units: &Units,
    order: TrainOrder,
) -> Result<Vec<TrainView>, StoreError> {
    let open = open_by_train(app, plant, None).await?;
    let mut states = train_states(&app.store, plant).await?;
    if order == TrainOrder::CleanBy {
        states.sort_by_key(|s| clean_by_order(s.standing.as_ref()));
    }
    let wall = app.clock.now();
    Ok(states.iter().map(|s| shown(units, plant, s, &open, wall)).collect())
}

/// Trains and what stands for them
#[utoipa::path(
    get, path = "/v1/trains", tag = "answers", operation_id = "listTrains", params(TrainsQuery),
    responses((status = 200, description = "A page of trains", body = Page<TrainView>))
)]
pub async fn list(
    State(app): State<App>,
    uri: Uri,
    ApiQuery(query): ApiQuery<TrainsQuery>,
) -> Answer {
    let plant = app.plant();
    let n = limit(query.limit, LIST_USUAL, LIST_MOST)? as usize;
    let after = Cursor::parse(LIST, query.cursor.as_deref())?;
    let units = Units::new(query.units.unwrap_or_default());
    let mut items = shown_all(&app, &plant, &units, query.order.unwrap_or_default()).await?;
    if let Some(after) = after {
        let place = items.iter().position(|t| t.id == after.place).map_or(0, |i| i + 1);
        items.drain(..place);
    }
    let more = items.len() > n;
    items.truncate(n);
    let last = items.last().filter(|_| more);
    let next = last.map(|t| next_address(&uri, &Cursor::text(LIST, &t.id)));
    let page = Page { items, next };
    Ok(linked(json(&page)?, page.next.as_deref()))
}

/// One train and what stands for it
#[utoipa::path(
    get, path = "/v1/trains/{train}", tag = "answers", operation_id = "getTrain",
    params(("train" = String, Path, description = "Id of the train"), UnitsQuery),
    responses((status = 200, description = "The train", body = TrainView))
)]
pub async fn one(
    State(app): State<App>,
    Path(id): Path<String>,
    ApiQuery(query): ApiQuery<UnitsQuery>,
) -> Answer {
    let plant = app.plant();
    let train = train_of(&plant, &id)?;
    let open = open_by_train(&app, &plant, Some(&train.id)).await?;
    let state = train_state(&app.store, &plant, train).await?;
    json(&shown(&query.units(), &plant, &state, &open, app.clock.now()))
}
