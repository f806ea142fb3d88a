use serde_json::Value;

use crate::support::{TestApp, shared, walk};

const PATH: &str = "/v1/trains/uf-1/permeability";

#[tokio::test(flavor = "multi_thread")]
async fn the_series_names_its_units_and_stands_still() {
    let app = &shared().await.app;
    let series = app.get_json(PATH).await;
    assert_eq!((&series["train"], &series["step"]), (&"uf-1".into(), &"PT1H".into()));
    assert_eq!(series["as_of"], "2026-03-14T00:00:00+00:00");
    assert_eq!(series["units"]["permeability"], "L/(m2.h.bar)");
    assert_eq!(series["points"].as_array().unwrap().len(), 7 * 24, "a week is usual");
    let us = app.get_json(&format!("{PATH}?units=us&last=PT1H")).await;
    assert_eq!(us["unit_labels"]["flux"], "gfd");

    let days = app.get_json(&format!("{PATH}?step=P1D")).await;
    let days = days["points"].as_array().unwrap();
    assert_eq!((days.len(), &days[0]["time"]), (12, &"2026-03-02T00:00:00+00:00".into()));
    assert!(days.iter().all(|d| d["permeability_start_of_cycle"].is_number()));
}

#[tokio::test(flavor = "multi_thread")]
async fn minutes_and_hours_say_the_same() {
    let app = &shared().await.app;
    let span = "from=2026-03-09T06:00:00Z&to=2026-03-09T07:00:00+00:00";
    let hours = app.get_json(&format!("{PATH}?{span}")).await;
    let hour = &hours["points"].as_array().unwrap()[..];
    let [hour] = hour else { panic!("{hours}") };
    let minutes = app.get_json(&format!("{PATH}?{span}&step=PT1M")).await;
    let minutes = minutes["points"].as_array().unwrap();
    let counted: Vec<&Value> = minutes.iter().filter(|m| m["samples"] == 1).collect();
    assert_eq!(hour["samples"], counted.len());
    for field in ["permeability", "flux", "tmp", "temperature", "resistance"] {
        let mut values: Vec<f64> = counted.iter().map(|m| m[field].as_f64().unwrap()).collect();
        values.sort_by(f64::total_cmp);
        let n = values.len();
        let median = 0.5 * (values[(n - 1) / 2] + values[n / 2]);
        let of_hour = hour[field].as_f64().unwrap();
        // Both are rounded for show.
        assert!((median / of_hour - 1.0).abs() < 2e-3, "{field}: {median} {of_hour}");
    }
    let lowest = counted.iter().map(|m| m["permeability"].as_f64().unwrap()).reduce(f64::min);
    assert_eq!(hour["permeability_min"].as_f64(), lowest);
}

#[tokio::test(flavor = "multi_thread")]
async fn every_step_is_walked_whole() {
    let app = &shared().await.app;
    for (query, n) in [("step=PT1M&last=P3D", 401), ("last=P10D", 37), ("step=P1D&last=P30D", 5)] {
        let whole = app.get_json(&format!("{PATH}?{query}&limit=10000")).await;
        assert_eq!(whole["next"], Value::Null, "{query}");
        let whole = whole["points"].as_array().unwrap();
        assert!(whole.len() > 2 * n, "{query}: {}", whole.len());
        let walked = walk(app, &format!("{PATH}?{query}&limit={n}"), "points").await;
        assert_eq!(&walked, whole, "{query}");
    }
    let path = PATH;
    app.get(&format!("{PATH}?limit=10001")).await.problem(400, path);
    app.get(&format!("{PATH}?step=PT5M")).await.problem(400, path);
    let detail = app.get(&format!("{PATH}?from=2026-03-09T06:00:00")).await.problem(400, path);
    assert!(detail.contains("`from`") && detail.contains("no offset"), "{detail}");
}

#[tokio::test(flavor = "multi_thread")]
async fn a_table_holds_the_same_points() {
    let app = &shared().await.app;
    let points =
        app.get_json(&format!("{PATH}?last=P1D")).await["points"].as_array().unwrap().len();
    let by_name = app.get(&format!("{PATH}?last=P1D&format=csv")).await;
    let by_accept = app.accepting(&format!("{PATH}?last=P1D"), "text/csv").await;
    assert_eq!(by_name.text, by_accept.text);
    assert!(by_name.header("content-type").starts_with("text/csv"));
    assert!(by_name.header("content-disposition").contains("uf-1-permeability.csv"));
    assert_eq!(by_name.text.lines().count(), points + 1);
    assert!(by_name.text.starts_with("time,permeability [L/(m2.h.bar)]"));
    let json = app.accepting(&format!("{PATH}?last=P1D&format=json"), "text/csv").await;
    assert!(json.header("content-type").starts_with("application/json"));
}

#[tokio::test(flavor = "multi_thread")]
async fn without_data_there_are_no_points() {
    let app = TestApp::empty(1).await;
    for step in ["PT1M", "PT1H", "P1D"] {
        let series = app.get_json(&format!("{PATH}?step={step}")).await;
        assert_eq!(
            (&series["points"], &series["as_of"]),
            (&Value::Array(Vec::new()), &Value::Null)
        );
    }
}
