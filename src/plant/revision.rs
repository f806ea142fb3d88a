//! What a plant file means, as one text that neither comments nor layout, units or defaults
//! spelt out can change, and its digest.

use std::fmt::{Display, Write};
use std::path::Path;

use sha2::{Digest, Sha256};

use super::model::{
    Dated, HoldLimit, Limits, Plant, Procedure, Signal, Step, Train, VerifiedRinse,
};
use super::source::{Layout, Source, TimeFormat, Values};

/// Digest of all that the plant file says. The folder it lies in does not count.
pub(super) fn revision(plant: &Plant, file_dir: &Path) -> String {
    let mut text = Canonical::default();
    text.line("id", &plant.id);
    text.line("name", &plant.name);
    text.line("zone", plant.zone.name());
    text.number("reference_temperature_degc", plant.reference_temperature_degc);
    text.line("temperature_law", plant.temperature_law.name());
    for (hour, minute) in &plant.shifts {
        text.line("shift", format!("{hour}:{minute}"));
    }
    text.line("listen", &plant.service.listen);
    let database = &plant.service.database;
    text.line("database", database.strip_prefix(file_dir).unwrap_or(database).display());
    text.line("retention_us", format!("{:?}", plant.retention_us));
    for month in &plant.outlook_temperature {
        text.number(&format!("outlook {}", month.month), month.temperature_degc);
    }
    for source in &plant.sources {
        text.source(source);
        text.line("expected_every_us", source.expected_every_us);
    }
    for train in &plant.trains {
        text.train(train);
    }
    text.digest()
}

/// Digest of what decides how an export is read and what its values mean: sources and tags.
pub(super) fn mapping(plant: &Plant) -> String {
    let mut text = Canonical::default();
    for source in &plant.sources {
        text.source(source);
    }
    for train in &plant.trains {
        text.line("train", &train.id);
        train.signals.iter().for_each(|s| text.signal(s));
    }
    text.digest()
}

/// Lines of key and value. Texts are escaped, so that no value can look like another line.
#[derive(Default)]
struct Canonical(String);

impl Canonical {
    fn line(&mut self, key: &str, value: impl Display) {
        // Writing to a String cannot fail.
        let _ = writeln!(self.0, "{key} = {:?}", value.to_string());
    }

    /// Twelve digits: `0.3 bar` and `30 kPa` differ in the last bit and mean the same.
    fn number(&mut self, key: &str, value: f64) {
        let _ = writeln!(self.0, "{key} = {:.11e}", if value == 0.0 { 0.0 } else { value });
    }

    fn optional(&mut self, key: &str, value: Option<f64>) {
        if let Some(value) = value {
            self.number(key, value);
        }
    }

    fn dated(&mut self, key: &str, value: &Dated<f64>) {
        self.number(&format!("{key} from {}", value.from.micros()), value.value);
    }

    fn digest(self) -> String {
        let mut hex = String::with_capacity(64);
        for byte in Sha256::digest(self.0.as_bytes()) {
            let _ = write!(hex, "{byte:02x}");
        }
        hex
    }

    fn source(&mut self, source: &Source) {
        self.line("source", &source.id);
        match &source.layout {
            Layout::Wide => self.line("layout", "wide"),
            Layout::Long { tag_column, value_column, unit_column, quality_column, good } => {
                self.line("tag_column", tag_column);
                self.line("value_column", value_column);
                self.line("unit_column", format!("{unit_column:?}"));
                self.line("quality_column", format!("{quality_column:?}"));
                good.iter().for_each(|g| self.line("good", g));
            }
        }
        self.line("time", &source.time.column);
        match &source.time.format {
            TimeFormat::Strptime(format) => self.line("strptime", format),
            other => self.line("format", format!("{other:?}")),
        }
        self.line("zone", source.time.zone.name());
        self.line("repeated_hour", format!("{:?}", source.time.repeated_hour));
        match source.values {
            Values::Instant => self.line("values", "instant"),
            Values::Mean { interval_us, stamp } => {
                self.line("mean", format!("{interval_us} {stamp:?}"));
            }
        }
        self.line("hold_us", format!("{:?}", source.hold_us));
        self.line("every_us", source.every_us);
        self.line("separators", format!("{} {}", source.delimiter, source.decimal));
        source.bad_values.iter().for_each(|b| self.line("bad", b));
    }

