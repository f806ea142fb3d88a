//! Filtration cycles.

use serde::Serialize;
use utoipa::ToSchema;

use super::reason::{phase_code, reason_words};
use super::time::PlantTime;
use super::units::{UnitCodes, Units, unit_maps};
use crate::analysis::{Cycle, Site};
use crate::base::{Instant, Zone};

/// One page of a train's cycles.
#[derive(Clone, Debug, PartialEq, Serialize, ToSchema)]
pub struct CyclesView {
    /// Whose.
    pub train: String,
    /// End of the newest data; null where there are none.
    pub as_of: Option<PlantTime>,
    /// UCUM codes.
    pub units: UnitCodes,
    /// Their labels.
    pub unit_labels: UnitCodes,
    /// The cycles, in order of time.
    pub items: Vec<CycleView>,
    /// Address of the next page; null on the last.
    pub next: Option<String>,
}

/// A filtration cycle that has ended.
#[derive(Clone, Debug, PartialEq, Serialize, ToSchema)]
pub struct CycleView {
    /// First reading of filtration.
    pub start: PlantTime,
    /// First reading of what followed.
    pub end: PlantTime,
    /// Filtered volume per area.
    pub volume_per_area: Option<f64>,
    /// Median flux.
    pub flux: Option<f64>,
    /// Median temperature.
    pub temperature: Option<f64>,
    /// Permeability at the start.
    pub permeability_start: Option<f64>,
    /// Permeability at the end.
    pub permeability_end: Option<f64>,
    /// Resistance at the start.
    pub resistance_start: Option<f64>,
    /// 95 % interval of that.
    pub resistance_start_interval: Option<[f64; 2]>,
    /// Resistance at the end.
    pub resistance_end: Option<f64>,
    /// TMP at the end, as read.
    pub tmp_end: Option<f64>,
    /// Resistance laid down within the cycle.
    pub laid_down: Option<f64>,
    /// Resistance that the backwash after it took off; null where the next cycle cannot tell.
    pub taken_off: Option<f64>,
    /// What came before.
    pub preceded_by: Option<String>,
    /// What followed.
    pub followed_by: Option<String>,
    /// Code of why it does not count; null if it does.
    pub left_out: Option<String>,
    /// The same in words.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub left_out_detail: Option<String>,
}

/// Cycles as they are shown. `cycles` follow one another without one missing; `after` is the
/// cycle that follows the last of them, which says what the backwash between took off.
pub fn cycles_view(
    zone: &Zone,
    site: &Site,
    units: &Units,
    cycles: &[Cycle],
    after: Option<&Cycle>,
    as_of: Option<Instant>,
    next: Option<String>,
) -> CyclesView {
    let (codes, labels) = unit_maps(&[
        ("volume_per_area", &units.volume_per_area),
        ("flux", &units.flux),
        ("temperature", &units.temperature),
        ("permeability_start", &units.permeability),
        ("permeability_end", &units.permeability),
        ("resistance_start", &units.resistance),
        ("resistance_end", &units.resistance),
        ("tmp_end", &units.tmp),
        ("laid_down", &units.resistance),
        ("taken_off", &units.resistance),
    ]);
    let following = cycles.iter().skip(1).map(Some).chain([after]);
    CyclesView {
        train: site.train.id.to_string(),
        as_of: PlantTime::optional(zone, as_of),
        units: codes,
        unit_labels: labels,
        items: cycles.iter().zip(following).map(|(c, f)| cycle(zone, site, units, c, f)).collect(),
        next,
    }
}

fn cycle(
    zone: &Zone,
    site: &Site,
    units: &Units,
    c: &Cycle,
    following: Option<&Cycle>,
) -> CycleView {
    let permeability =
        |r: Option<f64>| units.permeability.optional(r.map(|r| site.permeability(r)));
    let resistance = |r: Option<f64>| units.resistance.optional(r);
    let start_interval = || {
        let (r, half) = (c.start_resistance_1_m?, c.start_half_width_1_m?);
        units.resistance.interval(r - half, r + half)
    };
    CycleView {
        start: PlantTime::new(zone, c.start),
        end: PlantTime::new(zone, c.end),
        volume_per_area: units.volume_per_area.value(c.volume_m),
        flux: units.flux.value(c.flux_m_s),
        temperature: units.temperature.value(c.temperature_degc),
        permeability_start: permeability(c.start_resistance_1_m),
        permeability_end: permeability(c.end_resistance_1_m),
        resistance_start: resistance(c.start_resistance_1_m),
        resistance_start_interval: start_interval(),
        resistance_end: resistance(c.end_resistance_1_m),
        tmp_end: units.tmp.optional(c.end_tmp_pa),
        laid_down: resistance(c.laid_down_1_m()),
        taken_off: resistance(following.and_then(|f| f.taken_off_before_1_m)),
        preceded_by: c.preceded_by.map(|p| phase_code(p).to_owned()),
        followed_by: c.followed_by.map(|p| phase_code(p).to_owned()),
        left_out: c.left_out.map(|r| r.code().to_owned()),
        left_out_detail: c.left_out.map(|r| reason_words(r).to_owned()),
    }
}

