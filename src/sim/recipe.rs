//! What an invented plant is made of. Everything that chance does not decide stands here, and
//! the chance is the seed's: one recipe is one plant, bit for bit.

use super::clean::{PlannedClean, RecordedClean};
use super::fault::{Fault, SensorFault};
use super::water::viscosity_pa_s;
use crate::base::{DAY_US, HOUR_US, Instant, MINUTE_US, SECOND_US, Span, TrainId, Zone};
use crate::plant::{Dated, HoldLimit, Limits};

/// An invented plant.
#[derive(Clone, Debug, PartialEq)]
pub struct Recipe {
    /// Decides all that chance decides.
    pub seed: u64,
    /// Short name.
    pub plant_id: String,
    /// Name for people.
    pub plant_name: String,
    /// Zone of the export's time stamps.
    pub zone: Zone,
    /// First minute; seconds are cut off.
    pub start: Instant,
    /// Flux asked of each train while all are in service, m/s, with dates, at least one.
    pub flux_m_s: Vec<Dated<f64>>,
    /// Flux that no train is driven beyond when it takes over for another, m/s.
    pub flux_max_m_s: f64,
    /// The feed's temperature.
    pub temperature: TemperatureRecipe,
    /// Day-to-day wander of the fouling rate that all trains share, 0 to 0.35.
    pub feed_wander_sd: f64,
    /// Spells of worse feed.
    pub feed_spells: Vec<FeedSpell>,
    /// What happens by the clock.
    pub routine: Routine,
    /// What the instruments add.
    pub noise: Noise,
    /// What the historian spoils.
    pub dirt: Dirt,
    /// The limits that the truth is measured against and that go into the plant file.
    pub limits: Limits,
    /// Trains, at least one.
    pub trains: Vec<TrainRecipe>,
}

/// A dead-end train.
#[derive(Clone, Debug, PartialEq)]
pub struct TrainRecipe {
    /// Short name.
    pub id: TrainId,
    /// Name for people.
    pub name: String,
    /// Number of its instrument loops: 1 for `PT-101`, 2 for `PT-201`.
    pub loop_number: u32,
    /// Membrane area, m2.
    pub area_m2: f64,
    /// Resistance of the new membrane, 1/m.
    pub r_membrane_per_m: f64,
    /// What nothing brings back, at the start, 1/m.
    pub r_irrecoverable_per_m: f64,
    /// What only chemicals bring back, at the start, 1/m.
    pub r_chemical_per_m: f64,
    /// When the last good clean before the data was.
    pub after_clean_from: Instant,
    /// Resistance right after it, 1/m: the first baseline.
    pub after_clean_per_m: f64,
    /// What a cycle lays down, 1/m for each m3 filtered through each m2.
    pub alpha_per_m2: f64,
    /// Growth of what only chemicals bring back, 1/m for each 24 hours of filtration at 20
    /// degrees and at the first flux, net of what chemical backwashes take off.
    pub rate_per_m_day: f64,
    /// Day-to-day wander of that rate, 0 to 0.35, of this train alone.
    pub wander_sd: f64,
    /// Share by which the rate is higher at 5 than at 20 degrees Celsius.
    pub cold_effect: f64,
    /// The rate grows as exp of this times the relative rise in flux.
    pub flux_effect: f64,
    /// What the two gauges together show at rest, Pa.
    pub tmp_offset_pa: f64,
    /// Cleans in place, in any order.
    pub cleans: Vec<PlannedClean>,
    /// Times out of use, in any order.
    pub standby: Vec<Span>,
    /// What goes wrong.
    pub faults: Vec<Fault>,
}

/// How the feed's temperature goes.
#[derive(Clone, Debug, PartialEq)]
pub struct TemperatureRecipe {
    /// Coldest of the season, degrees Celsius.
    pub coldest_degc: f64,
    /// Warmest of the season, degrees Celsius.
    pub warmest_degc: f64,
    /// Day of the year of the coldest, from 0.
    pub coldest_day_of_year: f64,
    /// Departure from the season from day to day, never beyond 1 K.
    pub daily_sd_k: f64,
    /// Spells below the season.
    pub cold_snaps: Vec<ColdSnap>,
    /// Faults of the plant's one thermometer.
    pub faults: Vec<SensorFault>,
}

/// A spell below the season.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct ColdSnap {
    /// When it begins to fall.
    pub from: Instant,
    /// How far, K.
    pub depth_k: f64,
    /// Days of falling, staying and rising; each above 0.
    pub fall_days: f64,
    /// See `fall_days`.
    pub stay_days: f64,
    /// See `fall_days`.
    pub rise_days: f64,
}

