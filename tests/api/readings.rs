use crate::support::{TestApp, export};

const JSON: &str = "application/json";

#[tokio::test(flavor = "multi_thread")]
async fn readings_are_taken_one_by_one() {
    let app = TestApp::empty(2).await;
    let body = r#"{"source": "scada", "readings": [
        {"time": "2026-03-02T01:00:00+01:00", "tag": "PT-101", "value": 0.9},
        {"time": "2026-03-02T00:01:00Z", "tag": "PT-101", "value": "0.91", "quality": "Good"},
        {"time": "2026-03-02T00:02:00Z", "tag": "PT-101", "value": null},
        {"time": "2026-03-02T00:03:00", "tag": "PT-101", "value": 1},
        {"time": "2026-03-02T00:03:00Z", "tag": "PT-999", "value": 1}]}"#;
    let got = app.post("/v1/readings", JSON, body).await;
    assert_eq!(got.status, 201, "{got:?}");
    let receipt = got.json();
    let counts = &receipt["readings"];
    assert_eq!(
        (&counts["accepted"], &counts["missing"], &counts["rejected"]),
        (&2.into(), &1.into(), &2.into())
    );
    assert_eq!((&receipt["cells"], &receipt["analysis"]), (&5.into(), &"done".into()));
    let again = app.post("/v1/readings", JSON, body).await;
    assert_eq!((again.status, again.json()), (200, receipt));
    // The export holds the same minutes: other values are revisions.
    let got = app.post("/v1/exports", "text/csv", export(1)).await;
    assert_eq!(got.json()["readings"]["revised"], 2);
}

#[tokio::test(flavor = "multi_thread")]
async fn a_body_that_is_not_as_described_is_refused_where_it_is_wrong() {
    let app = TestApp::empty(2).await;
    let path = "/v1/readings";
    let refused = async |body: String, status: u16| {
        let got = app.post(path, JSON, body).await;
        got.problem(status, path);
        got.json()
    };
    let p = refused(r#"{"readings": [{"time": 5, "tag": "a", "value": 1}]}"#.into(), 422).await;
    assert_eq!(p["errors"][0]["pointer"], "/readings/0/time", "{p}");
    let p = refused(r#"{"readings": [], "sauce": "scada"}"#.into(), 422).await;
    assert!(p["detail"].as_str().unwrap().contains("unknown field `sauce`"), "{p}");
    assert_eq!(p["errors"][0]["pointer"], "/sauce", "{p}");
    let p = refused("{\"readings\": [\n{]}".into(), 400).await;
    assert_eq!((&p["errors"][0]["line"], &p["errors"][0]["column"]), (&2.into(), &2.into()), "{p}");
    refused("{\"readings\": []} {}".into(), 400).await;
    refused(String::new(), 400).await;
    refused("[]".into(), 422).await;
    let p = refused(format!("{{\"readings\": [], \"x\": \"{}\"}}", "y".repeat(1 << 20)), 413).await;
    assert!(p["detail"].as_str().unwrap().contains("1048576"), "{p}");
    refused(r#"{"source": "plc", "readings": []}"#.into(), 422).await;
    let got = app.post(path, "text/csv", "a,b").await;
    assert!(got.problem(415, path).contains("application/json"));
    let got = app
        .post("/v1/readings?complete_to=2026-03-02T00:30:00Z", JSON, r#"{"readings": []}"#)
        .await;
    assert!(got.problem(422, path).contains("changes only"));
}
