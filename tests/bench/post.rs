//! What an hourly export of eight trains costs, receipt and analysis included, on a month and on
//! three years of history. The two should cost the same: a post works the open day and the
//! current runs, whatever lies before them.
//!
//! The history is posted by the hour as well, so that there are as many receipts and chunks as a
//! plant would have, and analysed in one go. `README.md` beside this file has the figures.

use std::io::Write as _;
use std::path::Path;
use std::time::{Duration, Instant as Watch};

use criterion::{Criterion, SamplingMode};
use tokio::runtime::Runtime;
use washbell::base::{DAY_US, HOUR_US, Instant, Span, Zone};
use washbell::ingest::{self, Accepted, Delivery};
use washbell::plant::{self, Plant};
use washbell::sim::{self, Dirt, Noise, PlannedClean, Recipe, Simulation};
use washbell::store::{Cleaning, Store, new_id};
use washbell::work::{self, Cause};

const TRAINS: u32 = 8;
/// Days between two cleans of a train.
const CLEANED_EVERY: i64 = 38;
/// Days after the history in which posts may fall.
const ROOM_DAYS: i64 = 400;

fn recipe(days: i64) -> Recipe {
    let start = Instant::parse("2023-01-02T00:00:00Z").expect("a time");
    let zone = Zone::named("Europe/London").expect("a zone");
    let mut recipe = Recipe::plain(7, zone, start, TRAINS);
    recipe.noise = Noise::usual();
    recipe.dirt = Dirt::usual();
    for (k, train) in recipe.trains.iter_mut().enumerate() {
        train.wander_sd = 0.2;
        let mut at = 10 + 4 * k as i64;
        while at < days + ROOM_DAYS {
            let begin = start.plus(at * DAY_US + 7 * HOUR_US);
            train.cleans.push(PlannedClean::by_procedure(begin, 0.96, &format!("c-{k}-{at}")));
            at += CLEANED_EVERY;
        }
    }
    recipe
}

/// A plant with history, ready for its next hour.
struct Site {
    plant: Plant,
    store: Store,
    sim: Simulation,
    header: String,
    now: Instant,
    /// Of every post: receipt, analysis.
    costs: Vec<(Duration, Duration)>,
    _folder: tempfile::TempDir,
}

impl Site {
    async fn with_history(days: i64) -> Self {
        let recipe = recipe(days);
        let folder = tempfile::tempdir().expect("a temporary folder");
        let file = sim::plant_toml(&recipe, "127.0.0.1:0", "washbell.db");
        let plant = plant::read(&file, Path::new("")).expect("a plant file").plant;
        let store = Store::open(&folder.path().join("washbell.db")).await.expect("a store");
        let mut site = Self {
            plant,
            store,
            header: sim::header(&recipe),
            now: recipe.start,
            sim: Simulation::new(recipe),
            costs: Vec::new(),
            _folder: folder,
        };
        site.fill(days).await;
        site
    }

    async fn fill(&mut self, days: i64) {
        let watch = Watch::now();
        let end = self.now.plus(days * DAY_US);
        for clean in self.sim.recipe().recorded_cleans(end.plus(ROOM_DAYS * DAY_US)) {
            let cleaning = Cleaning {
                id: new_id(),
                train: clean.train,
                span: Span::new(clean.start, clean.end),
                kind: clean.kind,
                steps: clean.steps,
                work_order: None,
                reference: Some(clean.reference),
                recorded: clean.end,
                by: Some("day shift".to_owned()),
            };
            self.store.save_cleaning(&self.plant.id, &cleaning, &[]).await.expect("a cleaning");
        }
        for day in 1..=days {
            for _ in 0..24 {
                let text = self.next_hour();
                self.take(&text).await;
            }
            if day % 100 == 0 {
                progress(&format!("{day} of {days} days posted",));
            }
        }
        let posted = watch.elapsed();
        self.analyse().await;
        progress(&format!(
            "{days} days of history: posted in {:.1} s, analysed in {:.1} s",
            posted.as_secs_f64(),
            (watch.elapsed() - posted).as_secs_f64()
        ));
        println!();
    }

    fn next_hour(&mut self) -> String {
        self.now = self.now.plus(HOUR_US);
        let mut text = self.header.clone();
        self.sim.write_rows(self.now, &mut text);
        text
    }

    async fn take(&self, text: &str) {
        let name = format!("{}.csv", self.now.micros() / HOUR_US);
        let source = &self.plant.sources[0];
        let delivery = Delivery { source, file: &name, received: self.now };
        let digest = ingest::digest(text.as_bytes()).expect("a digest");
        let accepted =
            ingest::accept_file(&self.store, &self.plant, &delivery, &digest, text.as_bytes())
                .await
                .expect("a receipt");
        assert!(matches!(accepted, Accepted::New { .. }), "{accepted:?}");
    }

    async fn analyse(&self) {
        let cause = Cause { now: self.now, receipt: None };
        let mut quiet = |_, _| {};
        work::catch_up(&self.store, &self.plant, &cause, &mut quiet).await.expect("work");
    }

    /// Posts the next hour; what writing it costs the simulated plant is not counted.
    async fn post(&mut self) -> Duration {
        let text = self.next_hour();
        let watch = Watch::now();
        self.take(&text).await;
        let taken = watch.elapsed();
        self.analyse().await;
        let all = watch.elapsed();
        self.costs.push((taken, all - taken));
        all
    }

    fn report(&mut self, name: &str) {
        let costs = std::mem::take(&mut self.costs);
        let print = |what: &str, mut list: Vec<Duration>| {
            list.sort();
            let at = |share: f64| {
                let place = (share * (list.len() - 1) as f64).round() as usize;
                list[place].as_secs_f64() * 1e3
            };
            println!(
                "{name}, {what}: p50 {:.2} ms, p99 {:.2} ms, most {:.2} ms, {} posts",
                at(0.5),
                at(0.99),
                at(1.0),
                list.len()
            );
        };
        print("receipt", costs.iter().map(|c| c.0).collect());
        print("analysis", costs.iter().map(|c| c.1).collect());
        print("post", costs.iter().map(|c| c.0 + c.1).collect());
    }
}

fn progress(line: &str) {
    print!("\r{line}");
    std::io::stdout().flush().expect("a terminal");
}

fn bench(c: &mut Criterion, runtime: &Runtime, name: &str, days: i64) {
    let mut site: Option<Site> = None;
    let mut group = c.benchmark_group("post");
    group.sampling_mode(SamplingMode::Flat).sample_size(60);
    group.measurement_time(Duration::from_secs(25));
    group.bench_function(name, |b| {
        // Only once it is known that this one is asked for: the history takes minutes.
        let site = site.get_or_insert_with(|| runtime.block_on(Site::with_history(days)));
        b.iter_custom(|n| {
            let mut sum = Duration::ZERO;
            for _ in 0..n {
                sum += runtime.block_on(site.post());
            }
            sum
        });
    });
    group.finish();
    if let Some(mut site) = site {
        site.report(name);
    }
}

fn main() {
    let mut c = Criterion::default().configure_from_args();
    let runtime = Runtime::new().expect("a runtime");
    bench(&mut c, &runtime, "on a month", 30);
    bench(&mut c, &runtime, "on three years", 3 * 365 + 1);
    c.final_summary();
}