/// A spell of feed that fouls more, as in an algal bloom.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct FeedSpell {
    /// When.
    pub span: Span,
    /// Factor on what a cycle lays down.
    pub alpha_factor: f64,
    /// Factor on the rate of what only chemicals bring back.
    pub rate_factor: f64,
    /// Share of a cycle's deposit that a backwash takes off meanwhile.
    pub washed_back: f64,
}

/// What happens by the clock.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Routine {
    /// Filtration between two backwashes.
    pub cycle_us: i64,
    /// A backwash.
    pub backwash_us: i64,
    /// Least and most share of a cycle's deposit that a backwash takes off.
    pub washed_back: (f64, f64),
    /// Spacing and length of chemical backwashes.
    pub chemical_backwash: Option<(i64, i64)>,
    /// Share that it takes off of what grew since the one before.
    pub chemical_backwash_share: f64,
    /// Spacing and length of integrity tests.
    pub integrity_test: Option<(i64, i64)>,
}

/// Standard deviations of what the instruments add.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Noise {
    /// Each pressure, Pa.
    pub pressure_pa: f64,
    /// Flow, as a share.
    pub flow_share: f64,
    /// Temperature, K.
    pub temperature_k: f64,
}

/// How often the historian spoils something.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Dirt {
    /// Share of cells that say `Bad` or `No reply`.
    pub bad_cells: f64,
    /// Share of cells that are empty.
    pub empty_cells: f64,
    /// Share of cells that hold -9999.
    pub sentinel_cells: f64,
    /// Share of rows written twice.
    pub repeated_rows: f64,
    /// Share of rows with cells too few or too many.
    pub ragged_rows: f64,
    /// Share of rows that come after the next one; never near a change of clocks, where the
    /// order of rows tells the two passes of an hour apart.
    pub late_rows: f64,
    /// Gaps of 5 to 25 minutes a day, on average.
    pub gaps_per_day: f64,
}

/// The tags of a train in the export.
#[derive(Clone, Debug, PartialEq, Eq)]
#[expect(missing_docs, reason = "the names are the plant file's")]
pub struct TrainTags {
    pub feed_pressure: String,
    pub permeate_pressure: String,
    pub permeate_flow: String,
    pub state: String,
}

/// Tag of the plant's one thermometer.
pub const THERMOMETER_TAG: &str = "TT-001";

/// One L/(m2.h) in m/s.
pub(super) const LMH_M_S: f64 = 1.0 / 3.6e6;

impl Recipe {
    /// A plant without noise, wander, dirt, season or cleans: what its rows give back is the
    /// truth to the last rounding. 15 degrees, 59 L/(m2.h); tests change what they are about.
    pub fn plain(seed: u64, zone: Zone, start: Instant, trains: u32) -> Self {
        Self {
            seed,
            plant_id: "tarnhollow".to_owned(),
            plant_name: "Tarnhollow Water Works".to_owned(),
            zone,
            start,
            flux_m_s: vec![Dated { from: start, value: 59.0 * LMH_M_S }],
            flux_max_m_s: 85.0 * LMH_M_S,
            temperature: TemperatureRecipe::steady(15.0),
            feed_wander_sd: 0.0,
            feed_spells: Vec::new(),
            routine: Routine::usual(),
            noise: Noise { pressure_pa: 0.0, flow_share: 0.0, temperature_k: 0.0 },
            dirt: Dirt::none(),
            limits: usual_limits(),
            trains: (1..=trains).map(|n| TrainRecipe::plain(n, start)).collect(),
        }
    }

    /// Cleans that somebody wrote down and that had ended by then, oldest first.
    pub fn recorded_cleans(&self, by: Instant) -> Vec<RecordedClean> {
        let mut cleans: Vec<RecordedClean> = self
            .trains
            .iter()
            .flat_map(|t| t.cleans.iter().filter(|c| c.recorded).map(|c| c.record(&t.id)))
            .filter(|c| c.end <= by)
            .collect();
        cleans.sort_by_key(|c| c.start);
        cleans
    }

    /// The flux asked at a moment, m/s.
    pub(super) fn flux_at(&self, at: Instant) -> f64 {
        let dated = self.flux_m_s.iter().rev().find(|f| f.from <= at).or(self.flux_m_s.first());
        dated.map_or(0.0, |f| f.value)
    }
}

