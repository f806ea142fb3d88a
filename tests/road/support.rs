//! A simulated plant with its own store.

use std::path::Path;

use sqlx::sqlite::SqliteConnectOptions;
use sqlx::{AssertSqlSafe, ConnectOptions};
use washbell::base::Instant;
use washbell::ingest::{self, Accepted, Delivery};
use washbell::plant::{self, Plant};
use washbell::sim::{self, Recipe, Simulation};
use washbell::store::Store;
use washbell::work::{self, Cause, Worked};

/// A simulated plant, its plant file and a store of its own.
pub struct Plantlet {
    pub plant: Plant,
    pub store: Store,
    pub sim: Simulation,
    pub recipe: Recipe,
    pub end: Instant,
    _folder: tempfile::TempDir,
}

impl Plantlet {
    pub async fn of(recipe: Recipe, end: Instant) -> Self {
        let folder = tempfile::tempdir().unwrap();
        let file = sim::plant_toml(&recipe, "127.0.0.1:0", "washbell.db");
        let reading = plant::read(&file, Path::new("")).unwrap_or_else(|m| panic!("{m:?}"));
        let store = Store::open(&folder.path().join("washbell.db")).await.unwrap();
        Self {
            plant: reading.plant,
            store,
            sim: Simulation::new(recipe.clone()),
            recipe,
            end,
            _folder: folder,
        }
    }

    pub async fn take(&mut self, name: &str, text: &str, received: Instant) -> Accepted {
        let delivery = Delivery { source: &self.plant.sources[0], file: name, received };
        let digest = ingest::digest(text.as_bytes()).unwrap();
        ingest::accept_file(&self.store, &self.plant, &delivery, &digest, text.as_bytes())
            .await
            .unwrap()
    }

    pub async fn work(&self) -> Worked {
        self.work_at(self.end).await
    }

    async fn work_at(&self, now: Instant) -> Worked {
        let cause = Cause { now, receipt: None };
        work::catch_up(&self.store, &self.plant, &cause, &mut |_, _| {}).await.unwrap()
    }

    /// Takes a file and works what follows from it, as the daemon does.
    pub async fn post(&mut self, name: &str, text: &str, received: Instant) -> Accepted {
        let accepted = self.take(name, text, received).await;
        self.work_at(received).await;
        accepted
    }

    pub async fn rebuild(&self) {
        let cause = Cause { now: self.end, receipt: None };
        work::rebuild(&self.store, &self.plant, &cause, &mut |_, _| {}).await.unwrap();
    }

    /// Every derived row, written out exactly.
    pub async fn derived(&self) -> Vec<String> {
        const TABLES: [&str; 8] =
            ["cycle", "hour", "phase", "train_now", "day", "run", "assessment", "finding"];
        let mut out = Vec::new();
        for table in TABLES {
            out.extend(self.rows(table, "1", &[]).await);
        }
        out
    }

    /// What was said, but for ids, service time and receipt.
    pub async fn history(&self) -> Vec<String> {
        let hidden = ["seq", "item", "at_us", "receipt", "content"];
        let mut out = self.rows("history", "kind <> 'alarm' OR train IS NOT NULL", &hidden).await;
        out.sort();
        out
    }

    async fn rows(&self, table: &str, wanted: &str, hidden: &[&str]) -> Vec<String> {
        let options = SqliteConnectOptions::new().filename(self.store.path()).read_only(true);
        let mut conn = options.connect().await.unwrap();
        let names: Vec<String> = sqlx::query_scalar("SELECT name FROM pragma_table_info(?1)")
            .bind(table)
            .fetch_all(&mut conn)
            .await
            .unwrap();
        let columns: Vec<String> = names
            .iter()
            .filter(|n| !hidden.contains(&n.as_str()))
            .map(|n| format!("'{n}=' || quote(\"{n}\")"))
            .collect();
        let sql = format!(
            "SELECT '{table} ' || {} FROM {table} WHERE {wanted}",
            columns.join(" || ' ' || ")
        );
        sqlx::query_scalar(AssertSqlSafe(sql)).fetch_all(&mut conn).await.unwrap()
    }

    /// Fails with the first lines that differ.
    pub fn assert_same(&self, a: &[String], b: &[String], what: &str) {
        let first = a.iter().zip(b).position(|(a, b)| a != b);
        if let Some(i) = first {
            panic!("{what}: row {i} of {} and {} differs:\n{}\n{}", a.len(), b.len(), a[i], b[i]);
        }
        assert_eq!(a.len(), b.len(), "{what}: {:?}", a.get(b.len()).or(b.get(a.len())));
    }
}

/// A small generator for shuffling.
pub struct Prng(pub u64);

impl Prng {
    pub fn below(&mut self, n: usize) -> usize {
        self.0 =
            self.0.wrapping_mul(6_364_136_223_846_793_005).wrapping_add(1_442_695_040_888_963_407);
        ((self.0 >> 33) as usize) % n
    }
}
