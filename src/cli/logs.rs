//! Logs: one line an event to standard error; JSON where it is no terminal.

use std::io::IsTerminal;

use tracing_subscriber::EnvFilter;

/// Begins to log. `WASHBELL_LOG` sets what, in the manner of `info` or `washbell=debug`.
pub fn begin() {
    let filter = EnvFilter::try_from_env("WASHBELL_LOG").unwrap_or_else(|_| EnvFilter::new("info"));
    let builder = tracing_subscriber::fmt().with_env_filter(filter).with_writer(std::io::stderr);
    let begun = if std::io::stderr().is_terminal() {
        builder.try_init()
    } else {
        builder.json().flatten_event(true).try_init()
    };
    if let Err(e) = begun {
        eprintln!("washbell: no log: {e}");
    }
}
