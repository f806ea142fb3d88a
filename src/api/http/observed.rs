//! A number for every request, and one line in the log. Never a body, never a query.

use axum::extract::{MatchedPath, Request};
use axum::http::{HeaderName, HeaderValue};
use axum::middleware::Next;
use axum::response::Response;
use tracing::Instrument;
use tracing::field::Empty;

use crate::store::new_id;

const REQUEST_ID: HeaderName = HeaderName::from_static("x-request-id");
const REQUEST_ID_LONGEST: usize = 100;

/// Gives the request the id that it came with, or a new one, and says what became of it.
pub async fn observed(request: Request, next: Next) -> Response {
    let begun = std::time::Instant::now();
    let id = request_id(&request);
    let method = request.method().clone();
    let span = tracing::info_span!("request", request_id = %id, %method, route = Empty);
    let mut response = next.run(request).instrument(span.clone()).await;
    if let Some(route) = response.extensions().get::<MatchedPath>() {
        span.record("route", route.as_str());
    }
    let latency_ms = u64::try_from(begun.elapsed().as_millis()).unwrap_or(u64::MAX);
    let status = response.status().as_u16();
    span.in_scope(|| tracing::info!(status, latency_ms, "answered"));
    if let Ok(id) = HeaderValue::from_str(&id) {
        response.headers_mut().insert(REQUEST_ID, id);
    }
    response
}

/// Leaves the route, which only what is inside of the router knows, on the answer.
pub async fn routed(route: Option<MatchedPath>, request: Request, next: Next) -> Response {
    let mut response = next.run(request).await;
    if let Some(route) = route {
        response.extensions_mut().insert(route);
    }
    response
}

fn request_id(request: &Request) -> String {
    let given = request.headers().get(REQUEST_ID).and_then(|v| v.to_str().ok()).unwrap_or("");
    let plain = |c: char| c.is_ascii_alphanumeric() || "-_.:".contains(c);
    let usable = !given.is_empty() && given.len() <= REQUEST_ID_LONGEST && given.chars().all(plain);
    if usable { given.to_owned() } else { new_id() }
}