impl TrainRecipe {
    /// A train of 4,160 m2 that fouls steadily, cleaned right before the start.
    pub fn plain(loop_number: u32, start: Instant) -> Self {
        let (r_membrane, r_irrecoverable, r_chemical) = (1.38e12, 1.6e11, 2.0e10);
        Self {
            id: TrainId::new(&format!("uf-{loop_number}")),
            name: format!("UF train {loop_number}"),
            loop_number,
            area_m2: 4160.0,
            r_membrane_per_m: r_membrane,
            r_irrecoverable_per_m: r_irrecoverable,
            r_chemical_per_m: r_chemical,
            after_clean_from: start,
            after_clean_per_m: r_membrane + r_irrecoverable + r_chemical,
            alpha_per_m2: 8e12,
            rate_per_m_day: 1.3e10,
            wander_sd: 0.0,
            cold_effect: 0.0,
            flux_effect: 0.0,
            tmp_offset_pa: 0.0,
            cleans: Vec::new(),
            standby: Vec::new(),
            faults: Vec::new(),
        }
    }

    /// Its tags in the export.
    pub fn tags(&self) -> TrainTags {
        let n = self.loop_number;
        TrainTags {
            feed_pressure: format!("PT-{n}01"),
            permeate_pressure: format!("PT-{n}03"),
            permeate_flow: format!("FT-{n}01"),
            state: format!("XS-{n}01"),
        }
    }

    /// Permeability of the new membrane at 20 degrees Celsius, m/(s.Pa).
    pub fn as_new_permeability(&self) -> f64 {
        1.0 / (viscosity_pa_s(20.0) * self.r_membrane_per_m)
    }

    /// Permeability after the last good clean before the data, at 20 degrees, m/(s.Pa).
    pub fn after_clean_permeability(&self) -> f64 {
        1.0 / (viscosity_pa_s(20.0) * self.after_clean_per_m)
    }
}

impl TemperatureRecipe {
    /// From 3 degrees in February to 22 in August.
    pub fn seasonal() -> Self {
        Self {
            coldest_degc: 3.0,
            warmest_degc: 22.0,
            coldest_day_of_year: 36.0,
            daily_sd_k: 0.5,
            cold_snaps: Vec::new(),
            faults: Vec::new(),
        }
    }

    /// The same all year.
    pub fn steady(degc: f64) -> Self {
        Self { coldest_degc: degc, warmest_degc: degc, daily_sd_k: 0.0, ..Self::seasonal() }
    }
}

impl ColdSnap {
    /// How far below the season it is at a moment, K.
    pub(super) fn depth_at(&self, at: Instant) -> f64 {
        let days = at.days_since(self.from);
        let risen = days - self.fall_days - self.stay_days;
        let share = (days / self.fall_days).min(1.0 - risen / self.rise_days);
        self.depth_k * share.clamp(0.0, 1.0)
    }
}

impl Routine {
    /// 30 minutes, 75 seconds of backwash, a chemical backwash and an integrity test a day.
    pub fn usual() -> Self {
        Self {
            cycle_us: 30 * MINUTE_US,
            backwash_us: 75 * SECOND_US,
            washed_back: (0.997, 0.999),
            chemical_backwash: Some((DAY_US, 20 * MINUTE_US)),
            chemical_backwash_share: 0.4,
            integrity_test: Some((DAY_US, 10 * MINUTE_US)),
        }
    }
}

impl Noise {
    /// 0.4 kPa, 0.6 per cent, 0.1 K.
    pub fn usual() -> Self {
        Self { pressure_pa: 400.0, flow_share: 0.006, temperature_k: 0.1 }
    }
}

impl Dirt {
    /// A clean export.
    pub fn none() -> Self {
        Self {
            bad_cells: 0.0,
            empty_cells: 0.0,
            sentinel_cells: 0.0,
            repeated_rows: 0.0,
            ragged_rows: 0.0,
            late_rows: 0.0,
            gaps_per_day: 0.0,
        }
    }

    /// A historian of the better kind: a few faults a day.
    pub fn usual() -> Self {
        Self {
            bad_cells: 1e-4,
            empty_cells: 1e-4,
            sentinel_cells: 2e-5,
            repeated_rows: 5e-4,
            ragged_rows: 1e-4,
            late_rows: 5e-4,
            gaps_per_day: 0.2,
        }
    }
}

/// Advisory at 20 per cent of loss or 0.70 bar, clean at 30 per cent or 0.90 bar.
fn usual_limits() -> Limits {
    Limits {
        permeability_loss: HoldLimit { advisory: 0.20, clean: 0.30 },
        tmp_pa: HoldLimit { advisory: 0.70e5, clean: 0.90e5 },
        on_delay_us: 6 * HOUR_US,
        deadband: 0.02,
        planning_horizon_us: 14 * DAY_US,
    }
}
