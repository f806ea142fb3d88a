use reqwest::Method;
use serde_json::Value;

use crate::support::{DAYS, Got, TestApp, shared, walk};

#[tokio::test(flavor = "multi_thread")]
async fn trains_say_what_stands() {
    let shared = shared().await;
    assert_eq!(shared.receipt["analysis"], "done", "{DAYS} days are worked at once");
    let app = &shared.app;
    let all = app.get_json("/v1/trains").await;
    let ids = |page: &Value| -> Vec<String> {
        let items = page["items"].as_array().unwrap();
        items.iter().map(|t| t["id"].as_str().unwrap().to_owned()).collect()
    };
    assert_eq!(ids(&all), ["uf-1", "uf-2"]);
    // The second fouls three times as fast.
    let by_date = app.get_json("/v1/trains?order=clean_by").await;
    assert_eq!(ids(&by_date), ["uf-2", "uf-1"]);
    // The age of data grows from one request to the next; what stands does not.
    let said = |t: &Value| t["standing"]["sentence"].as_str().unwrap().to_owned();
    assert_eq!(said(&by_date["items"][0]), said(&all["items"][1]));
    let walked = walk(app, "/v1/trains?order=clean_by&limit=1", "items").await;
    let listed = by_date["items"].as_array().unwrap();
    assert_eq!(
        walked.iter().map(said).collect::<Vec<_>>(),
        listed.iter().map(said).collect::<Vec<_>>()
    );

    let one = app.get_json("/v1/trains/uf-2").await;
    assert_eq!(one["standing"]["as_of"], "2026-03-13T23:59:00+00:00");
    assert_eq!(one["standing"]["stale"], false);
    assert!(!one["standing"]["sentence"].as_str().unwrap().is_empty());
    assert_ne!(one["standing"]["advice"], "cannot_advise");
    let us = app.get_json("/v1/trains/uf-2?units=us").await;
    assert_eq!(us["standing"]["limits"]["tmp_clean"]["unit"], "[psi]");
    assert_eq!(one["standing"]["limits"]["tmp_clean"]["unit"], "bar");

    let detail = app.get("/v1/trains/uf2").await.problem(404, "/v1/trains/uf2");
    assert!(detail.contains("did you mean `uf-2`"), "{detail}");
    app.get("/v1/trains?order=size").await.problem(400, "/v1/trains");
    app.get("/v1/trains?units=cgs").await.problem(400, "/v1/trains");
}

#[tokio::test(flavor = "multi_thread")]
async fn the_plant_is_as_its_file_says() {
    let app = &shared().await.app;
    let plant = app.get_json("/v1/plant").await;
    assert_eq!(plant["sources"][0]["id"], "scada");
    assert_eq!(plant["trains"].as_array().unwrap().len(), 2);
    assert_eq!(plant["reference_temperature"], 20.0);
    assert_eq!(app.get_json("/v1/plant?units=us").await["reference_temperature"], 68.0);
}

#[tokio::test(flavor = "multi_thread")]
async fn cycles_are_walked_page_by_page() {
    let app = &shared().await.app;
    let path = "/v1/trains/uf-1/cycles";
    let all = app.get_json(&format!("{path}?last=P2D&limit=1000")).await;
    assert_eq!(all["next"], Value::Null);
    let all = all["items"].as_array().unwrap();
    assert!(all.len() > 50, "{}", all.len());
    assert!(all.iter().filter(|c| c["taken_off"].is_number()).count() > 30);
    assert_eq!(&walk(app, &format!("{path}?last=P2D&limit=17"), "items").await, all);
    let start = all[3]["start"].as_str().unwrap();
    let end = all[5]["start"].as_str().unwrap();
    let some = app.get_json(&format!("{path}?from={start}&to={end}")).await;
    assert_eq!(some["items"].as_array().unwrap()[..], all[3..5]);
    app.get(&format!("{path}?from={end}&to={start}")).await.problem(400, path);
    app.get(&format!("{path}?last=P2D&to={start}")).await.problem(400, path);
    app.get(&format!("{path}?last=P1M")).await.problem(400, path);
}

#[tokio::test(flavor = "multi_thread")]
async fn fouling_is_told_and_not_invented() {
    let app = &shared().await.app;
    let fouling = app.get_json("/v1/trains/uf-2/fouling").await;
    assert_eq!(fouling["train"], "uf-2");
    assert!(fouling["trend"]["slope"].as_f64().unwrap() > 0.0, "{fouling}");
    assert!(fouling["resistances"]["membrane"].is_object(), "{fouling}");

    let empty = TestApp::empty(1).await;
    let path = "/v1/trains/uf-1/fouling";
    assert!(empty.get(path).await.problem(404, path).contains("Post an export"));
    let train = empty.get_json("/v1/trains/uf-1").await;
    assert_eq!(train["standing"]["advice"], "cannot_advise");
    assert_eq!(train["standing"]["as_of"], Value::Null);
}

#[tokio::test(flavor = "multi_thread")]
async fn what_is_known_already_is_not_sent_again() {
    let app = &shared().await.app;
    let path = "/v1/trains/uf-1/fouling";
    let got = app.get(path).await;
    let tag = got.header("etag").to_owned();
    assert!(tag.starts_with('"') && tag.len() == 66, "{tag}");
    let ask = |tags: &str| Got::of(app.ask(Method::GET, path).header("if-none-match", tags));
    let known = ask(&format!("\"x\", W/{tag}")).await;
    assert_eq!((known.status, known.text.as_str(), known.header("etag")), (304, "", tag.as_str()));
    assert_eq!(known.header("content-type"), "");
    assert_eq!(ask("*").await.status, 304);
    assert_eq!(ask("\"x\"").await.text, got.text);
    let other = app.get(&format!("{path}?units=us")).await;
    assert_ne!(other.header("etag"), tag);
    let head = Got::of(app.ask(Method::HEAD, path)).await;
    assert_eq!((head.status, head.text.as_str(), head.header("etag")), (200, "", tag.as_str()));
}
