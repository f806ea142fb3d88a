//! The description against the service.

use std::collections::BTreeSet;

use reqwest::Method;
use serde_json::Value;

use crate::support::{Got, shared};

const METHODS: [&str; 5] = ["get", "put", "post", "delete", "patch"];

fn operations(document: &Value) -> Vec<(String, String, Value)> {
    let mut out = Vec::new();
    for (path, item) in document["paths"].as_object().unwrap() {
        for method in METHODS {
            if let Some(operation) = item.get(method) {
                out.push((path.clone(), method.to_owned(), operation.clone()));
            }
        }
    }
    out
}

#[tokio::test(flavor = "multi_thread")]
async fn what_is_described_is_there_and_nothing_else() {
    let app = &shared().await.app;
    let document = app.get_json("/openapi.json").await;
    assert!(document["openapi"].as_str().unwrap().starts_with("3.1"), "{}", document["openapi"]);
    let operations = operations(&document);
    let paths: BTreeSet<&str> = operations.iter().map(|(p, _, _)| p.as_str()).collect();
    for path in [
        "/",
        "/live",
        "/ready",
        "/openapi.json",
        "/v1/exports",
        "/v1/readings",
        "/v1/receipts",
        "/v1/receipts/{id}",
        "/v1/plant",
        "/v1/trains",
        "/v1/trains/{train}",
        "/v1/trains/{train}/permeability",
        "/v1/trains/{train}/cycles",
        "/v1/trains/{train}/fouling",
        "/v1/cleanings",
        "/v1/cleanings/{id}",
        "/v1/recommendations",
        "/v1/recommendations/{id}",
        "/v1/recommendations/{id}/accept",
        "/v1/recommendations/{id}/defer",
        "/v1/recommendations/{id}/decline",
        "/v1/alarms",
        "/v1/alarms/{id}",
        "/v1/alarms/{id}/acknowledge",
        "/v1/alarms/{id}/shelve",
        "/v1/work-orders",
        "/v1/work-orders/{number}",
        "/v1/work-orders/{number}/approve",
        "/v1/work-orders/{number}/schedule",
        "/v1/work-orders/{number}/start",
        "/v1/work-orders/{number}/wait",
        "/v1/work-orders/{number}/complete",
        "/v1/work-orders/{number}/verify",
        "/v1/work-orders/{number}/reject",
        "/v1/work-orders/{number}/cancel",
        "/v1/work-orders/{number}/external",
    ] {
        assert!(paths.contains(path), "{path} is not described");
    }
    // A method that no route takes is answered with those that it takes.
    for path in paths {
        let described: BTreeSet<String> = operations
            .iter()
            .filter(|(p, _, _)| p == path)
            .map(|(_, m, _)| m.to_uppercase())
            .collect();
        let got = Got::of(app.ask(Method::TRACE, &path.replace(['{', '}'], "x"))).await;
        assert_eq!(got.status, 405, "{path}");
        let taken = got.header("allow").split(',').map(str::to_owned);
        let taken: BTreeSet<String> = taken.filter(|m| m != "HEAD").collect();
        assert_eq!(taken, described, "{path}");
    }
}

/// Every handler with a description is routed: the descriptions in the source are counted.
#[tokio::test(flavor = "multi_thread")]
async fn every_handler_is_routed() {
    let document = shared().await.app.get_json("/openapi.json").await;
    let folder = std::path::Path::new(env!("CARGO_MANIFEST_DIR")).join("src/api");
    let mut described = 0;
    for entry in std::fs::read_dir(folder).unwrap() {
        let path = entry.unwrap().path();
        if path.is_file() {
            let text = std::fs::read_to_string(path).unwrap();
            described += text.matches("#[utoipa::path(").count();
            assert!(!text.contains(".route("), "routes go through routes!, which describes them");
        }
    }
    assert_eq!(operations(&document).len(), described);
}

#[tokio::test(flavor = "multi_thread")]
async fn operations_are_whole() {
    let document = shared().await.app.get_json("/openapi.json").await;
    let mut ids = BTreeSet::new();
    for (path, method, operation) in operations(&document) {
        let at = format!("{method} {path}");
        assert!(ids.insert(operation["operationId"].as_str().unwrap().to_owned()), "{at}");
        assert!(operation["summary"].is_string(), "{at}");
        let problem = &operation["responses"]["default"]["content"]["application/problem+json"];
        assert_eq!(problem["schema"]["$ref"], "#/components/schemas/Problem", "{at}");
        let empty = Vec::new();
        let parameters = operation["parameters"].as_array().unwrap_or(&empty);
        for parameter in parameters {
            assert!(parameter["description"].is_string(), "{at}: {parameter}");
            let name = parameter["name"].as_str().unwrap();
            let in_path = path.contains(&format!("{{{name}}}"));
            assert_eq!(parameter["in"], if in_path { "path" } else { "query" }, "{at}: {name}");
            assert_eq!(parameter["required"], in_path, "{at}: {name}");
        }
    }
}

/// Two types of one name would silently be one schema: the names are those of the types, so no
/// two types of the views and bodies may share one.
#[tokio::test(flavor = "multi_thread")]
async fn schemas_are_there_and_their_names_are_distinct() {
    let document = shared().await.app.get_json("/openapi.json").await;
    let schemas = document["components"]["schemas"].as_object().unwrap();
    for reference in document.to_string().split("\"#/components/schemas/").skip(1) {
        let name = reference.split('"').next().unwrap();
        assert!(schemas.contains_key(name), "{name} is referred to and not there");
    }
    let mut names = BTreeSet::new();
    let source = std::path::Path::new(env!("CARGO_MANIFEST_DIR")).join("src");
    let mut folders = vec![source];
    while let Some(folder) = folders.pop() {
        for entry in std::fs::read_dir(folder).unwrap() {
            let path = entry.unwrap().path();
            if path.is_dir() {
                folders.push(path);
                continue;
            }
            let text = std::fs::read_to_string(&path).unwrap();
            for part in text.split("ToSchema)]").skip(1) {
                let declared = part.lines().find(|l| {
                    l.starts_with("pub ") || l.starts_with("struct ") || l.starts_with("enum ")
                });
                let words = declared.unwrap().trim_start_matches("pub ");
                let name = words.split([' ', '<', '(', '{']).nth(1).unwrap();
                assert!(
                    names.insert(name.to_owned()),
                    "{name} is declared twice, again in {path:?}"
                );
            }
        }
    }
    assert!(names.len() > 40, "{names:?}");
}
