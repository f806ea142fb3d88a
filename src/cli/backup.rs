//! `backup`: a consistent copy of a live database.

use std::path::PathBuf;
use std::process::ExitCode;

use anyhow::anyhow;

use super::{EX_CANTCREAT, Failure};
use crate::store::Store;

#[derive(clap::Args)]
pub struct Args {
    /// The plant file
    #[arg(long, value_name = "plant.toml")]
    plant: PathBuf,
    /// Where to write the copy; must not be there yet
    #[arg(value_name = "FILE")]
    file: PathBuf,
}

pub async fn run(args: &Args) -> Result<ExitCode, Failure> {
    let reading = super::read_plant(&args.plant)?;
    if args.file.exists() {
        return Err(Failure::new(
            EX_CANTCREAT,
            anyhow!("{} is there already; name a file that is not", args.file.display()),
        ));
    }
    let store = Store::open_beside(&reading.plant.service.database).await?;
    let bytes = store.backup(&args.file).await?;
    store.close().await;
    super::say(&format!(
        "{} holds a copy of {:.1} MB, checked. Keep it with the plant file.\n",
        args.file.display(),
        bytes as f64 / 1e6
    ));
    Ok(ExitCode::SUCCESS)
}