    fn signal(&mut self, signal: &Signal) {
        self.line("signal", signal.role.word());
        self.line("source", &signal.source);
        self.line("tag", &signal.tag);
        self.line("from", signal.from.micros());
        self.line("unit", signal.unit.map_or("", |u| u.ucum));
        self.line("pressure", signal.pressure.word());
        self.number("elevation_m", signal.elevation_m);
        signal.serves.iter().for_each(|id| self.line("serves", id));
        self.line("max_hold_us", format!("{:?}", signal.max_hold_us));
        signal.states.iter().for_each(|(code, phase)| self.line(phase.word(), code));
    }

    fn train(&mut self, train: &Train) {
        self.line("train", &train.id);
        self.line("name", &train.name);
        self.line("asset", train.asset.as_deref().unwrap_or_default());
        train.area_m2.iter().for_each(|a| self.dated("area_m2", a));
        self.line("filtration", format!("{:?}", train.filtration));
        self.line("drive", format!("{:?}", train.drive));
        self.optional("as_new", train.as_new_permeability);
        train.after_clean_permeability.iter().for_each(|a| self.dated("after_clean", a));
        self.line("drinking_water", train.drinking_water);
        self.line("clean_duration_us", train.clean_duration_us);
        self.line("clean_notice_us", train.clean_notice_us);
        self.number("tmp_floor_pa", train.tmp_floor_pa);
        self.number("tmp_accuracy_pa", train.tmp_accuracy_pa);
        train.signals.iter().for_each(|s| self.signal(s));
        self.limits(&train.limits);
        if let Some(limits) = &train.membrane_limits {
            self.range("membrane ph", limits.ph);
            self.optional("membrane temperature_degc", limits.temperature_degc);
            self.optional("membrane free_chlorine_mg_l", limits.free_chlorine_mg_l);
        }
        train.procedures.iter().for_each(|p| self.procedure(p));
        if let Some(integrity) = &train.integrity {
            self.number("alcr", integrity.alcr);
            self.number("vcf", integrity.vcf);
            self.number("hold_up_volume_m3", integrity.hold_up_volume_m3);
            self.number("design_flow_m3_s", integrity.design_flow_m3_s);
        }
    }

    fn limits(&mut self, limits: &Limits) {
        self.limit("permeability_loss", limits.permeability_loss);
        self.limit("tmp_pa", limits.tmp_pa);
        self.line("on_delay_us", limits.on_delay_us);
        self.number("deadband", limits.deadband);
        self.line("planning_horizon_us", limits.planning_horizon_us);
    }

    fn limit(&mut self, key: &str, limit: HoldLimit) {
        self.number(&format!("{key} advisory"), limit.advisory);
        self.number(&format!("{key} clean"), limit.clean);
    }

    fn range(&mut self, key: &str, range: Option<(f64, f64)>) {
        if let Some((low, high)) = range {
            self.number(&format!("{key} low"), low);
            self.number(&format!("{key} high"), high);
        }
    }

    fn procedure(&mut self, procedure: &Procedure) {
        self.line("procedure", procedure.kind.word());
        self.line("revision", procedure.revision.as_deref().unwrap_or_default());
        procedure.steps.iter().for_each(|s| self.step(s));
    }

    fn step(&mut self, step: &Step) {
        self.line("step", step.class.word());
        self.line("chemical", step.chemical.as_deref().unwrap_or_default());
        self.line("concentration", step.concentration.as_deref().unwrap_or_default());
        self.optional("ph", step.ph);
        self.optional("temperature_degc", step.temperature_degc);
        self.line("duration_us", format!("{:?}", step.duration_us));
        self.optional("volume_m3", step.volume_m3);
        if let Some(VerifiedRinse { ph_range, free_chlorine_max_mg_l, .. }) = &step.verified {
            self.line("verified", "");
            self.range("verified ph", *ph_range);
            self.optional("verified free_chlorine_max_mg_l", *free_chlorine_max_mg_l);
        }
    }
}
