//! How fouled a train is, in what way, how fast, and until when.

use serde::Serialize;
use utoipa::ToSchema;

use super::fouling_parts::{ResistancesView, parts};
use super::reason::no_dates_words;
use super::time::PlantTime;
use super::units::{UnitCodes, Units, unit_maps};
use crate::analysis::{
    Assessment, Baseline, BaselineKind, Cycle, Dates, GrowthFrom, LimitKind, Run, Site, Standing,
    Trend, as_new, baseline, best,
};
use crate::base::{Instant, Zone};
use crate::plant::Plant;

/// A trend counts from here on.
const SIGNIFICANT_P: f64 = 0.05;

/// How fouled a train is.
#[derive(Clone, Debug, PartialEq, Serialize, ToSchema)]
pub struct FoulingView {
    /// Whose.
    pub train: String,
    /// End of the data that it stands on.
    pub as_of: PlantTime,
    /// Return to service of the last clean; null before the first.
    pub run_start: Option<PlantTime>,
    /// UCUM codes.
    pub units: UnitCodes,
    /// Their labels.
    pub unit_labels: UnitCodes,
    /// What the permeability can be held against.
    pub baselines: BaselinesView,
    /// Where the resistance sits.
    pub resistances: ResistancesView,
    /// How fast it grows; null with fewer than five days.
    pub trend: Option<TrendView>,
    /// When limits are reached.
    pub forecast: ForecastView,
    /// Causes that could be told apart.
    pub causes: Vec<String>,
}

/// Permeabilities to hold others against; null where there is none.
#[derive(Clone, Debug, PartialEq, Serialize, ToSchema)]
pub struct BaselinesView {
    /// The new membrane, as the plant file states it.
    pub as_new: Option<BaselineView>,
    /// After the last clean that was judged restored, or as the plant file states it.
    pub after_clean: Option<BaselineView>,
    /// Best after a clean in twelve months.
    pub best_after_clean: Option<BaselineView>,
    /// Which of them losses are held against.
    pub used: Option<String>,
}

/// A permeability to hold others against.
#[derive(Clone, Debug, PartialEq, Serialize, ToSchema)]
pub struct BaselineView {
    /// At the reference temperature.
    pub permeability: Option<f64>,
    /// The same as a resistance.
    pub resistance: Option<f64>,
    /// `observed`, or `stated` in the plant file.
    pub origin: String,
    /// When it was observed; null where the plant file gives no date.
    pub at: Option<PlantTime>,
}

/// How fast resistance grows over the last days of the run.
#[derive(Clone, Debug, PartialEq, Serialize, ToSchema)]
pub struct TrendView {
    /// First day used.
    pub from: PlantTime,
    /// End of the last day used.
    pub to: PlantTime,
    /// Days used.
    pub days: u32,
    /// Growth of start-of-cycle resistance a day, at the volume of the last week.
    pub slope: Option<f64>,
    /// 95 % interval of it.
    pub slope_interval: Option<[f64; 2]>,
    /// The same as permeability lost a day.
    pub loss_per_day: Option<f64>,
    /// 95 % interval of it.
    pub loss_per_day_interval: Option<[f64; 2]>,
    /// Chance of days as uneven as these without any trend (Mann-Kendall, Hamed-Rao).
    pub p: Option<f64>,
    /// `significant` where that is under 0.05, else `not_significant`.
    pub significance: String,
}

/// When limits are reached.
#[derive(Clone, Debug, PartialEq, Serialize, ToSchema)]
pub struct ForecastView {
    /// The advisory limit that comes first.
    pub advisory: ForecastDates,
    /// The clean limit that comes first.
    pub clean: ForecastDates,
    /// `own_trend`, or `earlier_runs` while the run is younger than five days.
    pub growth_from: Option<String>,
    /// Why there are no dates.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub detail: Option<String>,
}

/// Dates of a limit; null where it is not reached within 180 days at that likelihood.
#[derive(Clone, Debug, Default, PartialEq, Serialize, ToSchema)]
pub struct ForecastDates {
    /// Which limit it is.
    pub limit: Option<String>,
    /// One chance in ten that it is reached before.
    pub p10: Option<PlantTime>,
    /// As likely before as after.
    pub p50: Option<PlantTime>,
    /// Nine chances in ten that it is reached before.
    pub p90: Option<PlantTime>,
}

/// What the answer is worked from.
pub struct FoulingCase<'a> {
    /// The plant.
    pub plant: &'a Plant,
    /// The train.
    pub site: &'a Site<'a>,
    /// What stands.
    pub standing: &'a Standing,
    /// The assessment it stands on.
    pub assessment: Option<&'a Assessment>,
    /// The train's runs, in order of time.
    pub runs: &'a [Run],
    /// Cycles of the last day, in order of time.
    pub cycles: &'a [Cycle],
}

