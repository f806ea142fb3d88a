//! Problems after RFC 9457: what every answer says that is not a success.

use serde::Serialize;
use utoipa::ToSchema;

use crate::advice::ActRefused;
use crate::base::{TimeError, nearest};

/// The kinds of problem. Each has a stable type, relative to the service's own address.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
#[expect(missing_docs, reason = "the names are those of the statuses")]
pub enum ProblemKind {
    BadRequest,
    BadTime,
    Unauthorized,
    Forbidden,
    NotFound,
    MethodNotAllowed,
    NotAcceptable,
    Timeout,
    Conflict,
    Changed,
    TooLarge,
    UnsupportedMediaType,
    Invalid,
    UnreadableExport,
    MatchRequired,
    TooManyRequests,
    Internal,
    Unavailable,
    DiskFull,
}

use ProblemKind as K;

impl ProblemKind {
    /// All kinds. The first of a status stands for that status.
    pub const ALL: [Self; 19] = [
        K::BadRequest,
        K::BadTime,
        K::Unauthorized,
        K::Forbidden,
        K::NotFound,
        K::MethodNotAllowed,
        K::NotAcceptable,
        K::Timeout,
        K::Conflict,
        K::Changed,
        K::TooLarge,
        K::UnsupportedMediaType,
        K::Invalid,
        K::UnreadableExport,
        K::MatchRequired,
        K::TooManyRequests,
        K::Internal,
        K::Unavailable,
        K::DiskFull,
    ];

    /// Status, type and title.
    const fn parts(self) -> (u16, &'static str, &'static str) {
        match self {
            K::BadRequest => (400, "/problems/bad-request", "The request cannot be read"),
            K::BadTime => (400, "/problems/bad-time", "A time or a duration cannot be read"),
            K::Unauthorized => (401, "/problems/unauthorized", "An access token is needed"),
            K::Forbidden => (403, "/problems/forbidden", "The access token does not allow this"),
            K::NotFound => (404, "/problems/not-found", "There is no such thing"),
            K::MethodNotAllowed => {
                (405, "/problems/method-not-allowed", "This address does not take that method")
            }
            K::NotAcceptable => {
                (406, "/problems/not-acceptable", "The answer cannot be written in that form")
            }
            K::Timeout => (408, "/problems/timeout", "The request took too long"),
            K::Conflict => (409, "/problems/conflict", "What stands does not allow this"),
            K::Changed => (412, "/problems/changed", "It has changed since it was read"),
            K::TooLarge => (413, "/problems/too-large", "The body is too large"),
            K::UnsupportedMediaType => {
                (415, "/problems/unsupported-media-type", "The body is of a kind not taken here")
            }
            K::Invalid => (422, "/problems/invalid", "The request was read but cannot be taken"),
            K::UnreadableExport => {
                (422, "/problems/unreadable-export", "Nothing in the export can be used")
            }
            K::MatchRequired => {
                (428, "/problems/match-required", "The change must name what it was read as")
            }
            K::TooManyRequests => {
                (429, "/problems/too-many-requests", "Too many requests in a short time")
            }
            K::Internal => (500, "/problems/internal", "The service failed"),
            K::Unavailable => (503, "/problems/unavailable", "The service is not ready"),
            K::DiskFull => (507, "/problems/disk-full", "The disk is full"),
        }
    }

    /// The HTTP status.
    pub const fn status(self) -> u16 {
        self.parts().0
    }
    /// The type, a relative reference that does not change.
    pub const fn uri(self) -> &'static str {
        self.parts().1
    }
    /// The title.
    pub const fn title(self) -> &'static str {
        self.parts().2
    }
    /// The kind that stands for a status which arose elsewhere; by its hundreds where no kind
    /// has it.
    pub fn of_status(status: u16) -> Self {
        let other = if status < 500 { Self::BadRequest } else { Self::Internal };
        Self::ALL.into_iter().find(|k| k.status() == status).unwrap_or(other)
    }
    /// A problem of this kind. The detail tells the reader what to do.
    pub fn problem(self, detail: impl Into<String>) -> Problem {
        Problem {
            kind: self.uri().to_owned(),
            title: self.title().to_owned(),
            status: self.status(),
            detail: detail.into(),
            instance: None,
            errors: Vec::new(),
        }
    }
}

/// A problem, sent as `application/problem+json`.
#[derive(Clone, Debug, PartialEq, Serialize, ToSchema)]
pub struct Problem {
    /// Which kind, as a reference relative to the service's address.
    #[serde(rename = "type")]
    pub kind: String,
    /// The kind in words.
    pub title: String,
    /// The HTTP status.
    pub status: u16,
    /// What happened here, and what to do.
    pub detail: String,
    /// The request it is about.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub instance: Option<String>,
    /// Single faults, where there is more to say.
    #[serde(skip_serializing_if = "Vec::is_empty")]
    pub errors: Vec<ProblemError>,
}

