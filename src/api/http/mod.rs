//! What every request has in common.

mod accept;
mod body;
mod conditional;
mod failure;
mod observed;
mod paging;
mod problems;
mod query;
mod respond;
mod span;

pub use accept::{prefers, prefers_html};
pub use body::{ApiJson, EXPORT_BYTES_MAX, JSON_BYTES_MAX, media_type, unreadable_body};
pub use conditional::conditional;
pub use failure::{Answer, Failure, chain};
pub use observed::{observed, routed};
pub use paging::{Cursor, LIST_MOST, LIST_USUAL, SERIES_MOST, SERIES_USUAL, limit, next_address};
pub use problems::{PROBLEM_JSON, escaped, nothing_here, panicked, problems};
pub use query::{ApiQuery, NoQuery};
pub use respond::{csv, json, json_of, linked, text};
pub use span::{instant, span};
