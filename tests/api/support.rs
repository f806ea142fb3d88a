//! A service to ask.

use std::sync::OnceLock;

use reqwest::{Client, Method, RequestBuilder, Response, StatusCode};
use serde_json::Value;
use tempfile::TempDir;
use washbell::api::{self, App};
use washbell::base::{HOUR_US, Instant, MINUTE_US, Zone};
use washbell::plant;
use washbell::sim::{self, Noise, Recipe, Simulation};
use washbell::store::Store;
use washbell::work::{WallClock, Worker};

/// Days of history of the shared service.
pub const DAYS: i64 = 12;

pub fn start() -> Instant {
    Instant::parse("2026-03-02T00:00:00Z").unwrap()
}

/// Two trains, the second of which fouls fast.
pub fn recipe() -> Recipe {
    let mut recipe = Recipe::plain(7, Zone::named("Europe/London").unwrap(), start(), 2);
    recipe.noise = Noise { pressure_pa: 300.0, flow_share: 0.004, temperature_k: 0.1 };
    recipe.trains[1].rate_per_m_day *= 3.0;
    recipe
}

/// The export of the first `hours`.
pub fn export(hours: i64) -> String {
    let recipe = recipe();
    let mut text = sim::header(&recipe);
    Simulation::new(recipe).write_rows(start().plus(hours * HOUR_US), &mut text);
    text
}

/// A service on a free port. Its folder goes with it.
pub struct TestApp {
    pub address: String,
    pub worker: Worker,
    pub folder: TempDir,
    client: Client,
}

/// An answer, read to its end.
#[derive(Debug)]
pub struct Got {
    pub status: u16,
    pub headers: reqwest::header::HeaderMap,
    pub text: String,
}

impl Got {
    pub async fn of(request: RequestBuilder) -> Self {
        let response: Response = request.send().await.unwrap();
        let (status, headers) = (response.status().as_u16(), response.headers().clone());
        Self { status, headers, text: response.text().await.unwrap() }
    }
    pub fn json(&self) -> Value {
        serde_json::from_str(&self.text).unwrap_or_else(|e| panic!("{e}: {self:?}"))
    }
    pub fn header(&self, name: &str) -> &str {
        self.headers.get(name).map_or("", |v| v.to_str().unwrap())
    }
    /// Checks that it is a problem of that status, about that path, and answers its detail.
    pub fn problem(&self, status: u16, path: &str) -> String {
        assert_eq!(self.status, status, "{self:?}");
        assert_eq!(self.header("content-type"), "application/problem+json", "{self:?}");
        let p = self.json();
        assert_eq!((&p["status"], &p["instance"]), (&status.into(), &path.into()), "{p}");
        assert!(p["type"].as_str().unwrap().starts_with("/problems/"), "{p}");
        assert!(!p["title"].as_str().unwrap().is_empty(), "{p}");
        assert!(self.headers.contains_key("x-request-id"));
        p["detail"].as_str().unwrap().to_owned()
    }
}

impl TestApp {
    /// A service without data, whose clock stands a little after the first `hours`.
    pub async fn empty(hours: i64) -> Self {
        let file = sim::plant_toml(&recipe(), "127.0.0.1:0", "washbell.db");
        Self::of(&file, hours).await
    }

    /// The same with another plant file.
    pub async fn of(file: &str, hours: i64) -> Self {
        let folder = tempfile::tempdir().unwrap();
        let plant = plant::read(file, std::path::Path::new("")).unwrap().plant;
        let store = Store::open(&folder.path().join("washbell.db")).await.unwrap();
        let clock = WallClock::set_to(start().plus(hours * HOUR_US + 5 * MINUTE_US));
        let worker = Worker::new(store, plant, clock);
        let router = api::router(App::new(worker.clone()));
        let listener = tokio::net::TcpListener::bind("127.0.0.1:0").await.unwrap();
        let address = format!("http://{}", listener.local_addr().unwrap());
        tokio::spawn(async move { axum::serve(listener, router).await.unwrap() });
        Self { address, worker, folder, client: Client::new() }
    }

    pub fn ask(&self, method: Method, path: &str) -> RequestBuilder {
        self.client.request(method, format!("{}{path}", self.address))
    }
    pub async fn get(&self, path: &str) -> Got {
        Got::of(self.ask(Method::GET, path)).await
    }
    pub async fn get_json(&self, path: &str) -> Value {
        let got = self.get(path).await;
        assert_eq!(got.status, StatusCode::OK.as_u16(), "{path}: {got:?}");
        got.json()
    }
    pub async fn accepting(&self, path: &str, accept: &str) -> Got {
        Got::of(self.ask(Method::GET, path).header("accept", accept)).await
    }
    pub async fn post(&self, path: &str, media: &str, body: impl Into<reqwest::Body>) -> Got {
        Got::of(self.ask(Method::POST, path).header("content-type", media).body(body)).await
    }

    /// Files beside the database that are none of its own.
    pub fn left_over(&self) -> Vec<String> {
        std::fs::read_dir(self.folder.path())
            .unwrap()
            .map(|e| e.unwrap().file_name().into_string().unwrap())
            .filter(|name| !name.starts_with("washbell.db"))
            .collect()
    }
}

/// What stands in the shared service: its address, and the receipt of its import.
pub struct Shared {
    pub app: TestApp,
    pub receipt: Value,
}

/// A service with twelve days of history, imported through its own door. For tests that only
/// read: it lives in a thread of its own, beyond any single test.
pub async fn shared() -> &'static Shared {
    static SHARED: OnceLock<Shared> = OnceLock::new();
    tokio::task::spawn_blocking(|| {
        SHARED.get_or_init(|| {
            let (tell, told) = std::sync::mpsc::channel();
            std::thread::spawn(move || {
                let runtime = tokio::runtime::Runtime::new().unwrap();
                runtime.block_on(async move {
                    let app = TestApp::empty(DAYS * 24).await;
                    let got = app
                        .post("/v1/exports?file=history.csv", "text/csv", export(DAYS * 24))
                        .await;
                    assert_eq!(got.status, 201, "{got:?}");
                    tell.send(Shared { app, receipt: got.json() }).unwrap();
                    std::future::pending::<()>().await;
                });
            });
            told.recv().unwrap()
        })
    })
    .await
    .unwrap()
}

/// All items of a list, page by page.
pub async fn walk(app: &TestApp, path: &str, field: &str) -> Vec<Value> {
    let (mut out, mut next) = (Vec::new(), Some(path.to_owned()));
    while let Some(path) = next {
        let got = app.get(&path).await;
        assert_eq!(got.status, 200, "{path}: {got:?}");
        let page = got.json();
        out.extend(page[field].as_array().unwrap().iter().cloned());
        next = page["next"].as_str().map(str::to_owned);
        let link = next.as_ref().map_or(String::new(), |n| format!("<{n}>; rel=\"next\""));
        assert_eq!(got.header("link"), link);
    }
    out
}
