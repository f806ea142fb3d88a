//! Minutes, hours and days as somebody with a SQLite shell sees them, held against what the
//! analysis makes of the same readings.

use std::path::Path;

use sqlx::sqlite::{SqlitePool, SqliteRow};
use sqlx::{AssertSqlSafe, Row};
use washbell::analysis::{Readings, Viscosity, minutes, tags_needed};
use washbell::base::{DAY_US, HOUR_US, Instant, SourceId, Span, Tag, Zone};
use washbell::ingest::{self, Delivery};
use washbell::plant::{self, Plant, Train};
use washbell::science::viscosity_pa_s;
use washbell::sim::{self, Dirt, Noise, Recipe, Simulation, TemperatureRecipe};
use washbell::work::{self, Cause};

use crate::views::shell;
use crate::{Given, given};

const OF_DAYS: &str = "SELECT * FROM minute
    WHERE plant = ?1 AND train = ?2 AND day BETWEEN ?3 AND ?4 ORDER BY time_us";
/// By which the view's straight lines between tenths of a degree may differ from the formula.
const TABLE: f64 = 2e-5;

fn plant_of(file: &str) -> Plant {
    plant::read(file, Path::new("")).unwrap_or_else(|m| panic!("{m:?}")).plant
}

async fn take(given: &Given, plant: &Plant, text: &str, received: Instant) {
    let delivery = Delivery { source: &plant.sources[0], file: "x.csv", received };
    let digest = ingest::digest(text.as_bytes()).unwrap();
    ingest::accept_file(&given.store, plant, &delivery, &digest, text.as_bytes()).await.unwrap();
    given.store.save_train_tags(plant).await.unwrap();
}

async fn rows(pool: &SqlitePool, plant: &Plant, train: &Train, span: Span) -> Vec<SqliteRow> {
    let day = |at: Instant| at.micros().div_euclid(DAY_US);
    sqlx::query(OF_DAYS)
        .bind(plant.id.as_str())
        .bind(train.id.as_str())
        .bind(day(span.from))
        .bind(day(span.to.plus(-1)))
        .fetch_all(pool)
        .await
        .unwrap()
}

fn close(got: f64, want: f64, within: f64, what: &str) {
    assert!((got - want).abs() <= within * want.abs(), "{what}: {got:e} is not {want:e}");
}

/// Holds every row of the view against the analysis; answers how many resistances were held.
async fn check(given: &Given, pool: &SqlitePool, plant: &Plant, span: Span) -> usize {
    let mut held = 0;
    for train in &plant.trains {
        let tags: Vec<(SourceId, Tag)> = tags_needed(train).into_iter().collect();
        let columns = given.store.readings(&plant.id, &tags, span).await.unwrap();
        let readings: Readings = tags.into_iter().zip(columns).collect();
        let mut viscosity = Viscosity::new(plant.temperature_law);
        let (samples, normalised) = minutes(plant, train, &readings, span, &mut viscosity);
        let rows = rows(pool, plant, train, span).await;
        let times: Vec<i64> = rows.iter().map(|r| r.get("time_us")).collect();
        assert_eq!(times, samples.times.iter().map(|t| t.micros()).collect::<Vec<_>>());
        for (i, row) in rows.iter().enumerate() {
            let at = |name: &str| format!("{name} of {} at {}", train.id, samples.times[i]);
            let number = |name: &str| row.get::<Option<f64>, _>(name);
            // A pressure or temperature that is held or missing is where the two may part.
            for (name, want) in [
                ("flow_m3_s", samples.flow_m3_s[i]),
                ("flux_m_s", samples.flux_m_s[i]),
                ("tmp_pa", samples.tmp_pa[i]),
            ] {
                match number(name) {
                    Some(got) => close(got, want, 1e-9, &at(name)),
                    None => assert!(want.is_nan(), "{}", at(name)),
                }
            }
            if let Some(got) = number("temperature_degc") {
                close(got, samples.temperature_degc[i], 1e-12, &at("temperature"));
            }
            if let Some(phase) = row.get::<Option<&str>, _>("phase") {
                assert_eq!(phase, samples.phases[i].word(), "{}", at("phase"));
            }
            let want = normalised.resistance_1_m[i];
            if let (true, Some(got)) = (want.is_finite(), number("resistance_1_m")) {
                close(got, want, TABLE, &at("resistance"));
                let permeability = 1.0 / (viscosity_pa_s(20.0).unwrap() * want);
                let got = number("permeability_20_m_s_pa").unwrap();
                close(got, permeability, TABLE, &at("permeability"));
                let mu = viscosity_pa_s(samples.temperature_degc[i]).unwrap();
                close(number("viscosity_pa_s").unwrap(), mu, TABLE, &at("viscosity"));
                held += 1;
            }
        }
    }
    held
}

