//! Floor 12: JSON over HTTP. One file a resource; [`operations`] and [`uploads`] are the list
//! of what there is. What every request has in common is in `http`: what may come in, how
//! problems are said, pages of lists, entity tags.

mod acts;
mod alarms;
mod cleanings;
mod cycles;
mod exports;
mod fouling;
mod health;
mod http;
mod index;
mod openapi;
mod order_acts;
mod permeability;
mod plant;
mod posted;
mod readings;
mod receipts;
mod recommendations;
mod sources;
mod spool;
mod trains;
mod work_orders;

use std::sync::Arc;
use std::time::Duration;

use axum::Router;
use axum::extract::DefaultBodyLimit;
use axum::http::StatusCode;
use axum::middleware::from_fn;
use tower_http::catch_panic::CatchPanicLayer;
use tower_http::decompression::RequestDecompressionLayer;
use tower_http::limit::RequestBodyLimitLayer;
use tower_http::timeout::TimeoutLayer;
use utoipa_axum::router::OpenApiRouter;
use utoipa_axum::routes;

use crate::plant::Plant;
use crate::store::Store;
use crate::work::{WallClock, Worker};

pub use http::{EXPORT_BYTES_MAX, JSON_BYTES_MAX};

/// An answer may take this long.
const ANSWER_WITHIN: Duration = Duration::from_secs(30);
/// An upload may take this long: a year's file over a slow line, and its work.
const UPLOAD_WITHIN: Duration = Duration::from_secs(600);

/// What handlers work with. Clones share it.
#[derive(Clone, Debug)]
pub struct App {
    /// The database.
    pub store: Store,
    /// The wall clock.
    pub clock: WallClock,
    /// Works what deliveries and recorded facts leave to be done, one at a time.
    pub worker: Worker,
}

impl App {
    /// An app on the store, plant and clock of a worker.
    pub fn new(worker: Worker) -> Self {
        Self { store: worker.store().clone(), clock: worker.clock(), worker }
    }
    /// The plant as its file describes it now. Take it once a request.
    pub fn plant(&self) -> Arc<Plant> {
        self.worker.plant()
    }
}

/// What is answered soon.
fn operations() -> OpenApiRouter<App> {
    OpenApiRouter::new()
        .routes(routes!(receipts::list))
        .routes(routes!(receipts::one))
        .routes(routes!(plant::plant))
        .routes(routes!(trains::list))
        .routes(routes!(trains::one))
        .routes(routes!(permeability::series))
        .routes(routes!(cycles::list))
        .routes(routes!(fouling::one))
        .routes(routes!(cleanings::list, cleanings::post))
        .routes(routes!(cleanings::one))
        .routes(routes!(recommendations::list))
        .routes(routes!(recommendations::one))
        .routes(routes!(recommendations::accept))
        .routes(routes!(recommendations::defer))
        .routes(routes!(recommendations::decline))
        .routes(routes!(alarms::list))
        .routes(routes!(alarms::one))
        .routes(routes!(alarms::acknowledge))
        .routes(routes!(alarms::shelve))
        .routes(routes!(work_orders::list, work_orders::post))
        .routes(routes!(work_orders::one))
        .routes(routes!(order_acts::approve))
        .routes(routes!(order_acts::schedule))
        .routes(routes!(order_acts::start))
        .routes(routes!(order_acts::wait))
        .routes(routes!(order_acts::complete))
        .routes(routes!(order_acts::verify))
        .routes(routes!(order_acts::reject))
        .routes(routes!(order_acts::cancel))
        .routes(routes!(order_acts::external))
        .routes(routes!(index::index))
        .routes(routes!(health::live))
        .routes(routes!(health::ready))
        .routes(routes!(openapi::document))
}

/// What takes files.
fn uploads() -> OpenApiRouter<App> {
    OpenApiRouter::new()
        .routes(routes!(exports::post, exports::put))
        .routes(routes!(readings::post))
}

/// All routes, with what surrounds them.
pub fn router(app: App) -> Router {
    let within = |limit| TimeoutLayer::with_status_code(StatusCode::REQUEST_TIMEOUT, limit);
    let quick =
        operations().layer(DefaultBodyLimit::max(JSON_BYTES_MAX)).layer(within(ANSWER_WITHIN));
    let slow = uploads().layer(DefaultBodyLimit::disable()).layer(within(UPLOAD_WITHIN));
    let (routes, described) = openapi::described(quick.merge(slow)).split_for_parts();
    let document = openapi::Document::of(described);
    // The last layer is the outermost.
    let inner = routes
        .fallback(http::nothing_here)
        .layer(from_fn(http::conditional))
        .layer(RequestDecompressionLayer::new())
        .layer(RequestBodyLimitLayer::new(EXPORT_BYTES_MAX))
        .layer(axum::Extension(document))
        .layer(CatchPanicLayer::custom(http::panicked))
        .layer(from_fn(http::routed))
        .with_state(app);
    // Around the router as a whole: it says itself which methods a path takes.
    Router::new()
        .fallback_service(inner)
        .layer(from_fn(http::problems))
        .layer(from_fn(http::observed))
}