#[cfg(test)]
mod tests {
    use serde_json::json;

    use super::super::fixture::{self, at};
    use super::super::units::UnitSystem;
    use super::*;
    use crate::analysis::Reason;
    use crate::plant::Phase;

    fn one(start: &str, end: &str, taken_off_before_1_m: Option<f64>) -> Cycle {
        Cycle {
            train: fixture::train().id,
            start: at(start),
            end: at(end),
            decided: at(end),
            volume_m: 0.0309,
            flux_m_s: 61.8e-3 / 3600.0,
            temperature_degc: 11.3,
            start_resistance_1_m: Some(1.56e12),
            start_half_width_1_m: Some(1e10),
            end_resistance_1_m: Some(1.81e12),
            end_tmp_pa: Some(36_100.0),
            taken_off_before_1_m,
            preceded_by: Some(Phase::Backwash),
            followed_by: Some(Phase::Backwash),
            left_out: None,
        }
    }

    #[test]
    fn what_a_backwash_took_off_stands_with_the_cycle_before_it() {
        let plant = fixture::plant();
        let site = Site::new(&plant, &plant.trains[0]);
        let mut short = one("2026-03-02T05:32", "2026-03-02T05:38", Some(2.4e11));
        short.start_resistance_1_m = None;
        short.left_out = Some(Reason::ShortCycle);
        short.flux_m_s = f64::NAN;
        let cycles = [one("2026-03-02T05:00", "2026-03-02T05:30", Some(9e11)), short];
        let after = one("2026-03-02T05:40", "2026-03-02T06:10", Some(1.1e11));
        let view = cycles_view(
            &plant.zone,
            &site,
            &Units::new(UnitSystem::Si),
            &cycles,
            Some(&after),
            Some(at("2026-03-02T06:00")),
            None,
        );
        let v = serde_json::to_value(&view).unwrap();
        assert_eq!(
            v["items"],
            json!([
                {"start": "2026-03-02T05:00:00+00:00", "end": "2026-03-02T05:30:00+00:00",
                 "volume_per_area": 30.9, "flux": 61.8, "temperature": 11.3,
                 "permeability_start": 230.4, "permeability_end": 198.6,
                 "resistance_start": 1.56e12, "resistance_start_interval": [1.55e12, 1.57e12],
                 "resistance_end": 1.81e12, "tmp_end": 0.361, "laid_down": 2.5e11,
                 "taken_off": 2.4e11, "preceded_by": "backwash", "followed_by": "backwash",
                 "left_out": null},
                {"start": "2026-03-02T05:32:00+00:00", "end": "2026-03-02T05:38:00+00:00",
                 "volume_per_area": 30.9, "flux": null, "temperature": 11.3,
                 "permeability_start": null, "permeability_end": 198.6, "resistance_start": null,
                 "resistance_start_interval": null, "resistance_end": 1.81e12, "tmp_end": 0.361,
                 "laid_down": null, "taken_off": 1.1e11, "preceded_by": "backwash",
                 "followed_by": "backwash", "left_out": "short_cycle",
                 "left_out_detail": "The cycle was shorter than eight minutes."}
            ])
        );
        assert_eq!(v["units"]["volume_per_area"], json!("L/m2"));
        assert_eq!(v["unit_labels"]["laid_down"], json!("1/m"));
        assert_eq!((&v["train"], &v["next"]), (&json!("uf-1"), &json!(null)));
        let last =
            cycles_view(&plant.zone, &site, &Units::new(UnitSystem::Us), &cycles, None, None, None);
        assert_eq!(last.items[1].taken_off, None);
        // 30.9 L/m2 at 3.785411784 L a gallon and 0.09290304 m2 a square foot.
        assert_eq!(last.items[0].volume_per_area, Some(0.758));
    }
}
