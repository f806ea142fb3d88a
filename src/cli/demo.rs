//! `demo`: an invented plant with months of history, put in through the same doors as anybody's,
//! analysed, told of, and served.

use std::fs;
use std::path::{Path, PathBuf};
use std::process::ExitCode;
use std::time::Instant as Stopwatch;

use anyhow::{Context, anyhow};
use tokio::net::TcpListener;

use super::{EX_DATAERR, EX_USAGE, Failure};
use crate::base::{DAY_US, HOUR_US, Instant, Span};
use crate::ingest::{Delivery, accept_file, digest};
use crate::plant::Plant;
use crate::sim::{self, Recipe, Simulation};
use crate::store::{Cleaning, Store, new_id};
use crate::work::{self, Cause, WallClock, Worker};

/// The seed of the demo's plant.
const SEED: u64 = 7;
const LISTEN: &str = "127.0.0.1:8420";

#[derive(clap::Args)]
pub struct Args {
    /// Where to listen [default: 127.0.0.1:8420, or a free port]
    #[arg(long, value_name = "ADDR")]
    listen: Option<String>,
    /// Print what was found, and exit
    #[arg(long)]
    once: bool,
    /// End of the history, RFC 3339; sets this process's clock an hour later [default: one hour
    /// before the last whole hour]
    #[arg(long, value_name = "TIME")]
    end: Option<String>,
    /// Where to leave plant.toml, next-hour.csv and the database [default: a new temporary folder]
    #[arg(long, value_name = "DIR")]
    dir: Option<PathBuf>,
}

pub async fn run(args: Args) -> Result<ExitCode, Failure> {
    let (end, clock) = times(args.end.as_deref())?;
    let dir = folder(args.dir.as_deref())?;
    let recipe = sim::demo(SEED, end);
    let listener = if args.once { None } else { Some(listen(args.listen.as_deref()).await?) };
    let bound = listener.as_ref().and_then(|l| l.local_addr().ok());
    let listen = bound.map_or_else(|| LISTEN.to_owned(), |a| a.to_string());
    let file = dir.join("plant.toml");
    fs::write(&file, sim::plant_toml(&recipe, &listen, "washbell.db"))
        .context("cannot write the plant file")?;
    let plant = super::read_plant(&file)?.plant;
    let store = Store::open(&plant.service.database).await?;
    super::run::note_plant_file(&store, &plant, &file, clock).await?;

    let watch = Stopwatch::now();
    let readings = fill(&store, &plant, &recipe, end, clock, &dir).await?;
    let cause = Cause { now: clock.now(), receipt: None };
    let worked = work::catch_up(&store, &plant, &cause, &mut |_, _| {}).await?;
    eprintln!(
        "{}, an invented plant: {:.1} million readings of {} trains taken, {} train-days worked in {:.1} s.",
        plant.name,
        readings as f64 / 1e6,
        plant.trains.len(),
        worked.train_days,
        watch.elapsed().as_secs_f64()
    );
    super::say(&super::told::told(&store, &plant, clock).await?);
    let Some(listener) = listener else {
        store.close().await;
        return Ok(ExitCode::SUCCESS);
    };
    super::say(&format!(
        "\nServing on http://{listen}/. Post the next hour with\n\n  curl --data-binary @{} 'http://{listen}/v1/exports?file=next-hour.csv'\n\n",
        dir.join("next-hour.csv").display()
    ));
    super::logs::begin();
    super::serve::until_stopped(Worker::new(store, plant, clock), listener, &file).await
}

/// Where it was asked for; else the usual port, or a free one where that is taken.
async fn listen(asked: Option<&str>) -> Result<TcpListener, Failure> {
    match asked {
        Some(address) => super::serve::listen(address).await,
        None => match super::serve::listen(LISTEN).await {
            Ok(listener) => Ok(listener),
            Err(_) => super::serve::listen("127.0.0.1:0").await,
        },
    }
}

fn times(end: Option<&str>) -> Result<(Instant, WallClock), Failure> {
    let Some(text) = end else {
        let clock = WallClock::default();
        let now = clock.now().micros();
        return Ok((Instant::from_micros(now - now.rem_euclid(HOUR_US) - HOUR_US), clock));
    };
    let end = Instant::parse(text).map_err(|e| Failure::new(EX_USAGE, e))?;
    if end.micros().rem_euclid(HOUR_US) != 0 {
        return Err(Failure::new(EX_USAGE, anyhow!("--end must be a whole hour")));
    }
    Ok((end, WallClock::set_to(end.plus(HOUR_US))))
}

fn folder(dir: Option<&Path>) -> Result<PathBuf, Failure> {
    let dir = match dir {
        Some(dir) => dir.to_owned(),
        None => std::env::temp_dir().join(format!("washbell-demo-{}", new_id())),
    };
    fs::create_dir_all(&dir).with_context(|| format!("cannot make {}", dir.display()))?;
    if dir.join("washbell.db").exists() {
        return Err(Failure::new(
            EX_DATAERR,
            anyhow!(
                "{} holds a database already; name another folder, or `washbell serve --plant {}`",
                dir.display(),
                dir.join("plant.toml").display()
            ),
        ));
    }
    Ok(dir)
}

/// Posts the history a month at a time, records what people wrote down, and leaves the next
/// hour's export. Answers how many readings were taken.
async fn fill(
    store: &Store,
    plant: &Plant,
    recipe: &Recipe,
    end: Instant,
    clock: WallClock,
    dir: &Path,
) -> Result<u64, Failure> {
    for clean in recipe.recorded_cleans(end) {
        record(store, plant, clean, clock).await?;
    }
    let mut sim = Simulation::new(recipe.clone());
    let mut from = recipe.start;
    let mut taken = 0;
    while from < end {
        let to = from.plus(30 * DAY_US).min(end);
        let mut text = sim::header(recipe);
        sim.write_rows(to, &mut text);
        taken += post(store, plant, &plant.zone.date_text(from), &text, clock).await?;
        from = to;
    }
    let mut text = sim::header(recipe);
    sim.write_rows(end.plus(HOUR_US), &mut text);
    fs::write(dir.join("next-hour.csv"), text).context("cannot write the next hour")?;
    Ok(taken)
}

async fn post(
    store: &Store,
    plant: &Plant,
    from: &str,
    text: &str,
    clock: WallClock,
) -> Result<u64, Failure> {
    let source = plant.sources.first().context("the demo's plant has no source")?;
    let name = format!("{from}.csv");
    let delivery = Delivery { source, file: &name, received: clock.now() };
    let digest = digest(text.as_bytes()).context("cannot read the export")?;
    let accepted = accept_file(store, plant, &delivery, &digest, text.as_bytes())
        .await
        .map_err(anyhow::Error::from)?;
    Ok(match accepted {
        crate::ingest::Accepted::New { receipt, .. } => receipt.readings.accepted,
        crate::ingest::Accepted::Known(_) => 0,
    })
}

async fn record(
    store: &Store,
    plant: &Plant,
    clean: sim::RecordedClean,
    clock: WallClock,
) -> Result<(), Failure> {
    let cleaning = Cleaning {
        id: new_id(),
        train: clean.train,
        span: Span::new(clean.start, clean.end),
        kind: clean.kind,
        steps: clean.steps,
        work_order: None,
        reference: Some(clean.reference),
        recorded: clock.now(),
        by: Some("day shift".to_owned()),
    };
    store.save_cleaning(&plant.id, &cleaning, &[]).await?;
    Ok(())
}
