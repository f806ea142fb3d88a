//! `import`: bulk load through the same door, with progress and a receipt a file.

use std::fs::File;
use std::io::{IsTerminal, Read};
use std::path::{Path, PathBuf};
use std::process::ExitCode;

use anyhow::{Context, anyhow};
use indicatif::{ProgressBar, ProgressStyle};

use super::{EX_DATAERR, EX_NOINPUT, EX_USAGE, Failure, Output};
use crate::answers::{ReceiptView, receipt_view};
use crate::base::{Receipt, SourceId};
use crate::ingest::{AcceptError, Accepted, Delivery, accept_file, digest};
use crate::plant::{Plant, Source};
use crate::store::Store;
use crate::work::{self, Cause, WallClock};

#[derive(clap::Args)]
pub struct Args {
    /// The plant file
    #[arg(long, value_name = "plant.toml")]
    plant: PathBuf,
    /// The source that the files are exports of; a sole source needs no naming
    #[arg(long)]
    source: Option<String>,
    /// How to print the receipts
    #[arg(long, value_enum, default_value_t)]
    output: Output,
    /// Export files
    #[arg(required = true, value_name = "FILE")]
    files: Vec<PathBuf>,
}

pub async fn run(args: &Args) -> Result<ExitCode, Failure> {
    let reading = super::read_plant(&args.plant)?;
    let plant = &reading.plant;
    let source = source_of(plant, args.source.as_deref())?;
    let store = super::run::open_store(plant, &args.plant).await?;
    let clock = WallClock::default();
    let mut refused = 0;
    let mut taken = Vec::new();
    for path in &args.files {
        match take(&store, plant, source, path, clock).await {
            Ok(receipt) => taken.push(receipt),
            Err(failure) if args.files.len() > 1 => {
                eprintln!("{}: {:#}", path.display(), failure.error);
                refused += 1;
            }
            Err(failure) => return Err(failure),
        }
    }
    let bar = bar("analysed", "days");
    let cause = Cause { now: clock.now(), receipt: None };
    work::catch_up(&store, plant, &cause, &mut |done, of| {
        bar.set_length(of as u64);
        bar.set_position(done as u64);
    })
    .await?;
    bar.finish_and_clear();
    let mut receipts = Vec::new();
    for receipt in taken {
        // With what the analysis added.
        receipts.push(store.receipt(&plant.id, &receipt.id).await?.unwrap_or(receipt));
    }
    store.close().await;
    print(plant, &receipts, args.output)?;
    if refused > 0 {
        let error = anyhow!("{refused} of {} files were refused", args.files.len());
        return Err(Failure::new(EX_DATAERR, error));
    }
    Ok(ExitCode::SUCCESS)
}

/// The source of a name, or the only one.
pub fn source_of<'a>(plant: &'a Plant, name: Option<&str>) -> Result<&'a Source, Failure> {
    let names = || plant.sources.iter().map(|s| s.id.as_str()).collect::<Vec<_>>().join(", ");
    match (name, plant.sources.as_slice()) {
        (Some(name), _) => plant.source(&SourceId::new(name)).ok_or_else(|| {
            Failure::new(EX_USAGE, anyhow!("no source `{name}`; the plant file has {}", names()))
        }),
        (None, [only]) => Ok(only),
        (None, _) => Err(Failure::new(
            EX_USAGE,
            anyhow!("say with --source which of {} the files are exports of", names()),
        )),
    }
}

async fn take(
    store: &Store,
    plant: &Plant,
    source: &Source,
    path: &Path,
    clock: WallClock,
) -> Result<Receipt, Failure> {
    let open = || {
        File::open(path)
            .with_context(|| format!("cannot read {}", path.display()))
            .map_err(|e| Failure::new(EX_NOINPUT, e))
    };
    let name = path.file_name().map_or_else(String::new, |n| n.to_string_lossy().into_owned());
    let digest = digest(open()?).context("cannot read the file")?;
    let file = open()?;
    let bytes = file.metadata().map_or(0, |m| m.len());
    let bar = bar(&name, "bytes");
    bar.set_length(bytes);
    let delivery = Delivery { source, file: &name, received: clock.now() };
    let counted = Counted { inner: file, bar: &bar };
    let accepted = accept_file(store, plant, &delivery, &digest, counted).await;
    bar.finish_and_clear();
    match accepted {
        Ok(Accepted::New { receipt, .. } | Accepted::Known(receipt)) => Ok(receipt),
        Err(AcceptError::Refused(refusal)) => {
            Err(Failure::new(EX_DATAERR, anyhow!("{name} was refused: {refusal}")))
        }
        Err(AcceptError::Store(e)) => Err(e.into()),
        Err(AcceptError::Read(e)) => Err(anyhow::Error::from(e).into()),
    }
}

fn print(plant: &Plant, receipts: &[Receipt], output: Output) -> Result<(), Failure> {
    match output {
        Output::Text => {
            for r in receipts {
                super::say(&format!("{}: {}\n", r.file, r.message));
                for note in &r.notes {
                    super::say(&format!("    {note}\n"));
                }
                for rejection in r.rejections.iter().take(10) {
                    super::say(&format!(
                        "    line {}, {}: `{}`: {}\n",
                        rejection.line, rejection.column, rejection.value, rejection.reason
                    ));
                }
                let more = r.rejections_total.saturating_sub(10);
                if more > 0 {
                    super::say(&format!("    and {more} more; the receipt {} lists them\n", r.id));
                }
            }
        }
        Output::Json => {
            let views: Vec<ReceiptView> =
                receipts.iter().map(|r| receipt_view(&plant.zone, r)).collect();
            let text = serde_json::to_string_pretty(&views).context("cannot write the receipts")?;
            super::say(&format!("{text}\n"));
        }
    }
    Ok(())
}

/// A progress bar on a terminal; nothing elsewhere.
fn bar(what: &str, unit: &str) -> ProgressBar {
    if !std::io::stderr().is_terminal() {
        return ProgressBar::hidden();
    }
    let bar = ProgressBar::new(0);
    let form = if unit == "bytes" {
        "{msg} {bar:30} {bytes} of {total_bytes}, {eta} to go"
    } else {
        "{msg} {bar:30} {pos} of {len} days, {eta} to go"
    };
    if let Ok(style) = ProgressStyle::with_template(form) {
        bar.set_style(style);
    }
    bar.set_message(what.to_owned());
    bar
}

struct Counted<'a> {
    inner: File,
    bar: &'a ProgressBar,
}

impl Read for Counted<'_> {
    fn read(&mut self, buf: &mut [u8]) -> std::io::Result<usize> {
        let n = self.inner.read(buf)?;
        self.bar.inc(n as u64);
        Ok(n)
    }
}
