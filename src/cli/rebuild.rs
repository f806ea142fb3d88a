//! `rebuild`: every derived row again from the facts; history stays as it is.

use std::path::PathBuf;
use std::process::ExitCode;

use super::Failure;
use crate::work::{self, Cause, WallClock};

#[derive(clap::Args)]
pub struct Args {
    /// The plant file
    #[arg(long, value_name = "plant.toml")]
    plant: PathBuf,
}

pub async fn run(args: &Args) -> Result<ExitCode, Failure> {
    let reading = super::read_plant(&args.plant)?;
    let store = super::run::open_store(&reading.plant, &args.plant).await?;
    let cause = Cause { now: WallClock::default().now(), receipt: None };
    let worked = work::rebuild(&store, &reading.plant, &cause, &mut |_, _| {}).await?;
    store.close().await;
    super::say(&format!(
        "{} train-days were worked again from their readings.\n",
        worked.train_days
    ));
    Ok(ExitCode::SUCCESS)
}
