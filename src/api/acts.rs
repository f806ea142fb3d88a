//! What all acts of people have in common: who, why, and what a refusal says.

use std::time::Duration;

use serde::Deserialize;
use serde::de::DeserializeOwned;
use utoipa::ToSchema;

use super::App;
use super::http::{Failure, chain};
use crate::answers::{Problem, ProblemError, ProblemKind, moment_words};
use crate::base::Zone;
use crate::plant::Plant;
use crate::store::{ItemFilter, ItemKind, StoreError};
use crate::work::{ActError, CleaningRefused, Desk};

/// What follows from a record is waited for this long; it goes on by itself then.
const FOLLOW_WITHIN: Duration = Duration::from_secs(20);
/// Things looked through at once while a list is filtered.
const BATCH: u32 = 500;

/// Who does it, and why.
#[derive(Clone, Debug, Deserialize, ToSchema)]
#[serde(deny_unknown_fields)]
pub struct PersonBody {
    /// The person who does it.
    pub by: String,
    /// Why, or what there is to say to it.
    pub reason: Option<String>,
}

/// Where acts are done now.
pub fn desk<'a>(app: &'a App, plant: &'a Plant) -> Desk<'a> {
    Desk { store: &app.store, plant, now: app.clock.now() }
}

/// The answer to an act that was not done, on a `what` of that name.
pub fn refused(zone: &Zone, what: &str, name: &str, error: ActError) -> Failure {
    let invalid = |pointer: &str, detail: String| {
        let errors = vec![ProblemError::at_pointer(pointer, detail.as_str())];
        ProblemKind::Invalid.problem(format!("{detail}.")).with_errors(errors).into()
    };
    match error {
        ActError::NotThere => Problem::no_such(what, name, []).into(),
        ActError::NeedsPerson => invalid("/by", error.to_string()),
        ActError::NeedsReason => invalid("/reason", error.to_string()),
        ActError::Recommendation(why) => Problem::act_refused(why).into(),
        ActError::Alarm(why) => Problem::alarm_refused(why).into(),
        ActError::Order(refusal) => Problem::order_refused(&refusal).into(),
        // A work order tells its clean under `actuals`.
        ActError::Cleaning(why) if what == "work order" => cleaning_refused(zone, &why, "/actuals"),
        ActError::Cleaning(why) => cleaning_refused(zone, &why, ""),
        ActError::Store(error) => error.into(),
    }
}

fn cleaning_refused(zone: &Zone, why: &CleaningRefused, within: &str) -> Failure {
    let mut detail = why.to_string();
    if let CleaningRefused::Overlaps { span, .. } = why {
        let words = |at| moment_words(zone, at, span.to);
        detail = format!("{detail}: it was from {} to {}", words(span.from), words(span.to));
    }
    let kind = if why.is_conflict() { ProblemKind::Conflict } else { ProblemKind::Invalid };
    let errors =
        vec![ProblemError::at_pointer(format!("{within}{}", why.pointer()), detail.as_str())];
    let mut letters = detail.chars();
    let first = letters.next().map(|c| c.to_uppercase().to_string()).unwrap_or_default();
    kind.problem(format!("{first}{}.", letters.as_str())).with_errors(errors).into()
}

/// Works what a record left behind, in a task of its own: it goes on when the client is gone,
/// and whatever fails is tried again by the job.
pub async fn follow_up(app: &App) {
    let worker = app.worker.clone();
    let task = tokio::spawn(async move {
        if let Err(error) = worker.catch_up(None).await {
            tracing::error!(error = %chain(&error), "work failed; it will be tried again");
        }
    });
    // Whether it ended in time is of no matter: the record is durable.
    let _ = tokio::time::timeout(FOLLOW_WITHIN, task).await;
}

/// Things of a kind that are wanted, newest first, at most `n`, each with its place in the list;
/// and whether there are more.
pub async fn wanted<T: DeserializeOwned>(
    app: &App,
    plant: &Plant,
    kind: ItemKind,
    filter: &ItemFilter,
    n: u32,
    keep: impl Fn(&T) -> bool,
) -> Result<(Vec<(i64, T)>, bool), StoreError> {
    let mut filter = ItemFilter { limit: BATCH, ..filter.clone() };
    let mut out = Vec::new();
    loop {
        let batch = app.store.items::<T>(&plant.id, kind, &filter).await?;
        let whole = batch.len() < BATCH as usize;
        filter.after = batch.last().map(|(place, _)| *place);
        for (place, item) in batch.into_iter().filter(|(_, item)| keep(item)) {
            if out.len() == n as usize {
                return Ok((out, true));
            }
            out.push((place, item));
        }
        if whole {
            return Ok((out, false));
        }
    }
}
