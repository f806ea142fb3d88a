//! What everything of a plant file ended up as, for people: each setting in the units of the
//! trade, marked where the file left it to the default.

use super::model::{Dated, Drive, Filtration, Limits, Loop, Signal, Train};
use super::read::Reading;
use super::source::{Layout, RepeatedHour, Source, Stamp, TimeFormat, Values};
use crate::base::{DAY_US, HOUR_US, Instant, MINUTE_US, SECOND_US, Zone, unit_by_ucum};

/// One setting.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Setting {
    /// Such as `train.uf-1.clean_duration`.
    pub key: String,
    /// With its unit.
    pub value: String,
    /// Whether the file leaves it to the default.
    pub defaulted: bool,
}

/// Every setting of a plant file, in the order of the sections of the format.
pub fn effective(reading: &Reading) -> Vec<Setting> {
    let plant = &reading.plant;
    let mut all = List { reading, settings: Vec::new() };
    all.add("plant.id", &["plant.id"], &plant.id);
    all.add("plant.name", &["plant.name"], &plant.name);
    all.add("plant.time_zone", &["plant.time_zone"], plant.zone.name());
    let reference = in_unit(plant.reference_temperature_degc, "Cel");
    all.add("plant.reference_temperature", &["plant.reference_temperature"], reference);
    all.add("plant.temperature_law", &["plant.temperature_law"], plant.temperature_law.name());
    let shifts: Vec<String> =
        plant.shifts.iter().map(|(hour, minute)| format!("{hour:02}:{minute:02}")).collect();
    all.add("plant.shifts", &["plant.shifts"], shifts.join(", "));
    all.add("service.listen", &["service.listen"], &plant.service.listen);
    let database = plant.service.database.display().to_string();
    all.add("service.database", &["service.database"], database);
    for (at, source) in plant.sources.iter().enumerate() {
        all.source(at, source);
    }
    for (at, train) in plant.trains.iter().enumerate() {
        all.train(at, train);
    }
    let outlook: Vec<String> = plant
        .outlook_temperature
        .iter()
        .map(|m| format!("{} in month {}", in_unit(m.temperature_degc, "Cel"), m.month))
        .collect();
    let outlook =
        if outlook.is_empty() { "from its own history".to_owned() } else { outlook.join(", ") };
    all.add("outlook.temperature", &["outlook.temperature"], outlook);
    let kept = plant.retention_us.map_or_else(|| "for ever".to_owned(), duration);
    all.add("retention.readings", &["retention.readings"], kept);
    all.settings
}

struct List<'r> {
    reading: &'r Reading,
    settings: Vec<Setting>,
}