/// How fouled a train is, as it is shown.
pub fn fouling_view(units: &Units, case: &FoulingCase) -> FoulingView {
    let (zone, site, standing) = (&case.plant.zone, case.site, case.standing);
    let (codes, labels) = unit_maps(&[
        ("permeability", &units.permeability),
        ("resistance", &units.resistance),
        ("resistances", &units.resistance),
        ("slope", &units.resistance_per_day),
        ("loss_per_day", &units.share_per_day),
    ]);
    FoulingView {
        train: site.train.id.to_string(),
        as_of: PlantTime::new(zone, standing.as_of),
        run_start: PlantTime::optional(zone, standing.run_start),
        units: codes,
        unit_labels: labels,
        baselines: baselines(units, case),
        resistances: parts(
            zone,
            site,
            units,
            case.runs,
            standing.run_start,
            case.cycles,
            standing.as_of,
        ),
        // A clean since the last midnight has ended the run that the trend is of.
        trend: case
            .assessment
            .filter(|a| a.run_start == standing.run_start)
            .and_then(|a| a.trend)
            .map(|t| trend(zone, units, &t)),
        forecast: forecast(zone, case),
        causes: Vec::new(),
    }
}

fn baselines(units: &Units, case: &FoulingCase) -> BaselinesView {
    let (zone, site, as_of) = (&case.plant.zone, case.site, case.standing.as_of);
    let view = |b: Baseline| {
        let stated = matches!(b.kind, BaselineKind::AsNew | BaselineKind::AfterCleanStated);
        BaselineView {
            permeability: units.permeability.value(site.permeability(b.resistance_1_m)),
            resistance: units.resistance.value(b.resistance_1_m),
            origin: if stated { "stated" } else { "observed" }.to_owned(),
            at: PlantTime::optional(zone, b.at),
        }
    };
    let of_clean = |b: &Baseline| b.kind != BaselineKind::AsNew;
    BaselinesView {
        as_new: as_new(site).map(view),
        after_clean: baseline(site, case.runs, as_of).filter(of_clean).map(view),
        best_after_clean: best(site, case.runs, as_of).filter(of_clean).map(view),
        used: case.standing.baseline.map(|b| b.kind.code().to_owned()),
    }
}

fn trend(zone: &Zone, units: &Units, t: &Trend) -> TrendView {
    let slope = t.slope_per_day();
    // 1.96: 95 % of a normal.
    let half = 1.96 * t.slope_sd_1_m_per_m * t.volume_per_day_m;
    // Permeability goes with one over resistance: its share lost is that of resistance gained.
    let share = |s: f64| s / t.level_1_m;
    let significant = t.p < SIGNIFICANT_P;
    TrendView {
        from: PlantTime::new(zone, t.from),
        to: PlantTime::new(zone, t.to),
        days: t.days,
        slope: units.resistance_per_day.value(slope),
        slope_interval: units.resistance_per_day.interval(slope - half, slope + half),
        loss_per_day: units.share_per_day.value(share(slope)),
        loss_per_day_interval: units
            .share_per_day
            .interval(share(slope - half), share(slope + half)),
        p: units.chance.value(t.p),
        significance: if significant { "significant" } else { "not_significant" }.to_owned(),
    }
}

fn forecast(zone: &Zone, case: &FoulingCase) -> ForecastView {
    let standing = case.standing;
    let view = |first: Option<(LimitKind, Dates)>| match first {
        Some((kind, d)) => ForecastDates {
            limit: Some(kind.code().to_owned()),
            p10: PlantTime::optional(zone, d.p10),
            p50: PlantTime::optional(zone, d.p50),
            p90: PlantTime::optional(zone, d.p90),
        },
        None => ForecastDates::default(),
    };
    let from = case.assessment.and_then(|a| a.growth_from).filter(|_| standing.no_dates.is_none());
    ForecastView {
        advisory: view(first_advisory(standing)),
        clean: view(standing.binding()),
        growth_from: from.map(|f| {
            match f {
                GrowthFrom::OwnTrend => "own_trend",
                GrowthFrom::EarlierRuns => "earlier_runs",
            }
            .to_owned()
        }),
        detail: standing
            .no_dates
            .map(|why| format!("There are no dates, because {}.", no_dates_words(why))),
    }
}

/// The advisory limit that comes first, as [`Standing::binding`] finds the clean one.
fn first_advisory(standing: &Standing) -> Option<(LimitKind, Dates)> {
    let far = Instant::from_micros(i64::MAX);
    LimitKind::ALL
        .into_iter()
        .filter(|k| !k.is_clean())
        .filter_map(|k| standing.dates_of(k).map(|d| (k, d)))
        .min_by_key(|(_, d)| (d.p50.unwrap_or(far), d.p10.unwrap_or(far)))
        .filter(|(_, d)| d.p10.is_some())
}

#[cfg(test)]
mod tests;
