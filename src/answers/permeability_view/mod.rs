//! Permeability in time, by the minute, hour or day. Only steady filtration counts.

use serde::{Deserialize, Serialize};
use utoipa::ToSchema;

use super::time::PlantTime;
use super::units::{Shown, Units};
use crate::analysis::{Day, Hour, Normalised, Quality, Reason, Samples, Site, Steady, summarise};
use crate::base::{DAY_US, HOUR_US, Instant, MINUTE_US, Span, Zone};
use crate::plant::{Phase, Plant};

/// Spacing of a series.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Serialize, Deserialize, ToSchema)]
pub enum SeriesStep {
    /// A minute.
    #[serde(rename = "PT1M")]
    Minute,
    /// An hour of the local clock.
    #[serde(rename = "PT1H")]
    Hour,
    /// A plant day.
    #[serde(rename = "P1D")]
    Day,
}

impl SeriesStep {
    /// The ISO 8601 duration.
    pub const fn code(self) -> &'static str {
        match self {
            Self::Minute => "PT1M",
            Self::Hour => "PT1H",
            Self::Day => "P1D",
        }
    }
    /// The step of a duration in microseconds, if there is one.
    pub const fn of_us(us: i64) -> Option<Self> {
        match us {
            MINUTE_US => Some(Self::Minute),
            HOUR_US => Some(Self::Hour),
            DAY_US => Some(Self::Day),
            _ => None,
        }
    }
}

/// One page of a series of permeability.
#[derive(Clone, Debug, PartialEq, Serialize, ToSchema)]
pub struct PermeabilityView {
    /// Whose.
    pub train: String,
    /// End of the newest data that the series stands on; null where there are none.
    pub as_of: Option<PlantTime>,
    /// Temperature at which permeability is given.
    pub reference_temperature: Option<f64>,
    /// How viscosity follows temperature.
    pub temperature_law: String,
    /// Spacing of the points.
    pub step: SeriesStep,
    /// UCUM codes.
    pub units: SeriesUnits,
    /// Labels for people.
    pub unit_labels: SeriesUnits,
    /// The points, in order of time.
    pub points: Vec<PermeabilityPoint>,
    /// Address of the next page; null on the last.
    pub next: Option<String>,
}

/// Units of a series, by field.
#[derive(Clone, Debug, PartialEq, Serialize, ToSchema)]
#[expect(missing_docs, reason = "the names are those of the fields")]
pub struct SeriesUnits {
    pub permeability: String,
    pub flux: String,
    pub tmp: String,
    pub temperature: String,
    pub reference_temperature: String,
    pub resistance: String,
}

/// One step of a series.
#[derive(Clone, Debug, PartialEq, Serialize, ToSchema)]
pub struct PermeabilityPoint {
    /// Start of the step.
    pub time: PlantTime,
    /// That of the median resistance; null where nothing counted.
    pub permeability: Option<f64>,
    /// Lowest of the readings that counted.
    pub permeability_min: Option<f64>,
    /// Highest of them.
    pub permeability_max: Option<f64>,
    /// At the start of a cycle, median of the step; null where none was seen.
    pub permeability_start_of_cycle: Option<f64>,
    /// Median.
    pub flux: Option<f64>,
    /// Median, as read.
    pub tmp: Option<f64>,
    /// Median.
    pub temperature: Option<f64>,
    /// Median.
    pub resistance: Option<f64>,
    /// Readings that counted.
    pub samples: u32,
    /// Counted readings over expected.
    pub coverage: f64,
    /// `good`, `uncertain` or `bad`.
    pub quality: String,
    /// Why not good.
    #[serde(skip_serializing_if = "Vec::is_empty")]
    pub reasons: Vec<String>,
}

/// The series as it is shown.
pub fn permeability_view(
    plant: &Plant,
    site: &Site,
    units: &Units,
    step: SeriesStep,
    as_of: Option<Instant>,
    points: Vec<PermeabilityPoint>,
    next: Option<String>,
) -> PermeabilityView {
    let of = |f: fn(&Shown) -> &'static str| SeriesUnits {
        permeability: f(&units.permeability).to_owned(),
        flux: f(&units.flux).to_owned(),
        tmp: f(&units.tmp).to_owned(),
        temperature: f(&units.temperature).to_owned(),
        reference_temperature: f(&units.temperature).to_owned(),
        resistance: f(&units.resistance).to_owned(),
    };
    PermeabilityView {
        train: site.train.id.to_string(),
        as_of: PlantTime::optional(&plant.zone, as_of),
        reference_temperature: units.temperature.value(plant.reference_temperature_degc),
        temperature_law: plant.temperature_law.name(),
        step,
        units: of(|s| s.unit),
        unit_labels: of(|s| s.label),
        points,
        next,
    }
}

/// Points by the hour. An hour without filtration is left out.
pub fn hour_points(
    zone: &Zone,
    site: &Site,
    units: &Units,
    hours: &[Hour],
) -> Vec<PermeabilityPoint> {
    hours
        .iter()
        .filter(|h| h.filtration_s > 0.0)
        .map(|h| {
            let step = Counted {
                time: h.start,
                start_resistance_1_m: h.start_resistance_1_m,
                samples: h.samples,
                coverage: share(h.samples, h.expected),
                quality: h.quality,
                reasons: &h.reasons,
            };
            point(zone, site, units, h.steady.as_ref(), &step)
        })
        .collect()
}

