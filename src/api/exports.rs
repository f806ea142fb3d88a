//! Exports of the plant's historian.

use std::path::Path;

use axum::extract::{Request, State};
use serde::Deserialize;
use utoipa::IntoParams;

use super::App;
use super::http::{Answer, ApiQuery};
use super::sources::{answer, check_complete_to, or_known, source_of};
use super::spool::Spool;
use crate::answers::ReceiptView;
use crate::ingest::{self, AcceptError, Delivery};

const FILE_NAME_LONGEST: usize = 200;

/// Whose export it is.
#[derive(Debug, Deserialize, IntoParams)]
#[into_params(parameter_in = Query)]
pub struct ExportQuery {
    /// Source of the plant file; a sole one need not be named.
    source: Option<String>,
    /// Name of the file, for the receipt.
    file: Option<String>,
    /// For sources that export changes only: data are complete up to this time.
    complete_to: Option<String>,
}

/// Take an export
///
/// The file is the body. The answer comes when it is durable and what follows from it is
/// worked; `analysis` is `pending` where more than 40 days have to be worked again.
#[utoipa::path(
    post, path = "/v1/exports", tag = "doors in", operation_id = "postExport", params(ExportQuery),
    request_body(content((String = "text/csv"), (String = "application/octet-stream"),
        (String = "application/x-www-form-urlencoded"), (String = "multipart/form-data"))),
    responses(
        (status = 201, description = "Taken", body = ReceiptView,
         headers(("Location" = String, description = "The receipt"))),
        (status = 200, description = "The same file was taken before; its first receipt", body = ReceiptView),
    )
)]
pub async fn post(
    State(app): State<App>,
    ApiQuery(query): ApiQuery<ExportQuery>,
    request: Request,
) -> Answer {
    take(&app, &query, request).await
}

/// Take an export, as `curl -T` sends it
#[utoipa::path(
    put, path = "/v1/exports", tag = "doors in", operation_id = "putExport", params(ExportQuery),
    request_body(content((String = "text/csv"), (String = "application/octet-stream"))),
    responses(
        (status = 201, description = "Taken", body = ReceiptView,
         headers(("Location" = String, description = "The receipt"))),
        (status = 200, description = "The same file was taken before; its first receipt", body = ReceiptView),
    )
)]
pub async fn put(
    State(app): State<App>,
    ApiQuery(query): ApiQuery<ExportQuery>,
    request: Request,
) -> Answer {
    take(&app, &query, request).await
}

async fn take(app: &App, query: &ExportQuery, request: Request) -> Answer {
    let plant = app.plant();
    let source = source_of(&plant, query.source.as_deref())?;
    check_complete_to(source, query.complete_to.as_deref())?;
    let spool = Spool::take(request, folder_of(app.store.path())).await?;
    let file = file_name(query.file.as_deref().or(spool.file.as_deref()).unwrap_or(""));
    let delivery = Delivery { source, file: &file, received: app.clock.now() };
    let taken = match spool.open() {
        Ok(bytes) => ingest::accept_file(&app.store, &plant, &delivery, &spool.digest, bytes).await,
        Err(error) => Err(AcceptError::Read(error)),
    };
    let accepted = or_known(app, &plant, &source.id, &spool.digest, taken).await?;
    drop(spool);
    answer(app, &plant, accepted).await
}

fn folder_of(database: &Path) -> &Path {
    database.parent().filter(|p| !p.as_os_str().is_empty()).unwrap_or(Path::new("."))
}

/// The last part of a path, whichever system it comes from, without what cannot be shown.
fn file_name(given: &str) -> String {
    let last = given.rsplit(['/', '\\']).next().unwrap_or("");
    last.chars().filter(|c| !c.is_control()).take(FILE_NAME_LONGEST).collect()
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn a_file_name_is_its_last_part() {
        assert_eq!(file_name("C:\\exports\\06\r\n00.csv"), "0600.csv");
        assert_eq!(file_name("/var/spool/0600.csv"), "0600.csv");
        assert_eq!(file_name(&"a".repeat(999)).len(), FILE_NAME_LONGEST);
        assert_eq!(folder_of(Path::new("washbell.db")), Path::new("."));
    }
}
