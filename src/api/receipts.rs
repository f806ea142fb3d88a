//! Receipts.

use axum::extract::{Path, State};
use axum::http::{HeaderMap, Uri};
use serde::Deserialize;
use utoipa::IntoParams;

use super::App;
use super::http::{
    Answer, ApiQuery, Cursor, Failure, LIST_MOST, LIST_USUAL, NoQuery, instant, json, limit,
    linked, next_address, prefers, text,
};
use super::sources::source_of;
use crate::answers::{Page, ProblemKind, ReceiptView, receipt_text, receipt_view};
use crate::store::ReceiptFilter;

const LIST: &str = "receipts";

/// Which receipts.
#[derive(Debug, Deserialize, IntoParams)]
#[into_params(parameter_in = Query)]
pub struct ReceiptsQuery {
    /// Only of this source.
    source: Option<String>,
    /// Only of files of this name.
    file: Option<String>,
    /// Only received at or after this time.
    since: Option<String>,
    /// At most so many, up to 1,000; 100 if left out.
    #[param(minimum = 1, maximum = 1000)]
    limit: Option<u32>,
    /// From `next` of the page before.
    cursor: Option<String>,
}

/// Receipts, newest first
#[utoipa::path(
    get, path = "/v1/receipts", tag = "doors in", operation_id = "listReceipts",
    params(ReceiptsQuery),
    responses((status = 200, description = "A page of receipts", body = Page<ReceiptView>))
)]
pub async fn list(
    State(app): State<App>,
    uri: Uri,
    ApiQuery(query): ApiQuery<ReceiptsQuery>,
) -> Answer {
    let plant = app.plant();
    let source = match query.source.as_deref() {
        Some(name) => Some(source_of(&plant, Some(name))?.id.clone()),
        None => None,
    };
    let n = limit(query.limit, LIST_USUAL, LIST_MOST)?;
    let filter = ReceiptFilter {
        source,
        file: query.file,
        since: instant("since", query.since.as_deref())?,
        after: Cursor::parse(LIST, query.cursor.as_deref())?.map(|c| c.place),
        limit: n + 1,
    };
    let mut receipts = app.store.receipts(&plant.id, &filter).await?;
    let more = receipts.len() > n as usize;
    receipts.truncate(n as usize);
    let last = receipts.last().filter(|_| more);
    let next = last.map(|r| next_address(&uri, &Cursor::text(LIST, &r.id)));
    let items = receipts.iter().map(|r| receipt_view(&plant.zone, r)).collect();
    let page = Page { items, next };
    Ok(linked(json(&page)?, page.next.as_deref()))
}

/// One receipt; as text/plain its message alone
#[utoipa::path(
    get, path = "/v1/receipts/{id}", tag = "doors in", operation_id = "getReceipt",
    params(("id" = String, Path, description = "Id of the receipt")),
    responses((status = 200, description = "The receipt",
        content((ReceiptView = "application/json"), (String = "text/plain"))))
)]
pub async fn one(
    State(app): State<App>,
    Path(id): Path<String>,
    headers: HeaderMap,
    _: ApiQuery<NoQuery>,
) -> Answer {
    let plant = app.plant();
    let receipt = app.store.receipt(&plant.id, &id).await?.ok_or_else(|| {
        let detail = format!("There is no receipt `{id}`; /v1/receipts lists those there are.");
        Failure::from(ProblemKind::NotFound.problem(detail))
    })?;
    match prefers(&headers, &["application/json", "text/plain"]) {
        "text/plain" => Ok(text(receipt_text(&receipt))),
        _ => json(&receipt_view(&plant.zone, &receipt)),
    }
}
