//! `backup`: a consistent copy of a live database.

use std::path::PathBuf;
use std::process::ExitCode;

use super::Failure;
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
    let store = Store::open_beside(&reading.plant.service.database).await?;
    let bytes = store.backup(&args.file).await?;
    store.close().await;
    println!(
        "{} holds a copy of {:.1} MB, checked. Keep it with the plant file.",
        args.file.display(),
        bytes as f64 / 1e6
    );
    Ok(ExitCode::SUCCESS)
}
