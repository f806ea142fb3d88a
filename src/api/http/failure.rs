//! What a handler answers where it does not succeed.

use std::error::Error;

use axum::http::header::RETRY_AFTER;
use axum::http::{HeaderValue, StatusCode};
use axum::response::{IntoResponse, Response};

use crate::answers::{Problem, ProblemKind};
use crate::base::TimeError;
use crate::store::StoreError;

/// A problem on its way out. The outermost layer writes it.
#[derive(Debug)]
pub struct Failure(Box<Problem>);

/// What a handler answers.
pub type Answer = Result<Response, Failure>;

impl Failure {
    /// A time or a duration that could not be read, given as `parameter`.
    pub fn bad_time(parameter: &str, error: &TimeError) -> Self {
        Problem::bad_time(parameter, error).into()
    }
}

impl From<Problem> for Failure {
    fn from(problem: Problem) -> Self {
        Self(Box::new(problem))
    }
}

/// The chain of causes goes to the log, once; the client learns what it can do.
impl From<StoreError> for Failure {
    fn from(error: StoreError) -> Self {
        tracing::error!(error = %chain(&error), "the store refused");
        let kind = match &error {
            StoreError::Busy | StoreError::ReadOnly | StoreError::Held { .. } => {
                ProblemKind::Unavailable
            }
            StoreError::DiskFull => ProblemKind::DiskFull,
            StoreError::Exists(_) => ProblemKind::Conflict,
            _ => ProblemKind::Internal,
        };
        kind.problem(format!("The store says: {error}.")).into()
    }
}

/// An error with its sources, outermost first.
pub fn chain(error: &dyn Error) -> String {
    let mut text = error.to_string();
    let mut source = error.source();
    while let Some(e) = source {
        text.push_str(": ");
        text.push_str(&e.to_string());
        source = e.source();
    }
    text
}

impl IntoResponse for Failure {
    fn into_response(self) -> Response {
        let status = StatusCode::from_u16(self.0.status).unwrap_or(StatusCode::BAD_REQUEST);
        let mut response = status.into_response();
        if status == StatusCode::SERVICE_UNAVAILABLE {
            response.headers_mut().insert(RETRY_AFTER, HeaderValue::from_static("10"));
        }
        response.extensions_mut().insert(*self.0);
        response
    }
}
