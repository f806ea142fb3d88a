//! Which source a delivery is of, and what is answered to it.

use axum::http::header::LOCATION;
use axum::http::{HeaderValue, StatusCode};
use std::time::Duration;

use super::App;
use super::http::{Answer, Failure, chain, instant, json_of};
use crate::answers::{Problem, ProblemError, ProblemKind, receipt_view};
use crate::base::{Receipt, SourceId};
use crate::ingest::{AcceptError, Accepted};
use crate::plant::{Plant, Source};
use crate::store::StoreError;

/// More days than this are worked after the answer.
const DAYS_WORKED_AT_ONCE: usize = 40;
/// So long an answer waits for work, another delivery's before it included.
const WORK_WITHIN: Duration = Duration::from_secs(120);

/// The source of that name; the sole one where none is named.
pub fn source_of<'a>(plant: &'a Plant, name: Option<&str>) -> Result<&'a Source, Failure> {
    let there = || plant.sources.iter().map(|s| s.id.as_str());
    match (name, plant.sources.as_slice()) {
        (Some(name), _) => plant.source(&SourceId::new(name)).ok_or_else(|| {
            let detail = Problem::no_such("source", name, there()).detail;
            ProblemKind::Invalid.problem(detail).into()
        }),
        (None, [sole]) => Ok(sole),
        (None, _) => {
            let names = there().collect::<Vec<_>>().join(", ");
            let detail = format!("The plant has several sources; name one with `source`: {names}.");
            Err(ProblemKind::Invalid.problem(detail).into())
        }
    }
}

/// Checks up to when the sender says that data are complete.
pub fn check_complete_to(source: &Source, text: Option<&str>) -> Result<(), Failure> {
    if instant("complete_to", text)?.is_some() && source.hold_us.is_none() {
        let detail = format!(
            "The source `{}` exports every value; `complete_to` is for sources that export \
             changes only. Leave it away.",
            source.id
        );
        return Err(ProblemKind::Invalid.problem(detail).into());
    }
    Ok(())
}

/// What is said of a delivery that was not taken.
pub fn refused(error: AcceptError) -> Failure {
    match error {
        AcceptError::Refused(refusal) => {
            let mut detail = refusal.detail.clone();
            if let Some(column) = &refusal.column {
                detail = format!("column {column}: {detail}");
            }
            let error = ProblemError { detail, line: refusal.line, ..ProblemError::default() };
            ProblemKind::UnreadableExport.problem(refusal.detail).with_errors(vec![error]).into()
        }
        AcceptError::Read(error) => {
            tracing::error!(error = %chain(&error), "a spooled file could not be read");
            ProblemKind::Internal
                .problem("The file could not be read back from the disk; post it again.")
                .into()
        }
        AcceptError::Store(error) => error.into(),
    }
}

/// Two posts of one file at the same time: the second finds the first one's receipt.
pub async fn or_known(
    app: &App,
    plant: &Plant,
    source: &SourceId,
    digest: &str,
    taken: Result<Accepted, AcceptError>,
) -> Result<Accepted, Failure> {
    match taken {
        Err(AcceptError::Store(StoreError::Exists(e))) => {
            let store = &app.store;
            match store.receipt_by_digest(&plant.id, source, digest, &plant.mapping).await? {
                Some(first) => Ok(Accepted::Known(first)),
                None => Err(StoreError::Exists(e).into()),
            }
        }
        other => other.map_err(refused),
    }
}

/// The answer to a delivery, once what follows from it is worked, or begun where it is much.
pub async fn answer(app: &App, plant: &Plant, accepted: Accepted) -> Answer {
    let (status, receipt) = match accepted {
        Accepted::Known(first) => (StatusCode::OK, first),
        Accepted::New { receipt, .. } => (StatusCode::CREATED, worked(app, receipt).await),
    };
    let place = format!("/v1/receipts/{}", receipt.id);
    let mut response = json_of(status, &receipt_view(&plant.zone, &receipt))?;
    if let Ok(place) = HeaderValue::from_str(&place) {
        response.headers_mut().insert(LOCATION, place);
    }
    Ok(response)
}

/// Works what the delivery left, in a task of its own: it goes on when the client is gone. The
/// receipt is durable already; whatever fails here is tried again by the job.
async fn worked(app: &App, receipt: Receipt) -> Receipt {
    let much = match app.worker.days_waiting().await {
        Ok(days) => days > DAYS_WORKED_AT_ONCE,
        Err(error) => {
            tracing::error!(error = %chain(&error), "what is to be worked could not be read");
            return receipt;
        }
    };
    let (worker, id) = (app.worker.clone(), receipt.id.clone());
    let task = tokio::spawn(async move {
        if let Err(error) = worker.catch_up(Some(&id)).await {
            tracing::error!(error = %chain(&error), receipt = id, "work failed; it will be tried again");
        }
    });
    if much {
        return receipt;
    }
    if tokio::time::timeout(WORK_WITHIN, task).await.is_err() {
        return receipt;
    }
    match app.store.receipt(&app.plant().id, &receipt.id).await {
        Ok(Some(now)) => now,
        _ => receipt,
    }
}
