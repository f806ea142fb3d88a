use reqwest::Method;
use reqwest::multipart::{Form, Part};
use serde_json::Value;

use crate::support::{Got, TestApp, export};

fn sum(receipt: &Value) -> u64 {
    receipt["readings"].as_object().unwrap().values().map(|v| v.as_u64().unwrap()).sum()
}

#[tokio::test(flavor = "multi_thread")]
async fn the_counts_add_up_and_the_same_file_changes_nothing() {
    let app = TestApp::empty(6).await;
    let file = export(6).replacen(",1\n", ",\n", 3).replacen(".", ".x.", 2);
    let got = app
        .post("/v1/exports?source=scada&file=C:%5Cout%5C0600.csv", "text/csv", file.clone())
        .await;
    assert_eq!(got.status, 201, "{got:?}");
    let receipt = got.json();
    assert_eq!((&receipt["file"], &receipt["source"]), (&"0600.csv".into(), &"scada".into()));
    assert_eq!(receipt["rows"], 360);
    assert_eq!(receipt["cells"], 360 * 9);
    assert_eq!(sum(&receipt), 360 * 9);
    assert_eq!(receipt["readings"]["missing"], 3);
    assert_eq!(receipt["readings"]["rejected"], 2);
    assert_eq!(
        (&receipt["outcome"], &receipt["analysis"]),
        (&"taken_with_faults".into(), &"done".into())
    );
    assert!(receipt["changed_from"]["uf-1"].is_string(), "{receipt}");
    let place = format!("/v1/receipts/{}", receipt["id"].as_str().unwrap());
    assert_eq!(got.header("location"), place);
    assert_eq!(app.get_json(&place).await, receipt);

    let trains = app.get_json("/v1/trains").await;
    let again = app.post("/v1/exports", "application/octet-stream", file).await;
    assert_eq!((again.status, again.json()), (200, receipt));
    assert_eq!(app.get_json("/v1/receipts").await["items"].as_array().unwrap().len(), 1);
    assert_eq!(
        app.get_json("/v1/trains").await["items"][0]["standing"]["limits"],
        trains["items"][0]["standing"]["limits"]
    );

    // The same readings in another file: nothing new.
    let got = app.post("/v1/exports", "text/csv", export(2)).await;
    assert_eq!(got.status, 201);
    assert_eq!(got.json()["readings"]["accepted"], 3 + 2);
    assert_eq!(sum(&got.json()), 120 * 9);
    assert_eq!(app.left_over(), Vec::<String>::new());
}

#[tokio::test(flavor = "multi_thread")]
async fn a_file_comes_in_however_curl_sends_it() {
    let app = TestApp::empty(6).await;
    // --data-binary, -T, -F, --data-binary with Content-Encoding.
    let form = "application/x-www-form-urlencoded";
    let got = app.post("/v1/exports?file=a.csv", form, export(1)).await;
    assert_eq!((got.status, &got.json()["readings"]["accepted"]), (201, &540.into()), "{got:?}");

    let got = Got::of(app.ask(Method::PUT, "/v1/exports?file=b.csv").body(export(2))).await;
    assert_eq!((got.status, &got.json()["readings"]["accepted"]), (201, &540.into()), "{got:?}");

    let part = Part::text(export(3)).file_name("c.csv");
    let post = app.ask(Method::POST, "/v1/exports").multipart(Form::new().part("file", part));
    let got = Got::of(post).await;
    assert_eq!((got.status, &got.json()["file"]), (201, &"c.csv".into()), "{got:?}");

    let packed = gzip(export(4).as_bytes());
    let post = app.ask(Method::POST, "/v1/exports?file=d.csv").header("content-encoding", "gzip");
    let got = Got::of(post.body(packed.clone())).await;
    assert_eq!((got.status, &got.json()["readings"]["accepted"]), (201, &540.into()), "{got:?}");
    // The digest is that of the file, however it was packed.
    let plain = app.post("/v1/exports", "text/csv", export(4)).await;
    assert_eq!((plain.status, plain.json()), (200, got.json()));

    let broken = app.ask(Method::POST, "/v1/exports").header("content-encoding", "gzip");
    let got = Got::of(broken.body(packed[..packed.len() / 2].to_vec())).await;
    assert!(got.problem(400, "/v1/exports").contains("to its end"));
    assert_eq!(app.left_over(), Vec::<String>::new());
}

