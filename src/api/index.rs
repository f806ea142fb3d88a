//! What there is, in short, for whoever opens the service's address.

use std::fmt::Write as _;

use axum::extract::State;
use axum::http::HeaderMap;
use axum::response::{Html, IntoResponse};

use super::App;
use super::http::{Answer, ApiQuery, NoQuery, escaped, prefers, text};
use super::trains::{TrainOrder, shown_all};
use crate::answers::{TrainView, UnitSystem, Units};

const PLACES: [&str; 5] =
    ["/v1/trains?order=clean_by", "/v1/plant", "/v1/receipts", "/ready", "/openapi.json"];

/// What there is, in short
#[utoipa::path(
    get, path = "/", tag = "service", operation_id = "getIndex",
    responses((status = 200, description = "A line a train",
        content((String = "text/plain"), (String = "text/html"))))
)]
pub async fn index(State(app): State<App>, headers: HeaderMap, _: ApiQuery<NoQuery>) -> Answer {
    let plant = app.plant();
    let units = Units::new(UnitSystem::default());
    let trains = shown_all(&app, &plant, &units, TrainOrder::CleanBy).await?;
    if prefers(&headers, &["text/plain", "text/html"]) == "text/html" {
        return Ok(Html(page(&plant.name, &trains)).into_response());
    }
    let mut out = format!("{}\n\n", plant.name);
    for train in &trains {
        // Writing to a String cannot fail.
        let _ = writeln!(out, "{}{}: {}", train.id, as_of(train), train.standing.sentence);
    }
    let _ = writeln!(out, "\n{}", PLACES.join("\n"));
    Ok(text(out))
}

fn as_of(train: &TrainView) -> String {
    train.standing.as_of.as_ref().map_or(String::new(), |t| format!(" (as of {})", t.as_str()))
}

fn page(plant: &str, trains: &[TrainView]) -> String {
    let name = escaped(plant);
    let mut out = format!(
        "<!doctype html>\n<html lang=\"en\"><meta charset=\"utf-8\"><title>{name}</title>\n\
         <h1>{name}</h1>\n<ul>\n"
    );
    for train in trains {
        let (id, sentence) = (escaped(&train.id), escaped(&train.standing.sentence));
        let _ = writeln!(
            out,
            "<li><a href=\"/v1/trains/{id}\">{id}</a>{}: {sentence}</li>",
            escaped(&as_of(train))
        );
    }
    out.push_str("</ul>\n<ul>\n");
    for place in PLACES {
        let place = escaped(place);
        let _ = writeln!(out, "<li><a href=\"{place}\">{place}</a></li>");
    }
    out.push_str("</ul>\n</html>\n");
    out
}