/// Points by the plant day. `hours` are those of the days, in order of time; they give the range
/// and the median TMP. A day without filtration is left out.
pub fn day_points(
    zone: &Zone,
    site: &Site,
    units: &Units,
    days: &[Day],
    hours: &[Hour],
) -> Vec<PermeabilityPoint> {
    days.iter()
        .filter(|d| d.filtration_s > 0.0)
        .map(|d| {
            let a = hours.partition_point(|h| h.start < d.start);
            let b = hours.partition_point(|h| h.start < d.end);
            let within = &hours[a..b.max(a)];
            let step = Counted {
                time: d.start,
                start_resistance_1_m: d.resistance_1_m.filter(|_| !d.coarse),
                samples: within.iter().map(|h| h.samples).sum(),
                coverage: d.coverage,
                quality: d.quality,
                reasons: &d.reasons,
            };
            point(zone, site, units, steady_of_day(d, within).as_ref(), &step)
        })
        .collect()
}

fn steady_of_day(day: &Day, hours: &[Hour]) -> Option<Steady> {
    let told = || hours.iter().filter_map(|h| h.steady.as_ref());
    let tmp: Vec<f64> = told().map(|s| s.tmp_pa).collect();
    Some(Steady {
        resistance_1_m: day.steady_resistance_1_m?,
        resistance_min_1_m: told().map(|s| s.resistance_min_1_m).reduce(f64::min)?,
        resistance_max_1_m: told().map(|s| s.resistance_max_1_m).reduce(f64::max)?,
        flux_m_s: day.flux_m_s?,
        tmp_pa: crate::science::median(&tmp)?,
        temperature_degc: day.temperature_degc?,
    })
}

/// Points by the minute of a span, from the samples of it. A minute without filtration is left
/// out.
pub fn minute_points(
    zone: &Zone,
    site: &Site,
    units: &Units,
    samples: &Samples,
    normalised: &Normalised,
    span: Span,
) -> Vec<PermeabilityPoint> {
    let expected = (MINUTE_US / samples.every_us.max(1)).max(1) as u32;
    let minute = |i: usize| samples.times[i].micros().div_euclid(MINUTE_US);
    let end = samples.times.partition_point(|t| *t < span.to);
    let mut out = Vec::new();
    let mut a = samples.times.partition_point(|t| *t < span.from);
    while a < end {
        let b = (a..end).find(|i| minute(*i) != minute(a)).unwrap_or(end);
        if (a..b).any(|i| samples.phases[i] == Phase::Filtration) {
            let (steady, counted) = summarise(samples, normalised, a, b);
            let mut reasons: Vec<Reason> =
                normalised.reason[a..b].iter().copied().flatten().collect();
            reasons.sort_unstable();
            reasons.dedup();
            let quality = match (counted, reasons.is_empty()) {
                (0, _) => Quality::Bad,
                (_, true) => Quality::Good,
                _ => Quality::Uncertain,
            };
            let step = Counted {
                time: Instant::from_micros(minute(a) * MINUTE_US),
                start_resistance_1_m: None,
                samples: counted,
                coverage: share(counted, expected),
                quality,
                reasons: &reasons,
            };
            out.push(point(zone, site, units, steady.as_ref(), &step));
        }
        a = b;
    }
    out
}

/// What a step has beside its medians.
struct Counted<'a> {
    time: Instant,
    start_resistance_1_m: Option<f64>,
    samples: u32,
    coverage: f64,
    quality: Quality,
    reasons: &'a [Reason],
}

fn share(counted: u32, expected: u32) -> f64 {
    f64::from(counted) / f64::from(expected.max(1))
}

fn point(
    zone: &Zone,
    site: &Site,
    units: &Units,
    steady: Option<&Steady>,
    step: &Counted,
) -> PermeabilityPoint {
    let permeability = |resistance_1_m: Option<f64>| {
        units.permeability.optional(resistance_1_m.map(|r| site.permeability(r)))
    };
    let of = |f: fn(&Steady) -> f64| steady.map(f);
    PermeabilityPoint {
        time: PlantTime::new(zone, step.time),
        permeability: permeability(of(|s| s.resistance_1_m)),
        permeability_min: permeability(of(|s| s.resistance_max_1_m)),
        permeability_max: permeability(of(|s| s.resistance_min_1_m)),
        permeability_start_of_cycle: permeability(step.start_resistance_1_m),
        flux: units.flux.optional(of(|s| s.flux_m_s)),
        tmp: units.tmp.optional(of(|s| s.tmp_pa)),
        temperature: units.temperature.optional(of(|s| s.temperature_degc)),
        resistance: units.resistance.optional(of(|s| s.resistance_1_m)),
        samples: step.samples,
        coverage: (step.coverage.clamp(0.0, 1.0) * 100.0).round() / 100.0,
        quality: step.quality.code().to_owned(),
        reasons: step.reasons.iter().map(|r| r.code().to_owned()).collect(),
    }
}

#[cfg(test)]
mod tests;