/// Two noisy, dirty trains over the change to summer time, and a clean in between.
fn recipe() -> Recipe {
    let start = Instant::parse("2026-03-28T00:00:00Z").unwrap();
    let mut recipe = Recipe::plain(3, Zone::named("Europe/London").unwrap(), start, 2);
    recipe.noise = Noise::usual();
    recipe.dirt = Dirt { bad_cells: 1e-3, ..Dirt::usual() };
    recipe.temperature = TemperatureRecipe::seasonal();
    recipe
}

#[tokio::test]
async fn a_minute_of_the_view_is_a_minute_of_the_analysis() {
    let given = given().await;
    let recipe = recipe();
    let plant = plant_of(&sim::plant_toml(&recipe, "127.0.0.1:0", "x.db"));
    let span = Span::new(recipe.start, recipe.start.plus(3 * DAY_US));
    let mut text = sim::header(&recipe);
    Simulation::new(recipe).write_rows(span.to, &mut text);
    take(&given, &plant, &text, span.to).await;
    let held = check(&given, &shell(&given).await, &plant, span).await;
    assert!(held > 2 * 3 * 1300, "{held} resistances could be held against the analysis");
}

/// Changes of tag, of gauge, of area and of codes within a day; words and odd times.
const ODD_PLANT: &str = r#"
[plant]
id = "harrow-fen"
time_zone = "UTC"
[service]
database = "x.db"
[[source]]
id = "scada"
layout = "wide"
time = { column = "t", format = "iso" }
[[train]]
id = "a"
membrane_area = [{ from = "2026-01-01", area = "1000 m2" }, { from = "2026-03-03T00:30:00Z", area = "1100 m2" }]
filtration = "dead-end"
drive = "pressurised"
[train.tags]
feed_pressure = [
  { tag = "P1", unit = "psi", pressure = "absolute", elevation = "1.5 m" },
  { tag = "P2", unit = "kPa", from = "2026-03-03T00:20:00Z" },
]
permeate_pressure = { tag = "P3", unit = "kPa", pressure = "vacuum", elevation = "-0.5 m" }
permeate_flow = { tag = "F1", unit = "gpm" }
temperature = { tag = "T1", unit = "degF" }
state = [
  { tag = "X1", filtration = ["RUN", "Prod \"2\""], backwash = ["BW"] },
  { tag = "X2", from = "2026-03-03T00:40:00Z", filtration = ["3", "1.5"], backwash = ["04"] },
]
[[train]]
id = "b"
membrane_area = "900 m2"
filtration = "dead-end"
drive = "pressurised"
[train.tags]
transmembrane_pressure = { tag = "D1", unit = "kPa" }
permeate_flow = { tag = "F2", unit = "m3/h" }
temperature = { tag = "T1", unit = "degF" }
state = { tag = "X2", filtration = ["3", "1.5"], backwash = ["4"] }
"#;

#[tokio::test]
async fn dated_tags_gauges_areas_and_codes_are_those_of_the_plant_file() {
    let given = given().await;
    let plant = plant_of(ODD_PLANT);
    let start = Instant::parse("2026-03-03T00:00:00Z").unwrap();
    let mut text = "t,P1,P2,P3,F1,T1,D1,F2,X1,X2\n".to_owned();
    for i in 0..60 {
        // Seven seconds late at every eleventh row: times that are no grid.
        let at = start.plus(i * 60_000_000 + if i % 11 == 0 { 7_000_000 } else { 0 });
        let noise = i * 7 % 5;
        let word = ["run ", "prod \"2\"", "BW", "Halt"][i as usize % 4];
        let code = ["3", "1.5", "4", "3"][i as usize % 4];
        let p3 = if i == 13 { "Bad".to_owned() } else { (20 + noise).to_string() };
        text += &format!(
            "{at},{},{},{p3},{}.25,4{noise}.1,{},{},{word},{code}\n",
            19 + noise,
            31 + noise,
            400 + noise,
            40 + noise,
            60 + noise
        );
    }
    take(&given, &plant, &text, start.plus(HOUR_US)).await;
    let pool = shell(&given).await;
    let held = check(&given, &pool, &plant, Span::new(start, start.plus(HOUR_US))).await;
    assert!(held >= 70, "{held}");
    let read = rows(&pool, &plant, &plant.trains[0], Span::new(start, start.plus(HOUR_US))).await;
    let seen = |i: usize| -> (Option<String>, Option<String>, Option<f64>) {
        (read[i].get("state"), read[i].get("phase"), read[i].get("permeate_pressure_pa"))
    };
    let some = |t: &str| Some(t.to_owned());
    assert_eq!((seen(1).0, seen(1).1), (some("prod \"2\""), some("filtration")));
    assert_eq!((seen(3).0, seen(3).1), (some("Halt"), None));
    assert_eq!((seen(41).0, seen(41).1), (some("1.5"), some("filtration")));
    assert_eq!((seen(42).0, seen(42).1), (some("4"), some("backwash")));
    assert_eq!(seen(13).2, None, "marked bad");
    // 20 kPa of suction, read half a metre below the common level: 999 kg/m3 times standard
    // gravity.
    close(seen(0).2.unwrap(), -20_000.0 - 0.5 * 999.0 * 9.806_65, 1e-12, "permeate pressure");
}

