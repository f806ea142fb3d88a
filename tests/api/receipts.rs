use crate::support::{TestApp, export, walk};

#[tokio::test(flavor = "multi_thread")]
async fn receipts_are_found_again_page_by_page() {
    let app = TestApp::empty(6).await;
    for hours in 1..=5 {
        let path = format!("/v1/exports?file={}.csv", hours % 2);
        assert_eq!(app.post(&path, "text/csv", export(hours)).await.status, 201);
    }
    let all = app.get_json("/v1/receipts").await;
    let all = all["items"].as_array().unwrap();
    let rows: Vec<u64> = all.iter().map(|r| r["rows"].as_u64().unwrap()).collect();
    assert_eq!(rows, [300, 240, 180, 120, 60], "newest first");
    for n in [1, 2, 5, 6] {
        let found = walk(&app, &format!("/v1/receipts?limit={n}&source=scada"), "items").await;
        assert_eq!(&found, all, "{n} a page");
    }
    let odd = app.get_json("/v1/receipts?file=1.csv").await;
    assert_eq!(odd["items"].as_array().unwrap().len(), 3);
    // A plus lost in the address is mended.
    let since = all[1]["received"].as_str().unwrap();
    let since = app.get_json(&format!("/v1/receipts?since={since}")).await;
    assert_eq!(since["items"].as_array().unwrap().len(), 2);

    let place = format!("/v1/receipts/{}", all[0]["id"].as_str().unwrap());
    let got = app.accepting(&place, "text/plain").await;
    assert_eq!(got.text, format!("{}\n", all[0]["message"].as_str().unwrap()));
    assert_eq!(got.header("content-type"), "text/plain; charset=utf-8");

    app.get("/v1/receipts/none").await.problem(404, "/v1/receipts/none");
    let path = "/v1/receipts";
    app.get("/v1/receipts?cursor=00112233445566778899").await.problem(400, path);
    app.get("/v1/receipts?limit=0").await.problem(400, path);
    app.get("/v1/receipts?limit=1001").await.problem(400, path);
    app.get("/v1/receipts?limit=many").await.problem(400, path);
    let detail = app.get("/v1/receipts?sorce=scada").await.problem(400, path);
    assert!(detail.contains("Did you mean `source`") && detail.contains("since"), "{detail}");
    let detail = app.get("/v1/receipts?since=2026-03-02T05:00:00").await.problem(400, path);
    assert!(detail.contains("`since`") && detail.contains("no offset"), "{detail}");
    // A cursor of one list is none of another.
    let next = app.get_json("/v1/receipts?limit=1").await["next"].as_str().unwrap().to_owned();
    let cursor = next.split("cursor=").nth(1).unwrap();
    let path = "/v1/trains/uf-1/cycles";
    app.get(&format!("{path}?cursor={cursor}")).await.problem(400, path);
}
