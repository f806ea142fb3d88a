use reqwest::Method;
use serde_json::Value;

use crate::support::{Got, TestApp, export};

#[tokio::test(flavor = "multi_thread")]
async fn ready_says_what_it_looked_at() {
    let app = TestApp::empty(2).await;
    let ready = app.get_json("/ready").await;
    assert_eq!(
        (&ready["ready"], &ready["sources"][0]["last_export"]),
        (&true.into(), &Value::Null)
    );
    app.post("/v1/exports", "text/csv", export(2)).await;
    let ready = app.get_json("/ready").await;
    assert!(ready["sources"][0]["age"].as_str().unwrap().starts_with("PT"), "{ready}");
    assert_eq!(ready["sources"][0]["expected_every"], "PT1H");
    assert_eq!(ready["checks"][0]["status"], "ok");
    assert_eq!(ready["checks"][2]["status"], "not_measured");
    assert_eq!(app.get("/live").await.text, "live\n");
}

#[tokio::test(flavor = "multi_thread")]
async fn not_ready_is_a_problem_with_the_same_fields() {
    let app = TestApp::empty(2).await;
    app.worker.store().clone().close().await;
    let got = Got::of(app.ask(Method::GET, "/ready")).await;
    got.problem(503, "/ready");
    let view = got.json();
    assert_eq!((&view["ready"], &view["checks"][0]["status"]), (&false.into(), &"failed".into()));
    assert_eq!(app.get("/live").await.status, 200);
    let got = app.get("/v1/trains").await;
    assert!(got.status >= 500, "{got:?}");
    got.problem(got.status, "/v1/trains");
}
