//! Posted hour by hour, imported at once, shuffled and revised, and rebuilt: the same derived
//! rows, byte for byte, and the same history where there was nothing late.

use washbell::base::{DAY_US, HOUR_US, Instant, Zone};
use washbell::sim::{self, Dirt, Noise, PlannedClean, Recipe};

use crate::support::{Plantlet, Prng};

fn start() -> Instant {
    Instant::parse("2025-11-30T00:00:00Z").unwrap()
}

/// Two noisy trains that foul fast and are cleaned every five weeks, one of them by night over
/// midnight; a year of them.
fn recipe(zone: &str, days: i64) -> Recipe {
    let mut recipe = Recipe::plain(11, Zone::named(zone).unwrap(), start(), 2);
    recipe.noise = Noise { pressure_pa: 400.0, flow_share: 0.006, temperature_k: 0.1 };
    recipe.dirt = Dirt {
        bad_cells: 0.001,
        empty_cells: 0.001,
        sentinel_cells: 0.0005,
        repeated_rows: 0.0005,
        ragged_rows: 0.0002,
        late_rows: 0.0,
        gaps_per_day: 0.2,
    };
    for (k, train) in recipe.trains.iter_mut().enumerate() {
        train.rate_per_m_day *= 1.8;
        train.wander_sd = 0.35;
        let mut at = 20 + 9 * k as i64;
        while at < days {
            let hour = if k == 0 { 7 } else { 21 };
            let begin = start().plus(at * DAY_US + hour * HOUR_US);
            train.cleans.push(PlannedClean::by_procedure(begin, 0.96, &format!("c-{k}-{at}")));
            at += 35;
        }
    }
    recipe
}

/// The exports of a plant, an hour each.
fn hours(recipe: &Recipe, days: i64) -> Vec<(Instant, String)> {
    let mut sim = sim::Simulation::new(recipe.clone());
    (1..=days * 24)
        .map(|h| {
            let end = start().plus(h * HOUR_US);
            let mut text = sim::header(recipe);
            sim.write_rows(end, &mut text);
            (end, text)
        })
        .collect()
}

#[tokio::test]
async fn a_year_by_the_hour_is_a_year_at_once_and_a_rebuild() {
    let days = 366;
    let recipe = recipe("Europe/London", days);
    let end = start().plus(days * DAY_US);
    let files = hours(&recipe, days);

    let mut hourly = Plantlet::of(recipe.clone(), end).await;
    for (end, text) in &files {
        hourly.post("hour.csv", text, *end).await;
    }
    let mut once = Plantlet::of(recipe, end).await;
    let header = files[0].1.lines().next().unwrap();
    let mut all = format!("{header}\n");
    for (_, text) in &files {
        all.push_str(text.split_once('\n').unwrap().1);
    }
    once.post("year.csv", &all, end).await;

    let (a, b) = (hourly.derived().await, once.derived().await);
    assert!(a.len() > 50_000, "only {} rows", a.len());
    hourly.assert_same(&a, &b, "hourly, at once");
    let (a, b) = (hourly.history().await, once.history().await);
    assert!(a.len() > 20, "only {} entries", a.len());
    hourly.assert_same(&a, &b, "history, hourly and at once");

    let before = once.derived().await;
    once.rebuild().await;
    once.assert_same(&before, &once.derived().await, "rebuilt");
    once.assert_same(&b, &once.history().await, "history after a rebuild");
}

#[tokio::test]
async fn a_month_shuffled_and_revised_is_the_month_in_order() {
    let days = 32;
    let recipe = recipe("Etc/UTC", days);
    let end = start().plus(days * DAY_US);
    let mut files = hours(&recipe, days);

    let mut once = Plantlet::of(recipe.clone(), end).await;
    for (_, text) in &files {
        once.take("hour.csv", text, end).await;
    }
    once.work().await;

    let mut shuffled = Plantlet::of(recipe, end).await;
    let mut rng = Prng(5);
    for i in (1..files.len()).rev() {
        files.swap(i, rng.below(i + 1));
    }
    for (i, (_, text)) in files.iter().enumerate() {
        if i % 11 == 0 {
            // Twice wrong, then right: digits of the pressures changed.
            for wrong in ['7', '8'] {
                let wrong: String = text
                    .lines()
                    .map(|l| if l.contains(",0.") { l.replacen(",0.", &format!(",0.{wrong}"), 1) } else { l.to_owned() } + "\n")
                    .collect();
                shuffled.post("wrong.csv", &wrong, end).await;
            }
        }
        shuffled.post("hour.csv", text, end).await;
    }
    let (a, b) = (once.derived().await, shuffled.derived().await);
    once.assert_same(&a, &b, "in order, shuffled");
    shuffled.rebuild().await;
    once.assert_same(&a, &shuffled.derived().await, "shuffled, then rebuilt");
}

#[tokio::test]
async fn the_same_file_again_changes_no_byte() {
    let days = 31;
    let recipe = recipe("Europe/London", days);
    let end = start().plus(days * DAY_US);
    let mut plant = Plantlet::of(recipe, end).await;
    let mut text = sim::header(&plant.recipe);
    plant.sim.write_rows(end, &mut text);
    let first = plant.post("month.csv", &text, end).await;
    let before = (plant.derived().await, plant.history().await);
    let again = plant.post("month.csv", &text, end).await;
    assert!(matches!(again, washbell::ingest::Accepted::Known(_)), "{again:?}");
    let washbell::ingest::Accepted::New { receipt, .. } = first else { panic!("{first:?}") };
    assert_eq!(receipt.readings.cells(), receipt.cells);
    assert_eq!(before, (plant.derived().await, plant.history().await));
    // The same readings under another name and with another line end are stored already.
    let other = plant.post("other.csv", &text.replace('\n', "\r\n"), end).await;
    let washbell::ingest::Accepted::New { receipt, .. } = other else { panic!("{other:?}") };
    assert_eq!(receipt.readings.accepted, 0, "{}", receipt.message);
    assert_eq!(before, (plant.derived().await, plant.history().await));
}
