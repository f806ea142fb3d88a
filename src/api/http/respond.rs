//! How answers are written.

use axum::http::header::{CONTENT_DISPOSITION, CONTENT_TYPE, LINK};
use axum::http::{HeaderValue, StatusCode};
use axum::response::{IntoResponse, Response};
use serde::Serialize;

use crate::answers::ProblemKind;

use super::{Answer, Failure};

/// A view as JSON, with 200.
///
/// # Errors
/// If it cannot be written, which no view of ours should come to.
pub fn json<T: Serialize>(view: &T) -> Answer {
    json_of(StatusCode::OK, view)
}

/// A view as JSON.
///
/// # Errors
/// If it cannot be written.
pub fn json_of<T: Serialize>(status: StatusCode, view: &T) -> Answer {
    let body = serde_json::to_vec(view).map_err(|error| {
        tracing::error!(%error, "an answer could not be written");
        Failure::from(ProblemKind::Internal.problem("The answer could not be written."))
    })?;
    Ok((status, [(CONTENT_TYPE, "application/json")], body).into_response())
}

/// The same with the address of the next page in a `Link` header, RFC 8288.
pub fn linked(mut response: Response, next: Option<&str>) -> Response {
    let link = next.and_then(|n| HeaderValue::from_str(&format!("<{n}>; rel=\"next\"")).ok());
    if let Some(link) = link {
        response.headers_mut().insert(LINK, link);
    }
    response
}

/// A table as CSV, to be kept under that name.
pub fn csv(file: &str, body: String) -> Response {
    let plain = |c: &char| c.is_ascii_alphanumeric() || "-_.".contains(*c);
    let file: String = file.chars().filter(plain).collect();
    let headers = [
        (CONTENT_TYPE, "text/csv; charset=utf-8; header=present".to_owned()),
        (CONTENT_DISPOSITION, format!("attachment; filename=\"{file}\"")),
    ];
    (headers, body).into_response()
}

/// Plain text, for people.
pub fn text(body: String) -> Response {
    ([(CONTENT_TYPE, "text/plain; charset=utf-8")], body).into_response()
}