#[tokio::test]
async fn a_thermometer_read_within_the_minute_counts() {
    let given = given().await;
    let file = ODD_PLANT.replace("id = \"scada\"", "id = \"scada\"\nevery = \"1 min\"");
    let plant = plant_of(&file);
    let text = "t,D1,F2,T1,X2\n2026-03-03T00:00:00Z,40,60,,3\n2026-03-03T00:00:30Z,,,50,\n\
                2026-03-03T00:01:00Z,40,60,,3\n";
    let start = Instant::parse("2026-03-03T00:00:00Z").unwrap();
    take(&given, &plant, text, start.plus(HOUR_US)).await;
    let span = Span::new(start, start.plus(HOUR_US));
    let read = rows(&shell(&given).await, &plant, &plant.trains[1], span).await;
    let degc: Vec<Option<f64>> = read.iter().map(|r| r.get("temperature_degc")).collect();
    assert_eq!(degc.len(), 2, "the row of the thermometer alone is none");
    close(degc[0].unwrap(), 10.0, 1e-12, "50 degrees Fahrenheit");
    assert_eq!(degc[1], None);
    let resistance: Option<f64> = read[1].get("resistance_1_m");
    assert_eq!(resistance, None, "no temperature, no resistance");
}

#[tokio::test]
async fn another_plant_file_takes_the_place_of_the_tags_of_its_plant_only() {
    let given = given().await;
    let first = plant_of(ODD_PLANT);
    let second = plant_of(&ODD_PLANT.replace("F2", "F9"));
    let other = plant_of(&ODD_PLANT.replace("harrow-fen", "elsewhere"));
    for plant in [&first, &other, &second, &second] {
        given.store.save_train_tags(plant).await.unwrap();
    }
    let pool = shell(&given).await;
    let of = |sql: &'static str| {
        let query = sqlx::query_scalar::<_, String>(sql);
        let pool = pool.clone();
        async move { query.fetch_all(&pool).await.unwrap() }
    };
    let flows = "SELECT plant || ' ' || tag FROM train_tag
        WHERE train = 'b' AND role = 'permeate_flow' ORDER BY 1";
    assert_eq!(of(flows).await, ["elsewhere F2", "harrow-fen F9"]);
    let counts = "SELECT plant || ' ' || count(*) FROM train_area GROUP BY plant ORDER BY 1";
    assert_eq!(of(counts).await, ["elsewhere 3", "harrow-fen 3"]);
    let codes = "SELECT code || ' ' || phase FROM train_state
        WHERE plant = 'elsewhere' AND train = 'a' AND from_us > 0 ORDER BY code";
    assert_eq!(of(codes).await, ["1.5 filtration", "3 filtration", "4 backwash"]);
}

#[tokio::test]
async fn a_train_day_is_found_by_the_key_of_its_chunks() {
    let given = given().await;
    given.store.save_train_tags(&plant_of(ODD_PLANT)).await.unwrap();
    let pool = shell(&given).await;
    for (view, bound) in
        [("minute", "day = 1"), ("train_reading", "day = 1"), ("minute", "day BETWEEN 1 AND 3")]
    {
        let sql = format!(
            "EXPLAIN QUERY PLAN SELECT * FROM {view}
             WHERE plant = 'p' AND train = 't' AND {bound} ORDER BY time_us"
        );
        let plan = sqlx::query(AssertSqlSafe(sql)).fetch_all(&pool).await.unwrap();
        let lines: Vec<String> = plan.iter().map(|r| r.get("detail")).collect();
        let chunks: Vec<&String> = lines.iter().filter(|l| l.contains(" c ")).collect();
        let day = if bound.contains('=') { "day=?" } else { "day>? AND day<?" };
        let key = format!("(plant=? AND source=? AND tag=? AND {day})");
        assert_eq!(chunks.len(), 1, "chunks are read once: {lines:?}");
        assert!(
            chunks[0].starts_with("SEARCH c USING INDEX sqlite_autoindex_reading_chunk_1")
                && chunks[0].ends_with(&key),
            "{bound}: {lines:?}"
        );
        let tags = lines.iter().find(|l| l.contains(" t ")).expect("the tags of the train");
        assert!(tags.contains("PRIMARY KEY (plant=? AND train=?"), "{lines:?}");
    }
}

