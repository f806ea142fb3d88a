//! A small plant, and a check that all cases share: text in, columns and counts out.

mod any_chunks;
mod exports;
mod refusals;

use super::*;
use crate::base::{CellValue, SourceId, TrainId, Zone};
use crate::plant::*;

fn always() -> Instant {
    Instant::from_micros(i64::MIN)
}

fn signal(role: Role, tag: &str) -> Signal {
    Signal {
        role,
        source: SourceId::new("scada"),
        tag: Tag::new(tag),
        from: always(),
        unit: None,
        pressure: PressureKind::Gauge,
        elevation_m: 0.0,
        serves: Vec::new(),
        max_hold_us: None,
        states: Vec::new(),
    }
}

fn train(id: &str, signals: Vec<Signal>) -> Train {
    let limit = HoldLimit { advisory: 0.2, clean: 0.3 };
    Train {
        id: TrainId::new(id),
        name: id.to_owned(),
        asset: None,
        area_m2: vec![Dated { from: always(), value: 4_160.0 }],
        filtration: Filtration::DeadEnd,
        drive: Drive::Pressurised,
        as_new_permeability: None,
        after_clean_permeability: None,
        drinking_water: true,
        clean_duration_us: 0,
        clean_notice_us: 0,
        tmp_floor_pa: 5_000.0,
        tmp_accuracy_pa: 1_000.0,
        signals,
        limits: Limits {
            permeability_loss: limit,
            tmp_pa: limit,
            on_delay_us: 0,
            deadband: 0.02,
            planning_horizon_us: 0,
        },
        membrane_limits: None,
        procedures: Vec::new(),
        integrity: None,
    }
}

/// Two trains with a pressure each, one state and one shared thermometer.
pub(super) fn plant() -> Plant {
    let source = Source {
        id: SourceId::new("scada"),
        layout: Layout::Wide,
        time: TimeColumn {
            column: "Timestamp".to_owned(),
            format: TimeFormat::Strptime("%Y-%m-%d %H:%M:%S".to_owned()),
            zone: Zone::named("Europe/London").unwrap(),
            repeated_hour: RepeatedHour::ByOrder,
        },
        values: Values::Instant,
        hold_us: None,
        every_us: MINUTE_US,
        expected_every_us: 60 * MINUTE_US,
        delimiter: b',',
        decimal: b'.',
        bad_values: vec!["Bad".to_owned(), "No reply".to_owned(), "-9999".to_owned()],
    };
    let mut state = signal(Role::State, "XS-101");
    state.states = vec![("none".to_owned(), Phase::Standby)];
    let thermometer = || signal(Role::Temperature, "TT-001");
    let one = vec![signal(Role::FeedPressure, "PT-101"), state, thermometer()];
    let two = vec![signal(Role::FeedPressure, "PT-201"), thermometer()];
    Plant {
        id: "demo".to_owned(),
        name: "demo".to_owned(),
        zone: Zone::named("Europe/London").unwrap(),
        reference_temperature_degc: 20.0,
        temperature_law: crate::science::TemperatureLaw::Iapws,
        shifts: vec![(6, 0)],
        service: Service { listen: String::new(), database: "washbell.db".into() },
        sources: vec![source],
        trains: vec![train("uf-1", one), train("uf-2", two)],
        outlook_temperature: Vec::new(),
        retention_us: None,
        revision: String::new(),
        mapping: String::new(),
    }
}

/// A column as text: `minute of its UTC day=value`, words in quotes, bad ones with a `!`.
fn column_text(column: &Column) -> String {
    let value = |v: &CellValue| match v {
        CellValue::Number(n) => n.to_string(),
        CellValue::Word(w) => format!("'{}'", column.word(*w)),
        CellValue::Bad(w) => format!("!{}", column.word(*w)),
    };
    let one = |(t, v): (&Instant, &CellValue)| format!("{}={}", &t.to_utc_text()[11..16], value(v));
    column.times.iter().zip(&column.values).map(one).collect::<Vec<_>>().join(" ")
}

struct Case {
    source: Source,
    received: Instant,
    newest_known: Option<Instant>,
}

impl Case {
    fn new() -> Self {
        let received = Instant::parse("2026-03-02T06:05:00Z").unwrap();
        Self { source: plant().sources[0].clone(), received, newest_known: None }
    }
    fn received(mut self, at: &str) -> Self {
        self.received = Instant::parse(at).unwrap();
        self
    }
    fn parse(&self, chunks: &[&[u8]]) -> Result<(Batch, Summary), Refusal> {
        let mut parser = Parser::new(&plant(), &self.source, self.received, self.newest_known);
        let mut batch = Batch::default();
        for chunk in chunks {
            parser.feed(chunk, &mut batch)?;
        }
        let summary = parser.finish(&mut batch)?;
        Ok((batch, summary))
    }
    /// Columns as `tag: values`, counts as good, bad, missing, rejected, and for each rejection
    /// its line, its column and a word of its reason.
    #[track_caller]
    fn check(
        &self,
        text: impl AsRef<[u8]>,
        columns: &[&str],
        counts: [u64; 4],
        rejections: &[(u64, &str, &str)],
    ) -> Summary {
        let (batch, s) = self.parse(&[text.as_ref()]).unwrap();
        let found: Vec<String> = batch
            .tags
            .iter()
            .zip(&batch.columns)
            .map(|(tag, column)| format!("{tag}: {}", column_text(column)))
            .collect();
        assert_eq!(found, columns);
        assert_eq!([s.good, s.bad, s.missing, s.rejected], counts);
        assert_eq!(s.cells, counts.iter().sum::<u64>());
        assert_eq!(s.cells, s.rows * columns.len() as u64);
        assert_eq!(s.rejections.len(), rejections.len(), "{:?}", s.rejections);
        for (found, (line, column, word)) in s.rejections.iter().zip(rejections) {
            assert_eq!((found.line, found.column.as_str()), (*line, *column), "{found:?}");
            assert!(found.reason.contains(word), "{found:?}");
        }
        s
    }
    #[track_caller]
    fn check_refused(&self, text: impl AsRef<[u8]>, words: &[&str]) {
        let refusal = self.parse(&[text.as_ref()]).err().unwrap();
        for word in words {
            assert!(refusal.detail.contains(word), "{refusal}");
        }
    }
}

/// Rows of one pressure below its header.
fn pt(rows: &[&str]) -> String {
    format!("Timestamp,PT-101\n{}\n", rows.join("\n"))
}
