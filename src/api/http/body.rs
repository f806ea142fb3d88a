//! Bodies in JSON: what they must be, and where exactly they are not.

use axum::body::{Bytes, to_bytes};
use axum::extract::{FromRequest, Request};
use axum::http::HeaderMap;
use axum::http::header::CONTENT_TYPE;
use serde::de::DeserializeOwned;
use serde_path_to_error::{Path, Segment};

use super::Failure;
use crate::answers::{ProblemError, ProblemKind};

/// A body in JSON may be this long.
pub const JSON_BYTES_MAX: usize = 1 << 20;
/// A file may be this long, as sent and as decoded.
pub const EXPORT_BYTES_MAX: usize = 512 << 20;

/// A body in JSON. Its type says which fields there are: with `deny_unknown_fields` others are
/// refused by name.
#[derive(Clone, Debug)]
pub struct ApiJson<T> {
    /// What it says.
    pub value: T,
    /// The body as decoded.
    pub bytes: Bytes,
}

/// The media type of a body without its parameters, in lower case; empty where none is given.
pub fn media_type(headers: &HeaderMap) -> String {
    let given = headers.get(CONTENT_TYPE).and_then(|v| v.to_str().ok()).unwrap_or("");
    given.split(';').next().unwrap_or("").trim().to_ascii_lowercase()
}

impl<S: Send + Sync, T: DeserializeOwned> FromRequest<S> for ApiJson<T> {
    type Rejection = Failure;

    async fn from_request(request: Request, _: &S) -> Result<Self, Failure> {
        let media = media_type(request.headers());
        if media != "application/json" && !media.ends_with("+json") {
            let sent = if media.is_empty() { "none".to_owned() } else { format!("`{media}`") };
            return Err(ProblemKind::UnsupportedMediaType
                .problem(format!(
                    "The body must be JSON with the header Content-Type: application/json; its \
                     content type is {sent}."
                ))
                .into());
        }
        let bytes = read_all(request).await?;
        let mut reader = serde_json::Deserializer::from_slice(&bytes);
        let value = serde_path_to_error::deserialize(&mut reader).map_err(|e| {
            let pointer = pointer(e.path());
            wrong(&pointer, e.inner())
        })?;
        reader.end().map_err(|e| wrong("", &e))?;
        Ok(Self { value, bytes })
    }
}

async fn read_all(request: Request) -> Result<Bytes, Failure> {
    to_bytes(request.into_body(), JSON_BYTES_MAX).await.map_err(|error| {
        if is_too_long(&error) {
            let detail =
                format!("A body in JSON may hold {JSON_BYTES_MAX} bytes; send it in parts.");
            return ProblemKind::TooLarge.problem(detail).into();
        }
        unreadable_body(&error)
    })
}

/// What is said of a body that broke off, was longer than allowed, or could not be decoded.
pub fn unreadable_body(error: &dyn std::error::Error) -> Failure {
    if is_too_long(error) {
        let detail = format!("A body may hold {EXPORT_BYTES_MAX} bytes; send it in parts.");
        return ProblemKind::TooLarge.problem(detail).into();
    }
    let detail = format!(
        "The body could not be read to its end: {}. Nothing was stored; send it again.",
        super::chain(error)
    );
    ProblemKind::BadRequest.problem(detail).into()
}

/// Whether a body failed because it is longer than allowed.
fn is_too_long(error: &dyn std::error::Error) -> bool {
    let mut source = Some(error);
    while let Some(e) = source {
        if e.to_string().contains("length limit exceeded") {
            return true;
        }
        source = e.source();
    }
    false
}

/// The place as a JSON pointer, RFC 6901.
fn pointer(path: &Path) -> String {
    let mut out = String::new();
    for segment in path.iter() {
        match segment {
            Segment::Seq { index } => out.push_str(&format!("/{index}")),
            Segment::Map { key } | Segment::Enum { variant: key } => {
                out.push('/');
                out.push_str(&key.replace('~', "~0").replace('/', "~1"));
            }
            Segment::Unknown => {}
        }
    }
    out
}

fn wrong(pointer: &str, error: &serde_json::Error) -> Failure {
    let text = error.to_string();
    // The place is said beside the words.
    let words = text.rsplit_once(" at line ").map_or(text.as_str(), |(words, _)| words);
    if error.is_data() {
        let at = if pointer.is_empty() { "The body".to_owned() } else { format!("`{pointer}`") };
        return ProblemKind::Invalid
            .problem(format!("{at} cannot be taken: {words}."))
            .with_errors(vec![ProblemError::at_pointer(pointer, words)])
            .into();
    }
    let (line, column) = (error.line() as u64, error.column() as u64);
    ProblemKind::BadRequest
        .problem(format!("The body is not JSON: {words} at line {line}, column {column}."))
        .with_errors(vec![ProblemError::at_line(line, column, words)])
        .into()
}