#[tokio::test(flavor = "multi_thread")]
async fn what_is_no_export_is_refused_with_the_reason() {
    let app = TestApp::empty(6).await;
    let path = "/v1/exports";
    let eaten = export(1).replace('\n', "");
    let got = app.post(path, "application/x-www-form-urlencoded", eaten).await;
    assert!(got.problem(422, path).contains("--data-binary"), "{got:?}");
    assert_eq!(got.json()["type"], "/problems/unreadable-export");
    assert!(got.json()["errors"][0]["detail"].is_string());

    let got = app.post(path, "text/csv", "").await;
    assert!(got.problem(422, path).contains("empty"));
    let got = app.post(path, "text/csv", "Timestamp,XX-1\n2026-03-02 00:00:00,1\n").await;
    got.problem(422, path);
    let got = app.post("/v1/exports?source=scda", "text/csv", export(1)).await;
    assert!(got.problem(422, path).contains("did you mean `scada`"), "{got:?}");
    let got = app.post("/v1/exports?complete_to=2026-03-02T01:00:00Z", "text/csv", export(1)).await;
    assert!(got.problem(422, path).contains("changes only"));
    let got = app.post("/v1/exports?complete_to=2026-03-02T01:00:00", "text/csv", export(1)).await;
    assert!(got.problem(400, path).contains("no offset"));
    let got = app.post(path, "application/json", "{}").await;
    assert!(got.problem(415, path).contains("/v1/readings"));
    let got = app.post(path, "application/pdf", "%PDF").await;
    got.problem(415, path);
    let got = Got::of(app.ask(Method::POST, path).header("content-encoding", "br").body("x")).await;
    assert!(got.problem(415, path).contains("gzip"));
    let two = Form::new().text("a", export(1)).text("b", "x");
    let got = Got::of(app.ask(Method::POST, path).multipart(two)).await;
    assert!(got.problem(422, path).contains("one part"));
    let got = app.post(path, "multipart/form-data", "no boundary").await;
    got.problem(400, path);

    assert_eq!(app.get_json("/v1/receipts").await["items"], Value::Array(Vec::new()));
    assert_eq!(app.left_over(), Vec::<String>::new());
}

#[tokio::test(flavor = "multi_thread")]
async fn two_posts_of_one_file_at_once_have_one_receipt() {
    let app = TestApp::empty(6).await;
    let (a, b, c) = tokio::join!(
        app.post("/v1/exports", "text/csv", export(5)),
        app.post("/v1/exports", "text/csv", export(5)),
        app.post("/v1/exports", "text/csv", export(5)),
    );
    let mut statuses = [a.status, b.status, c.status];
    statuses.sort_unstable();
    assert_eq!(statuses, [200, 200, 201]);
    assert_eq!((&a.json()["id"], &b.json()["id"]), (&b.json()["id"], &c.json()["id"]));
}

#[tokio::test(flavor = "multi_thread")]
async fn much_work_is_done_after_the_answer() {
    let days = 50;
    let app = TestApp::empty(days * 24).await;
    let got = app.post("/v1/exports", "text/csv", export(days * 24)).await;
    let receipt = got.json();
    assert_eq!((got.status, &receipt["analysis"]), (201, &"pending".into()));
    let place = got.header("location").to_owned();
    for _ in 0..600 {
        let now = app.get_json(&place).await;
        if now["analysis"] == "done" {
            assert!(now["changed_from"]["uf-2"].is_string());
            return;
        }
        tokio::time::sleep(std::time::Duration::from_millis(100)).await;
    }
    panic!("the work was not done in a minute");
}

/// A gzip file of stored blocks, RFC 1951 and 1952.
fn gzip(bytes: &[u8]) -> Vec<u8> {
    let mut out = vec![0x1f, 0x8b, 8, 0, 0, 0, 0, 0, 0, 255];
    let mut blocks = bytes.chunks(0xffff).peekable();
    while let Some(block) = blocks.next() {
        let n = block.len() as u16;
        out.push(u8::from(blocks.peek().is_none()));
        out.extend(n.to_le_bytes());
        out.extend((!n).to_le_bytes());
        out.extend(block);
    }
    let mut crc = !0u32;
    for byte in bytes {
        crc ^= u32::from(*byte);
        for _ in 0..8 {
            crc = (crc >> 1) ^ (0xedb8_8320 & (crc & 1).wrapping_neg());
        }
    }
    out.extend((!crc).to_le_bytes());
    out.extend((bytes.len() as u32).to_le_bytes());
    out
}