#[tokio::test]
async fn the_viscosity_table_is_the_formula() {
    let given = given().await;
    let pool = shell(&given).await;
    // The lookup of the view, at every hundredth of a degree.
    let sql = "SELECT k.value / 100.0,
            v.viscosity_pa_s + (k.value / 10.0 - v.tenths) * v.step_pa_s
        FROM generate AS k JOIN viscosity AS v ON v.tenths = CAST(k.value / 10.0 AS INTEGER)";
    let sql = format!(
        "WITH RECURSIVE generate (value) AS
            (SELECT 0 UNION ALL SELECT value + 1 FROM generate WHERE value < 6000) {sql}"
    );
    let table: Vec<(f64, f64)> = sqlx::query_as(AssertSqlSafe(sql)).fetch_all(&pool).await.unwrap();
    assert_eq!(table.len(), 6001);
    for (degc, got) in &table {
        let want = viscosity_pa_s(*degc).unwrap();
        close(*got, want, 1e-5, &format!("{degc} degrees"));
    }
    for (degc, got) in table.iter().step_by(10) {
        close(*got, viscosity_pa_s(*degc).unwrap(), 1e-9, &format!("{degc} degrees, in the table"));
    }
}

#[tokio::test]
async fn hours_and_days_stand_in_the_units_of_the_trade() {
    let given = given().await;
    let recipe = recipe();
    let plant = plant_of(&sim::plant_toml(&recipe, "127.0.0.1:0", "x.db"));
    let end = recipe.start.plus(DAY_US + 2 * HOUR_US);
    let mut text = sim::header(&recipe);
    Simulation::new(recipe).write_rows(end, &mut text);
    take(&given, &plant, &text, end).await;
    let cause = Cause { now: end, receipt: None };
    work::catch_up(&given.store, &plant, &cause, &mut |_, _| {}).await.unwrap();
    let pool = shell(&given).await;
    let train = &plant.trains[0].id;
    let span = Span::new(end.plus(-3 * DAY_US), end);
    let mu20 = viscosity_pa_s(20.0).unwrap();

    let hours = given.store.hours(&plant.id, train, span, 100).await.unwrap();
    let sql = "SELECT * FROM hour_units WHERE plant = ?1 AND train = ?2 ORDER BY start_us";
    let query = sqlx::query(sql).bind(plant.id.as_str()).bind(train.as_str());
    let shown = query.fetch_all(&pool).await.unwrap();
    assert_eq!(shown.len(), hours.len());
    let (row, hour) = (&shown[5], &hours[5]);
    let steady = hour.steady.as_ref().unwrap();
    assert_eq!(row.get::<&str, _>("start_utc"), "2026-03-28T05:00:00Z");
    // 1 L/(m2.h.bar) is 1e-3 m3 in 3600 s at 1e5 Pa.
    let lmh_bar = 1.0 / (mu20 * steady.resistance_1_m) / (1e-3 / 3600.0 / 1e5);
    close(row.get("permeability_l_m2_h_bar"), lmh_bar, 1e-8, "permeability");
    assert!((100.0..400.0).contains(&lmh_bar));
    close(row.get("flux_l_m2_h"), steady.flux_m_s * 3600.0 * 1000.0, 1e-12, "flux");
    close(row.get("tmp_bar"), steady.tmp_pa / 1e5, 1e-12, "TMP");

    let days = given.store.days(&plant.id, train, span, 9).await.unwrap();
    let sql = "SELECT * FROM day_units WHERE plant = ?1 AND train = ?2 ORDER BY start_us";
    let query = sqlx::query(sql).bind(plant.id.as_str()).bind(train.as_str());
    let shown = query.fetch_all(&pool).await.unwrap();
    assert_eq!(shown.len(), days.len());
    let (row, day) = (&shown[0], &days[0]);
    assert_eq!(row.get::<&str, _>("start_utc"), "2026-03-28T00:00:00Z");
    let lmh_bar = 1.0 / (mu20 * day.resistance_1_m.unwrap()) / (1e-3 / 3600.0 / 1e5);
    close(row.get("start_permeability_l_m2_h_bar"), lmh_bar, 1e-8, "permeability");
    close(row.get("filtered_l_m2"), day.volume_m * 1000.0, 1e-12, "volume");
}
