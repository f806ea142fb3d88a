use reqwest::Method;

use crate::support::{Got, TestApp, shared};

#[tokio::test(flavor = "multi_thread")]
async fn whatever_is_no_success_is_a_problem() {
    let app = &shared().await.app;
    for path in ["/v1/nothing", "/v1", "/nothing", "/v1/trains/uf-1/nothing", "/v1/trains/"] {
        app.get(path).await.problem(404, path);
    }
    let got = Got::of(app.ask(Method::DELETE, "/v1/trains")).await;
    assert!(got.problem(405, "/v1/trains").contains("GET"));
    assert_eq!(got.header("allow"), "GET,HEAD");
    let got = Got::of(app.ask(Method::GET, "/v1/exports")).await;
    got.problem(405, "/v1/exports");
    assert_eq!(got.header("allow"), "POST,PUT");
    app.get("/v1/plant?x=1").await.problem(400, "/v1/plant");
    app.get("/live?x=1").await.problem(400, "/live");
    app.get("/v1/trains/%ff").await.problem(400, "/v1/trains/%ff");
    app.get("/v1/trains?order=plant&order=plant").await.problem(400, "/v1/trains");
    let head = Got::of(app.ask(Method::HEAD, "/v1/nothing")).await;
    assert_eq!((head.status, head.header("content-type")), (404, "application/problem+json"));
}

#[tokio::test(flavor = "multi_thread")]
async fn a_browser_that_asks_for_a_page_gets_one() {
    let app = &shared().await.app;
    let browser = "text/html,application/xhtml+xml,application/xml;q=0.9,*/*;q=0.8";
    let got = app.accepting("/no<b>thing", browser).await;
    assert_eq!((got.status, got.header("content-type")), (404, "text/html; charset=utf-8"));
    assert!(!got.text.contains("<b>"), "{}", got.text);
    app.accepting("/v1/nothing", browser).await.problem(404, "/v1/nothing");
    let index = app.accepting("/", browser).await;
    assert_eq!(index.status, 200);
    assert!(index.text.contains("<a href=\"/v1/trains/uf-1\">"), "{}", index.text);
    let plain = app.get("/").await;
    assert!(plain.text.contains("\nuf-2 (as of 2026-03-13T23:59:00+00:00): "), "{}", plain.text);
}

#[tokio::test(flavor = "multi_thread")]
async fn a_request_keeps_the_id_it_came_with() {
    let app = &shared().await.app;
    let with = |id: &str| Got::of(app.ask(Method::GET, "/live").header("x-request-id", id));
    assert_eq!(with("gateway-41").await.header("x-request-id"), "gateway-41");
    let other = with("a b").await;
    assert_eq!(other.header("x-request-id").len(), 36);
}

#[tokio::test(flavor = "multi_thread")]
async fn a_body_beyond_all_bounds_is_refused_by_its_length() {
    let app = TestApp::empty(1).await;
    let mut stream =
        tokio::net::TcpStream::connect(app.address.trim_start_matches("http://")).await.unwrap();
    use tokio::io::{AsyncReadExt, AsyncWriteExt};
    let head = "POST /v1/exports HTTP/1.1\r\nHost: x\r\nContent-Length: 9999999999\r\n\
                Content-Type: text/csv\r\nConnection: close\r\n\r\n";
    stream.write_all(head.as_bytes()).await.unwrap();
    let mut answer = String::new();
    stream.read_to_string(&mut answer).await.unwrap();
    assert!(answer.starts_with("HTTP/1.1 413 "), "{answer}");
    assert!(answer.contains("application/problem+json") && answer.contains("/v1/exports"));
    assert_eq!(app.get("/live").await.text, "live\n");
}
