//! The checked model of a plant.

use std::path::PathBuf;

use serde::{Deserialize, Serialize};

use crate::base::{Instant, SourceId, Tag, TrainId, Unit, Zone};
use crate::science::TemperatureLaw;

use super::source::Source;

/// A plant as its file describes it.
#[derive(Clone, Debug, PartialEq)]
pub struct Plant {
    /// Short name, in every key of the store.
    pub id: String,
    /// Name for people; the id where none was given.
    pub name: String,
    /// The plant's own time zone.
    pub zone: Zone,
    /// Temperature at which permeability is compared, degrees Celsius.
    pub reference_temperature_degc: f64,
    /// How viscosity follows temperature.
    pub temperature_law: TemperatureLaw,
    /// Local times at which shifts begin, (hour, minute), ascending, at least one.
    pub shifts: Vec<(i8, i8)>,
    /// Where the daemon listens and keeps its store.
    pub service: Service,
    /// Export layouts, at least one.
    pub sources: Vec<Source>,
    /// Trains, in the file's order, at least one.
    pub trains: Vec<Train>,
    /// Expected feed temperature by month, where the plant states one.
    pub outlook_temperature: Vec<MonthTemperature>,
    /// How long raw readings are kept; `None` is for ever.
    pub retention_us: Option<i64>,
    /// Hex SHA-256 of the parsed content: two files that mean the same have one revision.
    pub revision: String,
    /// Hex SHA-256 of what decides how an export is read (sources and tags): a file posted
    /// again under another mapping is taken anew.
    pub mapping: String,
}

impl Plant {
    /// The train of that id.
    pub fn train(&self, id: &TrainId) -> Option<&Train> {
        self.trains.iter().find(|t| t.id == *id)
    }
    /// The source of that id.
    pub fn source(&self, id: &SourceId) -> Option<&Source> {
        self.sources.iter().find(|s| s.id == *id)
    }
}

/// Where the daemon listens and keeps its store.
#[derive(Clone, Debug, PartialEq)]
pub struct Service {
    /// Socket address, for example `127.0.0.1:8420`.
    pub listen: String,
    /// Database file, absolute or relative to the plant file.
    pub database: PathBuf,
}

/// A value with the moment from which it holds.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Dated<T> {
    /// From when; `Instant::from_micros(i64::MIN)` for always.
    pub from: Instant,
    /// The value.
    pub value: T,
}

/// A train.
#[derive(Clone, Debug, PartialEq)]
pub struct Train {
    /// Short name.
    pub id: TrainId,
    /// Name for people; the id where none was given.
    pub name: String,
    /// The maintenance system's number.
    pub asset: Option<String>,
    /// Membrane area in m2 with dates, ascending, at least one.
    pub area_m2: Vec<Dated<f64>>,
    /// Dead-end or cross-flow.
    pub filtration: Filtration,
    /// Pressurised or submerged.
    pub drive: Drive,
    /// Permeability of the new membrane at the reference temperature, m/(s.Pa).
    pub as_new_permeability: Option<f64>,
    /// What is known of the last good clean before the data: from when, m/(s.Pa).
    pub after_clean_permeability: Option<Dated<f64>>,
    /// Whether its filtrate is drunk.
    pub drinking_water: bool,
    /// Hours a clean takes, in microseconds.
    pub clean_duration_us: i64,
    /// Notice a clean needs, in microseconds.
    pub clean_notice_us: i64,
    /// TMP below which it is not believed, Pa.
    pub tmp_floor_pa: f64,
    /// Accuracy of a TMP, Pa.
    pub tmp_accuracy_pa: f64,
    /// Its tags.
    pub signals: Vec<Signal>,
    /// Its limits: the plant's, with its own on top.
    pub limits: Limits,
    /// From the membrane's data sheet; `None` where the plant file holds none.
    pub membrane_limits: Option<MembraneLimits>,
    /// The site's cleaning procedures that apply to it, its own first.
    pub procedures: Vec<Procedure>,
    /// Approved integrity values, for trains that are tested.
    pub integrity: Option<IntegrityValues>,
}

impl Train {
    /// Membrane area in service at a moment, m2.
    pub fn area_at(&self, at: Instant) -> f64 {
        self.area_m2
            .iter()
            .rev()
            .find(|a| a.from <= at)
            .or(self.area_m2.first())
            .map_or(0.0, |a| a.value)
    }
    /// The signals of a role, in the file's order (several where a tag was changed by date).
    pub fn signals_of(&self, role: Role) -> impl Iterator<Item = &Signal> {
        self.signals.iter().filter(move |s| s.role == role)
    }
}

/// Dead-end or cross-flow.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Filtration {
    /// All feed passes the membrane until a backwash.
    DeadEnd,
    /// Part of the feed sweeps along it.
    CrossFlow(Loop),
}

/// How a cross-flow train's loop is run.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Loop {
    /// Once through.
    OnceThrough,
    /// Fed and bled.
    FeedAndBleed,
    /// A batch concentrated in turn.
    Batch,
}

/// What drives the water through.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Drive {
    /// Pressure on the feed side.
    Pressurised,
    /// Suction on the permeate side of a submerged membrane.
    Submerged,
}

/// What a tag measures.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord, Hash, Serialize, Deserialize)]
#[serde(rename_all = "snake_case")]
#[expect(missing_docs, reason = "the names are the plant file's")]
pub enum Role {
    FeedPressure,
    PermeatePressure,
    ConcentratePressure,
    TransmembranePressure,
    PermeateFlow,
    FeedFlow,
    FlowSetpoint,
    BackwashFlow,
    RecirculationFlow,
    BleedFlow,
    Temperature,
    TankLevel,
    State,
    FeedTurbidity,
    PermeateTurbidity,
    FeedConcentration,
    PermeateConcentration,
    RetentateConcentration,
    IntegrityPressure,
}

