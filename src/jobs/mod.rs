//! Floor 11: what happens without being asked. A job takes no input, may run at any time and
//! any number of times, and does nothing where there is nothing to do.

use std::time::Duration;

use futures_util::future::BoxFuture;
use tokio::task::JoinSet;
use tokio::time::{MissedTickBehavior, interval};

use crate::store::StoreError;
use crate::work::{self, Worker};

/// One job.
pub struct Job {
    /// For the log.
    pub name: &'static str,
    /// How often.
    pub every: Duration,
    run: fn(Worker) -> BoxFuture<'static, Result<(), StoreError>>,
}

/// The jobs there are.
pub const JOBS: [Job; 2] = [
    // What a post could not work itself: it failed, or was long, or the process ended.
    Job {
        name: "catch_up",
        every: Duration::from_secs(60),
        run: |worker| Box::pin(async move { worker.catch_up(None).await.map(|_| ()) }),
    },
    // What the wall clock alone brings about: data that are too old, shelves that end.
    Job {
        name: "watch",
        every: Duration::from_secs(60),
        run: |worker| {
            Box::pin(async move {
                let now = worker.clock().now();
                work::watch(worker.store(), &worker.plant(), now).await.map(|_| ())
            })
        },
    },
];

/// Starts all jobs. They end when the set is dropped or shut down.
pub fn start(worker: &Worker) -> JoinSet<()> {
    let mut set = JoinSet::new();
    for job in JOBS {
        set.spawn(repeat(job, worker.clone()));
    }
    set
}

async fn repeat(job: Job, worker: Worker) {
    let mut ticks = interval(job.every);
    ticks.set_missed_tick_behavior(MissedTickBehavior::Delay);
    loop {
        ticks.tick().await;
        if let Err(error) = (job.run)(worker.clone()).await {
            let error: &(dyn std::error::Error + 'static) = &error;
            tracing::error!(job = job.name, error, "a job failed; it will be tried again");
        }
    }
}
