//! Strong entity tags on whatever is read, RFC 9110 sections 8.8.3 and 13.1.2.

use axum::body::{Body, Bytes, to_bytes};
use axum::extract::Request;
use axum::http::header::{CONTENT_LENGTH, CONTENT_TYPE, ETAG, IF_NONE_MATCH, VARY};
use axum::http::{HeaderValue, Method, StatusCode};
use axum::middleware::Next;
use axum::response::{IntoResponse, Response};
use sha2::{Digest, Sha256};

/// Tags what is read by its content, and answers 304 where the client has it.
pub async fn conditional(mut request: Request, next: Next) -> Response {
    if !matches!(*request.method(), Method::GET | Method::HEAD) {
        return next.run(request).await;
    }
    // A HEAD has the tag of its GET. The server leaves the body away.
    *request.method_mut() = Method::GET;
    let known: Vec<HeaderValue> =
        request.headers().get_all(IF_NONE_MATCH).iter().cloned().collect();
    let response = next.run(request).await;
    if response.status() != StatusCode::OK {
        return response;
    }
    let (mut parts, body) = response.into_parts();
    // Answers are made in memory: there is no length to guard against.
    let Ok(bytes) = to_bytes(body, usize::MAX).await else {
        return StatusCode::INTERNAL_SERVER_ERROR.into_response();
    };
    let tag = entity_tag(&bytes);
    parts.headers.append(VARY, HeaderValue::from_static("Accept"));
    if let Ok(value) = HeaderValue::from_str(&tag) {
        parts.headers.insert(ETAG, value);
    }
    if known.iter().filter_map(|v| v.to_str().ok()).any(|v| holds(v, &tag)) {
        parts.status = StatusCode::NOT_MODIFIED;
        parts.headers.remove(CONTENT_TYPE);
        parts.headers.remove(CONTENT_LENGTH);
        return Response::from_parts(parts, Body::empty());
    }
    Response::from_parts(parts, Body::from(bytes))
}

fn entity_tag(bytes: &Bytes) -> String {
    let hex: String = Sha256::digest(bytes).iter().map(|b| format!("{b:02x}")).collect();
    format!("\"{hex}\"")
}

/// Whether a list of tags holds this one; weak ones count too, as for every `If-None-Match`.
fn holds(list: &str, tag: &str) -> bool {
    list.split(',').map(str::trim).any(|t| t == "*" || t.strip_prefix("W/").unwrap_or(t) == tag)
}