/// What a pressure is measured against.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum PressureKind {
    /// The air around; below it is negative.
    Gauge,
    /// Empty space.
    Absolute,
    /// The air around, counted positive downwards.
    Vacuum,
}

/// One tag in one role of one train.
#[derive(Clone, Debug, PartialEq)]
pub struct Signal {
    /// What it measures.
    pub role: Role,
    /// Source it comes from.
    pub source: SourceId,
    /// Its name there.
    pub tag: Tag,
    /// From when this tag holds; `Instant::from_micros(i64::MIN)` for always.
    pub from: Instant,
    /// Unit of the readings; `None` for states.
    pub unit: Option<Unit>,
    /// For pressures.
    pub pressure: PressureKind,
    /// Height above the train's common level, m, positive upwards.
    pub elevation_m: f64,
    /// Trains that one meter serves, where it serves several.
    pub serves: Vec<TrainId>,
    /// Longest hold of its last value, where it has its own.
    pub max_hold_us: Option<i64>,
    /// For states: which words or numbers mean which phase.
    pub states: Vec<(String, Phase)>,
}

/// What a train is doing.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord, Hash, Serialize, Deserialize)]
#[serde(rename_all = "snake_case")]
#[expect(missing_docs, reason = "the names are the plant file's")]
pub enum Phase {
    Filtration,
    Backwash,
    ChemicalBackwash,
    MaintenanceClean,
    CleanInPlace,
    IntegrityTest,
    Standby,
    Relaxation,
    Flush,
    Calibration,
    OutOfService,
    /// A code that the plant file does not name, or no state at all.
    Unknown,
}

/// The limits of a train.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Limits {
    /// Loss of start-of-cycle permeability against the baseline, share 0 to 1.
    pub permeability_loss: HoldLimit,
    /// TMP at the end of a cycle, as read, Pa; infinite where none is set.
    pub tmp_pa: HoldLimit,
    /// Filtration time it must hold before it counts.
    pub on_delay_us: i64,
    /// Share, 0 to 1: points of loss; of a TMP limit, its share.
    pub deadband: f64,
    /// A limit whose early date falls within this is spoken of.
    pub planning_horizon_us: i64,
}

/// An advisory and a clean limit of one quantity.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct HoldLimit {
    /// Worth watching.
    pub advisory: f64,
    /// Time to clean.
    pub clean: f64,
}

/// Limits from the membrane's data sheet. Advice never exceeds them.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct MembraneLimits {
    /// Lowest and highest pH.
    pub ph: Option<(f64, f64)>,
    /// Highest temperature, degrees Celsius.
    pub temperature_degc: Option<f64>,
    /// Highest free chlorine, mg/L.
    pub free_chlorine_mg_l: Option<f64>,
}

/// The site's own cleaning procedure.
#[derive(Clone, Debug, PartialEq)]
pub struct Procedure {
    /// `CleanInPlace`, `MaintenanceClean` or `ChemicalBackwash`.
    pub kind: Phase,
    /// Its revision, if the file names one.
    pub revision: Option<String>,
    /// Its steps, at least one.
    pub steps: Vec<Step>,
}

/// A class of chemical: what decides which may meet.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord, Hash, Serialize, Deserialize)]
#[serde(rename_all = "snake_case")]
pub enum StepClass {
    /// Sodium or calcium hypochlorite, free chlorine.
    Hypochlorite,
    /// Caustic.
    Alkali,
    /// Mineral or organic acid.
    Acid,
    /// Hydrogen peroxide, peracids.
    Peroxide,
    /// Sulphite, thiosulphate, ascorbic acid.
    Reductant,
    /// Surfactants, enzymes.
    Detergent,
    /// Water alone.
    Rinse,
    /// Unknown: conflicts with everything.
    Other,
}

/// One step of a clean: planned, or done. Empty fields were not stated.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize)]
pub struct Step {
    /// Class of chemical.
    pub class: StepClass,
    /// The chemical as the site calls it.
    pub chemical: Option<String>,
    /// Concentration as stated, number and unit.
    pub concentration: Option<String>,
    /// pH.
    pub ph: Option<f64>,
    /// Degrees Celsius.
    pub temperature_degc: Option<f64>,
    /// How long, in microseconds.
    pub duration_us: Option<i64>,
    /// Volume of solution, m3.
    pub volume_m3: Option<f64>,
    /// For a rinse: what shows that it is done, or showed it.
    pub verified: Option<VerifiedRinse>,
}

/// The check at the end of a rinse: its limits in a plan, its readings in a record.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize)]
pub struct VerifiedRinse {
    /// Lowest and highest pH that pass (plan).
    pub ph_range: Option<(f64, f64)>,
    /// Highest free chlorine that passes, mg/L (plan).
    pub free_chlorine_max_mg_l: Option<f64>,
    /// pH read (record).
    pub ph: Option<f64>,
    /// Free chlorine read, mg/L (record).
    pub free_chlorine_mg_l: Option<f64>,
    /// Who read them (record).
    pub by: Option<String>,
}

/// Regulator-approved values for the pressure-decay test.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct IntegrityValues {
    /// Air-liquid conversion ratio.
    pub alcr: f64,
    /// Volumetric concentration factor.
    pub vcf: f64,
    /// Hold-up volume, m3.
    pub hold_up_volume_m3: f64,
    /// Design filtrate flow, m3/s.
    pub design_flow_m3_s: f64,
}

/// An expected feed temperature.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct MonthTemperature {
    /// Month, 1 to 12.
    pub month: i8,
    /// Degrees Celsius.
    pub temperature_degc: f64,
}
