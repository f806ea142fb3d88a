//! Floor 13: commands, settings, wiring, shutdown. One command a file.

mod backup;
mod check;
mod demo;
mod import;
mod logs;
mod rebuild;
mod run;
mod serve;
mod told;

use std::path::{Path, PathBuf};
use std::process::ExitCode;

use anyhow::Context;
use clap::{Parser, Subcommand, ValueEnum};

use crate::base::zone_data_version;
use crate::plant::{self, Mistake, Reading};
use crate::store::StoreError;

/// Exit codes after sysexits.
pub const EX_USAGE: u8 = 64;
const EX_DATAERR: u8 = 65;
const EX_NOINPUT: u8 = 66;
const EX_UNAVAILABLE: u8 = 69;
const EX_SOFTWARE: u8 = 70;
const EX_CANTCREAT: u8 = 73;
const EX_TEMPFAIL: u8 = 75;
const EX_CONFIG: u8 = 78;

/// Says which membrane train to clean by when, with what and why, and afterwards whether the
/// clean worked.
#[derive(Parser)]
#[command(name = "washbell", version = version(), propagate_version = true, arg_required_else_help = true)]
struct Cli {
    #[command(subcommand)]
    command: Command,
}

#[derive(Subcommand)]
enum Command {
    /// An invented plant with months of history, analysed, then served
    Demo(demo::Args),
    /// All mistakes of the plant file at once; with files, what an import would take
    Check(check::Args),
    /// The daemon
    Serve(serve::Args),
    /// Bulk load with progress and a receipt a file
    Import(import::Args),
    /// Recompute every derived row
    Rebuild(rebuild::Args),
    /// A consistent copy of a live database
    Backup(backup::Args),
}

/// How a result is printed.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq, ValueEnum)]
pub enum Output {
    /// For people.
    #[default]
    Text,
    /// For programs.
    Json,
}

/// A failure with the exit code that tells what kind it is.
#[derive(Debug)]
pub struct Failure {
    code: u8,
    error: anyhow::Error,
}

impl Failure {
    /// A failure of a kind.
    pub fn new(code: u8, error: impl Into<anyhow::Error>) -> Self {
        Self { code, error: error.into() }
    }
}

impl From<anyhow::Error> for Failure {
    fn from(error: anyhow::Error) -> Self {
        let code = match error.downcast_ref::<StoreError>() {
            Some(StoreError::Held { .. }) => EX_TEMPFAIL,
            Some(_) => EX_UNAVAILABLE,
            None => EX_SOFTWARE,
        };
        Self { code, error }
    }
}

impl From<StoreError> for Failure {
    fn from(error: StoreError) -> Self {
        Self::from(anyhow::Error::from(error))
    }
}

fn version() -> &'static str {
    use std::sync::OnceLock;
    static TEXT: OnceLock<String> = OnceLock::new();
    TEXT.get_or_init(|| {
        format!("{} (zone data {})", env!("CARGO_PKG_VERSION"), zone_data_version())
    })
}

/// Runs the program.
pub fn main() -> ExitCode {
    let cli = match Cli::try_parse() {
        Ok(cli) => cli,
        Err(e) => {
            let _ = e.print();
            return if e.use_stderr() { ExitCode::from(EX_USAGE) } else { ExitCode::SUCCESS };
        }
    };
    let runtime = match tokio::runtime::Runtime::new() {
        Ok(runtime) => runtime,
        Err(e) => {
            eprintln!("washbell: no threads to be had: {e}");
            return ExitCode::from(EX_UNAVAILABLE);
        }
    };
    let done = runtime.block_on(async {
        match cli.command {
            Command::Demo(args) => demo::run(args).await,
            Command::Check(args) => check::run(&args),
            Command::Serve(args) => serve::run(&args).await,
            Command::Import(args) => import::run(&args).await,
            Command::Rebuild(args) => rebuild::run(&args).await,
            Command::Backup(args) => backup::run(&args).await,
        }
    });
    match done {
        Ok(code) => code,
        Err(failure) => {
            eprintln!("washbell: {:#}", failure.error);
            ExitCode::from(failure.code)
        }
    }
}

/// Prints a result. A reader that has seen enough is no failure.
pub fn say(text: &str) {
    use std::io::Write;
    let _ = std::io::stdout().write_all(text.as_bytes());
}

/// Reads a plant file; prints all its mistakes if it has any.
pub fn read_plant(path: &Path) -> Result<Reading, Failure> {
    let text = std::fs::read_to_string(path)
        .with_context(|| format!("cannot read the plant file {}", path.display()))
        .map_err(|e| Failure::new(EX_NOINPUT, e))?;
    let dir = path.parent().map_or_else(PathBuf::new, Path::to_path_buf);
    plant::read(&text, &dir).map_err(|mistakes| {
        for mistake in &mistakes {
            eprintln!("{}\n", shown(mistake, &text, path, true));
        }
        let n = mistakes.len();
        let what = if n == 1 { "one mistake".to_owned() } else { format!("{n} mistakes") };
        Failure::new(EX_CONFIG, anyhow::anyhow!("{} holds {what}", path.display()))
    })
}

/// A mistake with the line it is in.
pub fn shown(mistake: &Mistake, text: &str, path: &Path, wrong: bool) -> String {
    use annotate_snippets::{AnnotationKind, Level, Renderer, Snippet};
    let level = if wrong { Level::ERROR } else { Level::WARNING };
    let name = path.display().to_string();
    let end = mistake.span.end.min(text.len());
    // A whole table is pointed at by its first line.
    let first_line = text[mistake.span.start.min(end)..end].find('\n');
    let end = first_line.map_or(end, |n| mistake.span.start + n);
    let snippet = Snippet::source(text)
        .path(name)
        .annotation(AnnotationKind::Primary.span(mistake.span.start.min(end)..end));
    let mut group = level.primary_title(mistake.message.as_str()).element(snippet);
    if let Some(help) = &mistake.help {
        group = group.element(Level::HELP.message(help.as_str()));
    }
    Renderer::plain().render(&[group])
}
