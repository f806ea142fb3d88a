//! `check`: all mistakes of a plant file at once; with files, what an import would take. It
//! changes nothing.

use std::fs::File;
use std::io::Read;
use std::path::{Path, PathBuf};
use std::process::ExitCode;

use anyhow::{Context, anyhow};
use serde::Serialize;

use super::{EX_DATAERR, EX_NOINPUT, Failure, Output};
use crate::base::Counts;
use crate::ingest::{Batch, Parser, Summary, message};
use crate::plant::{self, Plant, Source};
use crate::work::WallClock;

#[derive(clap::Args)]
pub struct Args {
    /// The plant file
    #[arg(long, value_name = "plant.toml")]
    plant: PathBuf,
    /// The source that the files are exports of; a sole source needs no naming
    #[arg(long)]
    source: Option<String>,
    /// How to print the result
    #[arg(long, value_enum, default_value_t)]
    output: Output,
    /// Export files to try
    #[arg(value_name = "FILE")]
    files: Vec<PathBuf>,
}

#[derive(Serialize)]
struct Checked {
    plant: String,
    revision: String,
    settings: Vec<Setting>,
    warnings: Vec<Warning>,
    files: Vec<Tried>,
}

#[derive(Serialize)]
struct Setting {
    key: String,
    value: String,
    default: bool,
}

#[derive(Serialize)]
struct Warning {
    line: usize,
    column: usize,
    message: String,
    help: Option<String>,
}

#[derive(Serialize)]
struct Tried {
    file: String,
    message: String,
    refused: bool,
    cells: u64,
    good: u64,
    bad: u64,
    missing: u64,
    rejected: u64,
    unmapped_columns: Vec<String>,
    rejections: Vec<String>,
    notes: Vec<String>,
}

pub fn run(args: &Args) -> Result<ExitCode, Failure> {
    let reading = super::read_plant(&args.plant)?;
    let plant = &reading.plant;
    let mut files = Vec::new();
    if !args.files.is_empty() {
        let source = super::import::source_of(plant, args.source.as_deref())?;
        for path in &args.files {
            files.push(attempt(plant, source, path)?);
        }
    }
    let refused = files.iter().filter(|f| f.refused).count();
    let checked = Checked {
        plant: plant.id.clone(),
        revision: plant.revision.clone(),
        settings: plant::effective(&reading)
            .into_iter()
            .map(|s| Setting { key: s.key, value: s.value, default: s.defaulted })
            .collect(),
        warnings: reading
            .warnings
            .iter()
            .map(|w| Warning {
                line: w.line,
                column: w.column,
                message: w.message.clone(),
                help: w.help.clone(),
            })
            .collect(),
        files,
    };
    match args.output {
        Output::Json => {
            let text = serde_json::to_string_pretty(&checked).context("cannot write the result")?;
            super::say(&format!("{text}\n"));
        }
        Output::Text => print(&checked, &reading, &args.plant),
    }
    if refused > 0 {
        return Err(Failure::new(EX_DATAERR, anyhow!("{refused} of the files would be refused")));
    }
    Ok(ExitCode::SUCCESS)
}

fn print(checked: &Checked, reading: &plant::Reading, path: &Path) {
    let text = std::fs::read_to_string(path).unwrap_or_default();
    for warning in &reading.warnings {
        super::say(&format!("{}\n\n", super::shown(warning, &text, path, false)));
    }
    super::say(&format!(
        "{} is in order. What it comes to, defaults marked with *:\n\n",
        path.display()
    ));
    for s in &checked.settings {
        super::say(&format!("  {} {} = {}\n", if s.default { "*" } else { " " }, s.key, s.value));
    }
    for f in &checked.files {
        super::say(&format!("\n{}: {}\n", f.file, f.message));
        for line in f.notes.iter().chain(f.rejections.iter().take(10)) {
            super::say(&format!("    {line}\n"));
        }
        let more = f.rejections.len().saturating_sub(10);
        if more > 0 {
            super::say(&format!("    and {more} more\n"));
        }
        if !f.unmapped_columns.is_empty() {
            super::say(&format!(
                "    no train uses the columns {}\n",
                f.unmapped_columns.join(", ")
            ));
        }
    }
}

/// Reads a file as an import would, and keeps nothing.
fn attempt(plant: &Plant, source: &Source, path: &Path) -> Result<Tried, Failure> {
    let name = path.display().to_string();
    let wrong = |e: std::io::Error| {
        Failure::new(EX_NOINPUT, anyhow::Error::from(e).context(format!("cannot read {name}")))
    };
    let mut file = File::open(path).map_err(wrong)?;
    let mut parser = Parser::new(plant, source, WallClock::default().now(), None);
    let mut batch = Batch::default();
    let mut chunk = vec![0; 1 << 18];
    let refusal = loop {
        let n = file.read(&mut chunk).map_err(wrong)?;
        if n == 0 {
            break parser.finish(&mut batch);
        }
        if let Err(refusal) = parser.feed(&chunk[..n], &mut batch) {
            break Err(refusal);
        }
        batch.take();
    };
    Ok(match refusal {
        Err(refusal) => Tried::refused(name, refusal.to_string()),
        Ok(summary) => Tried::of(name, &summary, plant),
    })
}

impl Tried {
    fn refused(file: String, message: String) -> Self {
        Self {
            file,
            message: format!("would be refused: {message}"),
            refused: true,
            cells: 0,
            good: 0,
            bad: 0,
            missing: 0,
            rejected: 0,
            unmapped_columns: Vec::new(),
            rejections: Vec::new(),
            notes: Vec::new(),
        }
    }

    fn of(file: String, summary: &Summary, plant: &Plant) -> Self {
        // Nothing is held against the store here: what is stored already counts as taken.
        let counts = Counts {
            accepted: summary.good,
            bad: summary.bad,
            missing: summary.missing,
            rejected: summary.rejected,
            ..Counts::default()
        };
        let line = |r: &crate::base::Rejection| {
            format!("line {}, {}: `{}`: {}", r.line, r.column, r.value, r.reason)
        };
        Self {
            file,
            message: format!("would be taken: {}", message(&counts, summary, &plant.zone)),
            refused: false,
            cells: summary.cells,
            good: summary.good,
            bad: summary.bad,
            missing: summary.missing,
            rejected: summary.rejected,
            unmapped_columns: summary.unmapped_columns.clone(),
            rejections: summary.rejections.iter().map(line).collect(),
            notes: summary.notes.clone(),
        }
    }
}