impl List<'_> {
    /// Adds a setting; it is stated if the file has any of the paths.
    fn add(&mut self, key: &str, paths: &[&str], value: impl Into<String>) {
        let defaulted = !paths.iter().any(|p| self.reading.stated.contains(*p));
        self.settings.push(Setting { key: key.to_owned(), value: value.into(), defaulted });
    }

    fn source(&mut self, at: usize, source: &Source) {
        let mut add = |key: &str, value: String| {
            let path = format!("source[{at}].{key}");
            self.add(&format!("source.{}.{key}", source.id), &[&path], value);
        };
        add("layout", layout(&source.layout));
        add("time.column", source.time.column.clone());
        let format = match &source.time.format {
            TimeFormat::Strptime(format) => format.clone(),
            TimeFormat::Iso => "iso".to_owned(),
            TimeFormat::Serial => "serial".to_owned(),
            TimeFormat::Unix => "unix".to_owned(),
        };
        add("time.format", format);
        add("time.time_zone", source.time.zone.name().to_owned());
        let repeated = match source.time.repeated_hour {
            RepeatedHour::ByOrder => "by-order",
            RepeatedHour::Earlier => "earlier",
            RepeatedHour::Later => "later",
            RepeatedHour::Reject => "reject",
        };
        add("time.repeated_hour", repeated.to_owned());
        let values = match source.values {
            Values::Instant => "instant".to_owned(),
            Values::Mean { interval_us, stamp } => {
                let end = if stamp == Stamp::Start { "start" } else { "end" };
                format!("mean of {}, stamped at its {end}", duration(interval_us))
            }
        };
        add("values", values);
        let between =
            source.hold_us.map_or("none".to_owned(), |us| format!("hold, up to {}", duration(us)));
        add("between", between);
        add("every", duration(source.every_us));
        add("expected_every", duration(source.expected_every_us));
        add("delimiter", format!("{:?}", char::from(source.delimiter)));
        add("decimal", format!("{:?}", char::from(source.decimal)));
        add("bad_values", source.bad_values.join(", "));
    }

    fn train(&mut self, at: usize, train: &Train) {
        let zone = self.reading.plant.zone.clone();
        let mut add = |key: &str, value: String| {
            let path = format!("train[{at}].{key}");
            self.add(&format!("train.{}.{key}", train.id), &[&path], value);
        };
        add("name", train.name.clone());
        add("asset", train.asset.clone().unwrap_or_else(|| "none".to_owned()));
        let area: Vec<String> = train.area_m2.iter().map(|a| dated(a, "m2", &zone)).collect();
        add("membrane_area", area.join(", "));
        let filtration = match train.filtration {
            Filtration::DeadEnd => "dead-end",
            Filtration::CrossFlow(Loop::OnceThrough) => "cross-flow, once-through",
            Filtration::CrossFlow(Loop::FeedAndBleed) => "cross-flow, feed-and-bleed",
            Filtration::CrossFlow(Loop::Batch) => "cross-flow, batch",
        };
        add("filtration", filtration.to_owned());
        let submerged = train.drive == Drive::Submerged;
        add("drive", if submerged { "submerged" } else { "pressurised" }.to_owned());
        let unknown = || "not known".to_owned();
        let code = "L/(m2.h.bar)";
        let as_new = train.as_new_permeability.map_or_else(unknown, |p| in_unit(p, code));
        add("as_new_permeability", as_new);
        let after = train.after_clean_permeability.as_ref();
        add("after_clean_permeability", after.map_or_else(unknown, |p| dated(p, code, &zone)));
        add("drinking_water", train.drinking_water.to_string());
        add("clean_duration", duration(train.clean_duration_us));
        add("clean_notice", duration(train.clean_notice_us));
        add("tmp_floor", in_unit(train.tmp_floor_pa, "bar"));
        add("tmp_accuracy", in_unit(train.tmp_accuracy_pa, "bar"));
        add("membrane_limits", membrane_limits(train));
        let procedures: Vec<String> = train
            .procedures
            .iter()
            .map(|p| {
                let steps: Vec<&str> = p.steps.iter().map(|s| s.class.word()).collect();
                format!("{}: {}", p.kind.word(), steps.join(", "))
            })
            .collect();
        let integrity = train.integrity.map_or_else(unknown, |i| {
            let (volume, flow) =
                (in_unit(i.hold_up_volume_m3, "L"), in_unit(i.design_flow_m3_s, "m3/h"));
            format!("ALCR {}, VCF {}, hold-up {volume}, design flow {flow}", i.alcr, i.vcf)
        });
        for signal in &train.signals {
            add(&format!("tags.{}", signal.role.word()), tag(signal, &zone));
        }
        let or_none =
            |list: Vec<String>| if list.is_empty() { "none".to_owned() } else { list.join("; ") };
        self.shared(at, train, "procedure", "procedure", or_none(procedures));
        self.shared(at, train, "integrity", "integrity", integrity);
        self.limits(at, train, &train.limits);
    }

    /// Adds a setting that the file states for the train or for all.
    fn shared(&mut self, at: usize, train: &Train, key: &str, for_all: &str, value: String) {
        let own = format!("train[{at}].{key}");
        self.add(&format!("train.{}.{key}", train.id), &[&own, for_all], value);
    }

    fn limits(&mut self, at: usize, train: &Train, limits: &Limits) {
        let tmp = |pa: f64| if pa.is_finite() { in_unit(pa, "bar") } else { "none".to_owned() };
        let loss = limits.permeability_loss;
        for (key, value) in [
            ("permeability_loss_advisory", in_unit(loss.advisory, "%")),
            ("permeability_loss_clean", in_unit(loss.clean, "%")),
            ("tmp_advisory", tmp(limits.tmp_pa.advisory)),
            ("tmp_clean", tmp(limits.tmp_pa.clean)),
            ("on_delay", duration(limits.on_delay_us)),
            ("deadband", in_unit(limits.deadband, "%")),
            ("planning_horizon", duration(limits.planning_horizon_us)),
        ] {
            let key = format!("limits.{key}");
            self.shared(at, train, &key, &key, value);
        }
    }
}

