//! The outermost layer: whatever is not a success leaves as a problem after RFC 9457, as a
//! small page where a person's browser asked for a page.

use std::any::Any;

use axum::Json;
use axum::extract::Request;
use axum::http::header::{ALLOW, CONTENT_LENGTH, CONTENT_TYPE};
use axum::http::{HeaderMap, HeaderValue, StatusCode, Uri};
use axum::middleware::Next;
use axum::response::{Html, IntoResponse, Response};

use super::{Failure, prefers_html};
use crate::answers::{Problem, ProblemKind};

/// Media type of problems.
pub const PROBLEM_JSON: &str = "application/problem+json";
/// What programs ask. Everything else is a page's address.
const PROGRAMS: [&str; 5] = ["/v1", "/live", "/ready", "/metrics", "/openapi.json"];

/// Turns every answer that is no success into a problem.
pub async fn problems(request: Request, next: Next) -> Response {
    let path = request.uri().path().to_owned();
    let as_page = is_page(&path) && prefers_html(request.headers());
    let mut response = next.run(request).await;
    let status = response.status();
    let done = response.headers().get(CONTENT_TYPE).is_some_and(|t| t == PROBLEM_JSON);
    if done || !(status.is_client_error() || status.is_server_error()) {
        return response;
    }
    let problem = match response.extensions_mut().remove::<Problem>() {
        Some(problem) => problem,
        None => unspoken(status, response.headers()),
    };
    write(problem.with_instance(path), response, as_page)
}

fn is_page(path: &str) -> bool {
    !PROGRAMS
        .iter()
        .any(|p| path.strip_prefix(p).is_some_and(|r| r.is_empty() || r.starts_with('/')))
}

/// A problem for an answer that arose outside of the handlers.
fn unspoken(status: StatusCode, headers: &HeaderMap) -> Problem {
    let kind = ProblemKind::of_status(status.as_u16());
    let allowed = headers.get(ALLOW).and_then(|v| v.to_str().ok()).unwrap_or("");
    let detail = match status {
        StatusCode::METHOD_NOT_ALLOWED => format!("Use one of: {}.", allowed.replace(',', ", ")),
        StatusCode::PAYLOAD_TOO_LARGE => {
            format!("At most {} bytes are taken; send it in parts.", super::EXPORT_BYTES_MAX)
        }
        StatusCode::UNSUPPORTED_MEDIA_TYPE => {
            "The body's Content-Encoding is not known here; send it plain, or as gzip or zstd."
                .to_owned()
        }
        StatusCode::REQUEST_TIMEOUT => {
            "It was given up. Ask for less at once, or try again in a moment.".to_owned()
        }
        s if s.is_server_error() => {
            "The fault is in the service, and its log says more; try again in a moment.".to_owned()
        }
        _ => "The address or the request cannot be read; /openapi.json says what there is."
            .to_owned(),
    };
    let mut problem = kind.problem(detail);
    problem.status = status.as_u16();
    problem
}

fn write(problem: Problem, old: Response, as_page: bool) -> Response {
    let status = old.status();
    let mut headers = old.headers().clone();
    headers.remove(CONTENT_LENGTH);
    headers.remove(CONTENT_TYPE);
    let mut response = if as_page {
        Html(page(&problem)).into_response()
    } else {
        let mut response = Json(&problem).into_response();
        response.headers_mut().insert(CONTENT_TYPE, HeaderValue::from_static(PROBLEM_JSON));
        response
    };
    *response.status_mut() = status;
    response.headers_mut().extend(headers);
    response
}

fn page(problem: &Problem) -> String {
    format!(
        "<!doctype html>\n<html lang=\"en\"><meta charset=\"utf-8\"><title>{title}</title>\n\
         <h1>{title}</h1>\n<p>{detail}</p>\n<p>{status}: {instance}</p>\n\
         <p><a href=\"/\">What there is</a></p>\n</html>\n",
        title = escaped(&problem.title),
        detail = escaped(&problem.detail),
        status = problem.status,
        instance = escaped(problem.instance.as_deref().unwrap_or("")),
    )
}

/// Text as it may stand in HTML.
pub fn escaped(text: &str) -> String {
    text.replace('&', "&amp;").replace('<', "&lt;").replace('>', "&gt;").replace('"', "&quot;")
}

/// An address where nothing is.
pub async fn nothing_here(uri: Uri) -> Failure {
    ProblemKind::NotFound
        .problem(format!("There is nothing at {}; /openapi.json says what there is.", uri.path()))
        .into()
}

/// What a handler that panicked answers.
pub fn panicked(cause: Box<dyn Any + Send + 'static>) -> Response {
    let words = cause
        .downcast_ref::<String>()
        .map(String::as_str)
        .or_else(|| cause.downcast_ref::<&str>().copied())
        .unwrap_or("no words");
    tracing::error!(panic = words, "a handler panicked");
    StatusCode::INTERNAL_SERVER_ERROR.into_response()
}