/// One fault, with its place.
#[derive(Clone, Debug, Default, PartialEq, Serialize, ToSchema)]
pub struct ProblemError {
    /// What is wrong, and what to write instead.
    pub detail: String,
    /// JSON pointer into the body.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub pointer: Option<String>,
    /// Line of the body, from 1.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub line: Option<u64>,
    /// Column of that line, from 1.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub column: Option<u64>,
}

impl ProblemError {
    /// A fault at a JSON pointer.
    pub fn at_pointer(pointer: impl Into<String>, detail: impl Into<String>) -> Self {
        Self { detail: detail.into(), pointer: Some(pointer.into()), ..Self::default() }
    }
    /// A fault at a line and column.
    pub fn at_line(line: u64, column: u64, detail: impl Into<String>) -> Self {
        let (line, column) = (Some(line), Some(column));
        Self { detail: detail.into(), line, column, ..Self::default() }
    }
}

impl Problem {
    /// With the request it is about.
    pub fn with_instance(mut self, instance: impl Into<String>) -> Self {
        self.instance = Some(instance.into());
        self
    }
    /// With single faults.
    pub fn with_errors(mut self, errors: Vec<ProblemError>) -> Self {
        self.errors = errors;
        self
    }
    /// Nothing of that name: `what` is the kind of thing, `known` the names there are.
    pub fn no_such<'a>(what: &str, name: &str, known: impl IntoIterator<Item = &'a str>) -> Self {
        let known: Vec<&str> = known.into_iter().collect();
        let help = match nearest(name, known.iter().copied()) {
            Some(near) => format!("; did you mean `{near}`?"),
            None if known.is_empty() => ".".to_owned(),
            None => format!("; there are {}.", known.join(", ")),
        };
        K::NotFound.problem(format!("There is no {what} `{name}`{help}"))
    }
    /// A time or a duration that could not be read, given as `parameter`.
    pub fn bad_time(parameter: &str, error: &TimeError) -> Self {
        K::BadTime.problem(format!("`{parameter}`: {error}."))
    }
    /// A person's act on a recommendation that is refused.
    pub fn act_refused(why: ActRefused) -> Self {
        match why {
            ActRefused::NotOpen => K::Conflict.problem(
                "The recommendation is closed, so nothing can be done to it; ask for the open ones \
                 with /v1/recommendations?state=open.",
            ),
            ActRefused::NeedsUntil => K::Invalid
                .problem("A deferral ends: give `until` as a time in the future.")
                .with_errors(vec![ProblemError::at_pointer(
                    "/until",
                    "write a time in the future, with its offset",
                )]),
        }
    }
}

#[cfg(test)]
mod tests {
    use serde_json::json;

    use super::*;

    #[test]
    fn a_problem_says_what_to_do() {
        let p = Problem::no_such("train", "uf1", ["uf-1", "uf-2"]).with_instance("/v1/trains/uf1");
        assert_eq!(
            serde_json::to_value(&p).unwrap(),
            json!({"type": "/problems/not-found", "title": "There is no such thing", "status": 404,
                   "detail": "There is no train `uf1`; did you mean `uf-1`?",
                   "instance": "/v1/trains/uf1"})
        );
        assert_eq!(
            Problem::no_such("train", "pump", ["uf-1", "uf-2"]).detail,
            "There is no train `pump`; there are uf-1, uf-2."
        );
        let p = Problem::act_refused(ActRefused::NeedsUntil);
        assert_eq!(p.status, 422);
        assert_eq!(
            serde_json::to_value(&p.errors).unwrap(),
            json!([{"detail": "write a time in the future, with its offset", "pointer": "/until"}])
        );
        let at = ProblemError::at_line(3, 14, "expected `,`");
        assert_eq!(
            serde_json::to_value(at).unwrap(),
            json!({"detail": "expected `,`", "line": 3, "column": 14})
        );
    }

    #[test]
    fn kinds_are_told_apart_by_their_type() {
        for (i, kind) in ProblemKind::ALL.iter().enumerate() {
            assert!(ProblemKind::ALL[..i].iter().all(|k| k.uri() != kind.uri()));
            assert!(kind.uri().starts_with("/problems/"));
            assert_eq!(ProblemKind::of_status(kind.status()).status(), kind.status());
        }
        assert_eq!(ProblemKind::of_status(418), ProblemKind::BadRequest);
        assert_eq!(ProblemKind::of_status(502), ProblemKind::Internal);
    }
}