fn layout(layout: &Layout) -> String {
    match layout {
        Layout::Wide => "wide".to_owned(),
        Layout::Long { tag_column, value_column, .. } => {
            format!("long, tags in {tag_column}, values in {value_column}")
        }
    }
}

fn membrane_limits(train: &Train) -> String {
    let Some(limits) = &train.membrane_limits else { return "not known".to_owned() };
    let parts = [
        limits.ph.map(|(low, high)| format!("pH {low} to {high}")),
        limits.temperature_degc.map(|t| format!("up to {}", in_unit(t, "Cel"))),
        limits.free_chlorine_mg_l.map(|c| format!("free chlorine up to {c} mg/L")),
    ];
    parts.into_iter().flatten().collect::<Vec<_>>().join(", ")
}

fn tag(signal: &Signal, zone: &Zone) -> String {
    let mut text = format!("{} of {}", signal.tag, signal.source);
    if let Some(unit) = signal.unit {
        text += &format!(" in {}", unit.label);
    }
    if signal.role.is_referred_pressure() {
        text += &format!(
            ", {}, elevation {}",
            signal.pressure.word(),
            in_unit(signal.elevation_m, "m")
        );
    }
    if !signal.serves.is_empty() {
        let ids: Vec<&str> = signal.serves.iter().map(|id| id.as_str()).collect();
        text += &format!(", serves {}", ids.join(", "));
    }
    for (code, phase) in &signal.states {
        text += &format!(", {code} {}", phase.word());
    }
    text + &since(signal.from, zone)
}

fn since(from: Instant, zone: &Zone) -> String {
    if from == Instant::from_micros(i64::MIN) {
        String::new()
    } else {
        format!(" from {}", zone.to_text(from))
    }
}

fn dated(value: &Dated<f64>, ucum: &str, zone: &Zone) -> String {
    in_unit(value.value, ucum) + &since(value.from, zone)
}

/// A value in SI, in a unit, to six significant digits.
fn in_unit(value_si: f64, ucum: &str) -> String {
    let Some(unit) = unit_by_ucum(ucum) else { return value_si.to_string() };
    let value = unit.from_si(value_si);
    let rounded = format!("{value:.5e}").parse::<f64>().unwrap_or(value);
    format!("{rounded} {}", unit.label)
}

/// A duration in the largest unit in which it is a whole number.
fn duration(us: i64) -> String {
    const YEAR_US: i64 = 365 * DAY_US + 6 * HOUR_US;
    for (length_us, word) in [(YEAR_US, "years"), (DAY_US, "d"), (HOUR_US, "h"), (MINUTE_US, "min")]
    {
        // A day is written as 24 h, as plants do.
        let least = if length_us == DAY_US { 2 * DAY_US } else { length_us };
        if us % length_us == 0 && us >= least {
            return format!("{} {word}", us / length_us);
        }
    }
    format!("{} s", us as f64 / SECOND_US as f64)
}
