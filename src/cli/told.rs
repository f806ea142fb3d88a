//! What was found, as a table to be read at a glance and a few sentences.

use std::fmt::Write;

use comfy_table::presets::UTF8_BORDERS_ONLY;
use comfy_table::{ContentArrangement, Table};

use super::Failure;
use crate::advice::{Action, Recommendation};
use crate::analysis::{Dates, LimitKind, Standing};
use crate::answers::{TrainCase, UnitSystem, Units, phase_words, train_view};
use crate::base::{Instant, Zone};
use crate::plant::Plant;
use crate::store::{ItemFilter, ItemKind, Store};
use crate::work::{self, TrainState, WallClock};

/// Wide enough for the table, narrow enough for a terminal.
const WIDTH: u16 = 110;

/// The trains, what to do, and the cleans with their verdicts.
pub async fn told(store: &Store, plant: &Plant, clock: WallClock) -> Result<String, Failure> {
    let states = work::train_states(store, plant).await?;
    let filter = ItemFilter { open: Some(true), limit: 1000, ..Default::default() };
    let open: Vec<Recommendation> = store
        .items(&plant.id, ItemKind::Recommendation, &filter)
        .await?
        .into_iter()
        .map(|(_, r)| r)
        .collect();
    let mut out = String::new();
    // Writing into a String cannot fail.
    let _ = write(&mut out, plant, &states, &open, clock);
    Ok(out)
}

fn write(
    out: &mut String,
    plant: &Plant,
    states: &[TrainState],
    open: &[Recommendation],
    clock: WallClock,
) -> std::fmt::Result {
    let newest = states.iter().filter_map(|s| s.now.as_ref().map(|n| n.newest)).max();
    if let Some(at) = newest {
        let (day, time) = (plant.zone.day_words(at), plant.zone.clock_text(at));
        writeln!(out, "\n{}: readings to {time}, {day}.\n", plant.name)?;
    }
    writeln!(out, "{}\n", trains(plant, states, open))?;
    let units = Units::new(UnitSystem::Si);
    let mut quiet = Vec::new();
    for state in states {
        let mine: Vec<Recommendation> =
            open.iter().filter(|r| r.train == state.site.train.id).cloned().collect();
        if mine.is_empty() {
            quiet.push(state.site.train.name.as_str());
            continue;
        }
        let case = TrainCase {
            plant,
            site: &state.site,
            standing: state.standing.as_ref(),
            open: &mine,
            now: state.now.as_ref(),
            wall: clock.now(),
            stale_after_us: work::stale_after_us(plant, state.site.train),
            unknown_codes: &state.unknown_codes,
        };
        let orders: Vec<String> =
            mine.iter().filter_map(|r| r.work_order).map(|n| format!(" (WO {n})")).collect();
        let view = train_view(&units, &case);
        writeln!(out, "{}{}: {}", view.name, orders.concat(), view.standing.sentence)?;
    }
    if !quiet.is_empty() {
        writeln!(out, "Nothing to decide for {}.", quiet.join(", "))?;
    }
    writeln!(out, "\nCleans in place and what they were worth:\n{}\n", cleans(plant, states))?;
    writeln!(
        out,
        "Advice only: local codes, the site's procedure, permits and licensed operators decide. \
         Hypochlorite never meets acid. Permeability says nothing of integrity."
    )
}

fn trains(plant: &Plant, states: &[TrainState], open: &[Recommendation]) -> Table {
    let mut table = table();
    table.set_header(["Train", "Doing", "Loss", "Clean limit", "Start by", "Advice"]);
    for state in states {
        let standing = state.standing.as_ref();
        let first = open
            .iter()
            .filter(|r| r.train == state.site.train.id)
            .max_by_key(|r| (r.urgency, std::cmp::Reverse(r.action)));
        let loss = standing.and_then(|s| s.loss);
        let held = standing.and_then(|s| {
            LimitKind::ALL.into_iter().filter(|k| k.is_clean()).find_map(|k| s.hold(k).since)
        });
        let dates = standing.and_then(|s| s.binding()).map(|(_, d)| d);
        table.add_row([
            state.site.train.name.clone(),
            state.now.as_ref().map_or_else(String::new, |n| phase_words(n.phase).to_owned()),
            loss.map_or_else(|| "not known".to_owned(), |l| format!("{:.0} %", l.share * 100.0)),
            limit_words(&plant.zone, held, dates),
            start_words(&plant.zone, standing, first),
            advice_words(first, standing.is_some_and(|s| s.no_dates.is_none())),
        ]);
    }
    table
}

fn start_words(zone: &Zone, standing: Option<&Standing>, first: Option<&Recommendation>) -> String {
    let start = first.and_then(|r| r.start_by);
    match (start, standing) {
        (Some(t), Some(s)) if t <= s.as_of => "as soon as can be".to_owned(),
        (Some(t), _) => short(zone, t),
        (None, _) => String::new(),
    }
}

fn limit_words(zone: &Zone, held: Option<Instant>, dates: Option<Dates>) -> String {
    let day = |t: Instant| zone.short_day(t);
    if let Some(since) = held {
        return format!("past since {}", day(since));
    }
    let Some(Dates { p10: Some(early), p50, p90 }) = dates else { return "far".to_owned() };
    let late = p90.map_or_else(|| "later".to_owned(), day);
    match p50 {
        Some(likely) => format!("{} ({} to {late})", day(likely), day(early)),
        None => format!("{} at the earliest", day(early)),
    }
}

fn advice_words(first: Option<&Recommendation>, known: bool) -> String {
    match first {
        Some(r) => {
            let what = match r.action {
                Action::CleanInPlace => "clean in place",
                Action::Inspect => "inspect",
                Action::CheckInstrument => "check instrument",
                Action::IntegrityTest => "test integrity",
                other => other.code(),
            };
            format!("{what}, {}", r.urgency.code().replace('_', " "))
        }
        None if known => "no clean needed".to_owned(),
        None => "cannot tell yet".to_owned(),
    }
}

fn cleans(plant: &Plant, states: &[TrainState]) -> Table {
    let mut table = table();
    table.set_header([
        "Train",
        "Back in service",
        "Of the best permeability",
        "Of the loss",
        "Verdict",
    ]);
    for state in states {
        for run in &state.runs {
            let percent = |share: Option<f64>| {
                share.map_or_else(String::new, |s| format!("{:.1} %", s * 100.0))
            };
            table.add_row([
                state.site.train.name.clone(),
                short(&plant.zone, run.start),
                percent(run.restored_share()),
                percent(run.regained_share()),
                run.verdict.code().replace('_', " "),
            ]);
        }
    }
    table
}

fn table() -> Table {
    let mut table = Table::new();
    table.load_style(UTF8_BORDERS_ONLY);
    table.set_content_arrangement(ContentArrangement::Dynamic).set_width(WIDTH);
    table
}

fn short(zone: &Zone, at: Instant) -> String {
    zone.short_words(at)
}
