//! Spans of time in queries.

use super::Failure;
use crate::answers::ProblemKind;
use crate::base::{Instant, Span, parse_duration_us};

/// A time given as `parameter`.
///
/// # Errors
/// If it is no RFC 3339 time with an offset.
pub fn instant(parameter: &str, text: Option<&str>) -> Result<Option<Instant>, Failure> {
    text.map(|t| Instant::parse(t).map_err(|e| Failure::bad_time(parameter, &e))).transpose()
}

/// The span of `from` and `to`, or of `last`; without either the `usual_us` before `newest`,
/// which is also where a span without `to` ends.
///
/// # Errors
/// If a time cannot be read, the span ends before it begins, or both forms are given.
pub fn span(
    from: Option<&str>,
    to: Option<&str>,
    last: Option<&str>,
    newest: Instant,
    usual_us: i64,
) -> Result<Span, Failure> {
    if let Some(last) = last {
        if from.is_some() || to.is_some() {
            return Err(ProblemKind::BadRequest
                .problem("Give either `from` and `to`, or `last`.")
                .into());
        }
        let us = parse_duration_us(last).map_err(|e| Failure::bad_time("last", &e))?;
        return Ok(Span::new(newest.plus(-us), newest));
    }
    let (from, to) = (instant("from", from)?, instant("to", to)?);
    let to = to.unwrap_or(newest.max(from.unwrap_or(newest)));
    let span = Span::new(from.unwrap_or(to.plus(-usual_us)), to);
    if span.to < span.from {
        return Err(ProblemKind::BadTime.problem("`to` is before `from`; swap them.").into());
    }
    Ok(span)
}
