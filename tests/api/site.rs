//! A site with people: a service of its own with some history, and what they post.

use reqwest::Method;
use serde_json::{Value, json};
use washbell::base::{DAY_US, HOUR_US};
use washbell::sim::{self, PlannedClean, Recipe, Simulation};

use crate::support::{Got, TestApp, recipe, start};

/// Days of history.
pub const DAYS: i64 = 12;

/// Two trains: the first was cleaned on day 8 at 07:00 for eight hours and is quiet, the second
/// fouls so fast that a clean is due.
pub fn recipe_with_clean() -> Recipe {
    let mut recipe = recipe();
    let begin = start().plus(8 * DAY_US + 7 * HOUR_US);
    recipe.trains[0].cleans.push(PlannedClean::by_procedure(begin, 0.96, "c-1"));
    recipe.trains[1].rate_per_m_day *= 3.0;
    recipe
}

/// The rows from one hour to another.
pub fn rows(recipe: &Recipe, from: i64, to: i64) -> String {
    let mut sim = Simulation::new(recipe.clone());
    let mut before = String::new();
    sim.write_rows(start().plus(from * HOUR_US), &mut before);
    let mut text = sim::header(recipe);
    sim.write_rows(start().plus(to * HOUR_US), &mut text);
    text
}

/// A service that holds the first `hours` of twelve days; its clock stands at their end.
pub async fn site(hours: i64) -> TestApp {
    let recipe = recipe_with_clean();
    let app = TestApp::of(&sim::plant_toml(&recipe, "127.0.0.1:0", "washbell.db"), DAYS * 24).await;
    take(&app, &rows(&recipe, 0, hours)).await;
    app
}

pub async fn take(app: &TestApp, rows: &str) {
    let got = app.post("/v1/exports", "text/csv", rows.to_owned()).await;
    assert_eq!(got.status, 201, "{got:?}");
}

pub async fn post(app: &TestApp, path: &str, body: &Value) -> Got {
    app.post(path, "application/json", body.to_string()).await
}

pub async fn put(app: &TestApp, path: &str, body: &Value) -> Got {
    let request = app.ask(Method::PUT, path).header("content-type", "application/json");
    Got::of(request.body(body.to_string())).await
}

/// Posts and expects that status; answers the body.
pub async fn done(app: &TestApp, path: &str, body: &Value, status: u16) -> Value {
    let got = post(app, path, body).await;
    assert_eq!(got.status, status, "{path} {body}: {got:?}");
    got.json()
}

/// Posts and expects a problem; answers its detail and the pointer of its first fault.
pub async fn no(app: &TestApp, path: &str, body: &Value, status: u16) -> (String, String) {
    let got = post(app, path, body).await;
    let detail = got.problem(status, path);
    let pointer = got.json()["errors"][0]["pointer"].as_str().unwrap_or_default().to_owned();
    (detail, pointer)
}

/// A rinse with what was read.
pub fn rinsed(ph: f64, free_chlorine: &str) -> Value {
    json!({"class": "rinse", "duration": "PT1H",
           "verified": {"ph": ph, "free_chlorine": free_chlorine, "by": "shift A"}})
}

/// Items of a list that is one page long.
pub async fn items(app: &TestApp, path: &str) -> Vec<Value> {
    let page = app.get_json(path).await;
    assert_eq!(page["next"], Value::Null);
    page["items"].as_array().unwrap().clone()
}
