//! `serve`: the daemon. Reads top to bottom: plant file, address, store, worker, jobs, router,
//! signals, drain.

use std::net::SocketAddr;
use std::path::{Path, PathBuf};
use std::process::ExitCode;
use std::time::Duration;

use anyhow::{Context, anyhow};
use tokio::net::{TcpListener, lookup_host};
use tokio::signal::unix::{SignalKind, signal};

use super::{EX_CONFIG, EX_UNAVAILABLE, Failure};
use crate::api::{self, App};
use crate::jobs;
use crate::plant::Plant;
use crate::store::Store;
use crate::work::{self, WallClock, Worker};

/// Requests under way get this long to end once a stop was asked for.
const DRAIN: Duration = Duration::from_secs(30);

#[derive(clap::Args)]
pub struct Args {
    /// The plant file
    #[arg(long, value_name = "plant.toml")]
    plant: PathBuf,
}

pub async fn run(args: &Args) -> Result<ExitCode, Failure> {
    super::logs::begin();
    let plant = super::read_plant(&args.plant)?.plant;
    let listener = listen(&plant.service.listen).await?;
    let store = Store::open(&plant.service.database).await?;
    let clock = WallClock::default();
    super::run::note_plant_file(&store, &plant, &args.plant, clock).await?;
    let anew = work::is_of_another(&store, &plant).await?;
    let worker = Worker::new(store, plant, clock);
    if anew {
        rebuild_behind(&worker);
    }
    until_stopped(worker, listener, &args.plant).await
}

/// A listener on a loopback address.
pub async fn listen(address: &str) -> Result<TcpListener, Failure> {
    let found: Vec<SocketAddr> = lookup_host(address)
        .await
        .with_context(|| format!("`{address}` is no address; write it like 127.0.0.1:8420"))
        .map_err(|e| Failure::new(EX_CONFIG, e))?
        .collect();
    if let Some(open) = found.iter().find(|a| !a.ip().is_loopback()) {
        return Err(Failure::new(
            EX_CONFIG,
            anyhow!(
                "will not listen on {open}: this version knows no access tokens yet, so anybody \
                 who reaches it could post readings and sign work orders. Listen on 127.0.0.1 and \
                 put a proxy that asks who is there in front of it."
            ),
        ));
    }
    TcpListener::bind(found.as_slice())
        .await
        .with_context(|| format!("cannot listen on {address}"))
        .map_err(|e| Failure::new(EX_UNAVAILABLE, e))
}

/// Serves until it is told to stop, then lets requests under way end.
pub async fn until_stopped(
    worker: Worker,
    listener: TcpListener,
    file: &Path,
) -> Result<ExitCode, Failure> {
    let address = listener.local_addr().context("no address")?;
    tracing::info!(%address, plant = worker.plant().id, "ready");
    let mut running = jobs::start(&worker);
    let reload = tokio::spawn(reload_on_hangup(worker.clone(), file.to_owned()));
    let (stop, stopping) = tokio::sync::watch::channel(false);
    let mut wait = stopping.clone();
    let served = axum::serve(listener, api::router(App::new(worker.clone())))
        .with_graceful_shutdown(async move {
            // An error is a sender that is gone: nobody is left to ask for more.
            let _ = wait.wait_for(|stop| *stop).await;
        });
    let mut served = tokio::spawn(async move { served.await });
    let mut terminate = signal(SignalKind::terminate()).context("no signals")?;
    tokio::select! {
        _ = terminate.recv() => {}
        _ = tokio::signal::ctrl_c() => {}
        ended = &mut served => {
            ended.context("the server fell over")?.context("the server ended")?;
        }
    }
    tracing::info!("stopping: no new requests; those under way may end");
    stop.send_replace(true);
    if !served.is_finished() && tokio::time::timeout(DRAIN, &mut served).await.is_err() {
        tracing::warn!("requests were still under way after {} s", DRAIN.as_secs());
    }
    reload.abort();
    running.shutdown().await;
    // What a long write has not finished is undone and found again at the next start.
    if tokio::time::timeout(DRAIN, worker.store().clone().close()).await.is_err() {
        tracing::warn!("a write was still under way; it is undone");
    }
    tracing::info!("stopped");
    Ok(ExitCode::SUCCESS)
}

/// A changed plant file is taken on SIGHUP; a faulty one leaves the old one running.
async fn reload_on_hangup(worker: Worker, file: PathBuf) {
    let Ok(mut hangup) = signal(SignalKind::hangup()) else { return };
    while hangup.recv().await.is_some() {
        let Ok(reading) = super::read_plant(&file) else {
            tracing::error!("the plant file holds mistakes; the old one goes on");
            continue;
        };
        if let Err(failure) = take(&worker, reading.plant, &file).await {
            tracing::error!(error = format!("{failure:?}"), "the plant file was not taken");
        }
    }
}

async fn take(worker: &Worker, plant: Plant, file: &Path) -> Result<(), Failure> {
    let old = worker.plant();
    if plant.id != old.id || plant.service.database != old.service.database {
        return Err(Failure::new(
            EX_CONFIG,
            anyhow!("plant.id and service.database change on a restart only"),
        ));
    }
    if plant.service.listen != old.service.listen {
        tracing::warn!("service.listen changes on a restart only");
    }
    super::run::note_plant_file(worker.store(), &plant, file, worker.clock()).await?;
    let anew = work::is_of_another(worker.store(), &plant).await?;
    worker.set_plant(plant);
    tracing::info!("the plant file was taken");
    if anew {
        rebuild_behind(worker);
    }
    Ok(())
}

/// Works every row again behind the answers, which are the old ones until it is done.
fn rebuild_behind(worker: &Worker) {
    let worker = worker.clone();
    tokio::spawn(async move {
        tracing::info!("the plant file or the program changed: every row is worked again");
        match worker.rebuild().await {
            Ok(worked) => tracing::info!(train_days = worked.train_days, "rebuilt"),
            Err(error) => {
                let error: &(dyn std::error::Error + 'static) = &error;
                tracing::error!(error, "not rebuilt; the old rows stand");
            }
        }
    });
}
