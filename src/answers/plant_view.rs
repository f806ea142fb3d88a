//! The plant, as it is configured.

use serde::Serialize;
use utoipa::ToSchema;

use super::time::duration_text;
use super::units::{UnitCodes, Units, ValueView, unit_maps};
use crate::analysis::DERIVATION_VERSION;
use crate::base::{Instant, zone_data_version};
use crate::plant::{Drive, Filtration, Layout, Loop, Plant};

/// The plant.
#[derive(Clone, Debug, PartialEq, Serialize, ToSchema)]
pub struct PlantView {
    /// Short name.
    pub id: String,
    /// Name for people.
    pub name: String,
    /// IANA name of the plant's own time zone.
    pub time_zone: String,
    /// Version of the zone data in use.
    pub zone_data: String,
    /// Temperature at which permeability is compared.
    pub reference_temperature: Option<f64>,
    /// How viscosity follows temperature.
    pub temperature_law: String,
    /// UCUM codes of the quantities above.
    pub units: UnitCodes,
    /// Their labels.
    pub unit_labels: UnitCodes,
    /// Local times at which shifts begin.
    pub shifts: Vec<String>,
    /// Export layouts.
    pub sources: Vec<SourceView>,
    /// Trains, in the plant file's order.
    pub trains: Vec<ShortTrain>,
    /// Revision of the plant file: two files that mean the same have one.
    pub revision: String,
    /// Version of the rules by which derived rows are worked.
    pub derivation_version: i64,
}

/// An export layout, in short.
#[derive(Clone, Debug, PartialEq, Serialize, ToSchema)]
pub struct SourceView {
    /// Name used when posting.
    pub id: String,
    /// `wide` or `long`.
    pub layout: String,
    /// Zone of its local times.
    pub time_zone: String,
    /// Spacing of its rows, ISO 8601.
    pub every: String,
    /// Spacing of its exports, ISO 8601.
    pub expected_every: String,
}

/// A train, in short.
#[derive(Clone, Debug, PartialEq, Serialize, ToSchema)]
pub struct ShortTrain {
    /// Short name.
    pub id: String,
    /// Name for people.
    pub name: String,
    /// The maintenance system's number.
    pub asset: Option<String>,
    /// `dead-end` or `cross-flow`.
    pub filtration: String,
    /// How a cross-flow train's loop is run.
    #[serde(rename = "loop", skip_serializing_if = "Option::is_none")]
    pub loop_run: Option<String>,
    /// `pressurised` or `submerged`.
    pub drive: String,
    /// Membrane area now.
    pub membrane_area: ValueView,
    /// Whether its filtrate is drunk.
    pub drinking_water: bool,
}

/// The plant at a moment of the wall clock, which decides what area a train has.
pub fn plant_view(plant: &Plant, units: &Units, wall: Instant) -> PlantView {
    let (codes, labels) = unit_maps(&[("reference_temperature", &units.temperature)]);
    PlantView {
        id: plant.id.clone(),
        name: plant.name.clone(),
        time_zone: plant.zone.name().to_owned(),
        zone_data: zone_data_version().to_owned(),
        reference_temperature: units.temperature.value(plant.reference_temperature_degc),
        temperature_law: plant.temperature_law.name(),
        units: codes,
        unit_labels: labels,
        shifts: plant.shifts.iter().map(|(h, m)| format!("{h:02}:{m:02}")).collect(),
        sources: plant
            .sources
            .iter()
            .map(|s| SourceView {
                id: s.id.to_string(),
                layout: match s.layout {
                    Layout::Wide => "wide",
                    Layout::Long { .. } => "long",
                }
                .to_owned(),
                time_zone: s.time.zone.name().to_owned(),
                every: duration_text(s.every_us),
                expected_every: duration_text(s.expected_every_us),
            })
            .collect(),
        trains: plant
            .trains
            .iter()
            .map(|t| {
                let (filtration, loop_run) = filtration_codes(t.filtration);
                ShortTrain {
                    id: t.id.to_string(),
                    name: t.name.clone(),
                    asset: t.asset.clone(),
                    filtration: filtration.to_owned(),
                    loop_run: loop_run.map(str::to_owned),
                    drive: match t.drive {
                        Drive::Pressurised => "pressurised",
                        Drive::Submerged => "submerged",
                    }
                    .to_owned(),
                    membrane_area: units.area.view(t.area_at(wall)),
                    drinking_water: t.drinking_water,
                }
            })
            .collect(),
        revision: plant.revision.clone(),
        derivation_version: DERIVATION_VERSION,
    }
}

fn filtration_codes(filtration: Filtration) -> (&'static str, Option<&'static str>) {
    match filtration {
        Filtration::DeadEnd => ("dead-end", None),
        Filtration::CrossFlow(Loop::OnceThrough) => ("cross-flow", Some("once-through")),
        Filtration::CrossFlow(Loop::FeedAndBleed) => ("cross-flow", Some("feed-and-bleed")),
        Filtration::CrossFlow(Loop::Batch) => ("cross-flow", Some("batch")),
    }
}

#[cfg(test)]
mod tests {
    use serde_json::json;

    use super::super::fixture;
    use super::super::units::UnitSystem;
    use super::*;

    #[test]
    fn the_plant_is_shown_whole() {
        let plant = fixture::plant();
        let view = plant_view(&plant, &Units::new(UnitSystem::Us), fixture::at("2026-03-09T06:00"));
        assert_eq!(
            serde_json::to_value(view).unwrap(),
            json!({
                "id": "harrow-fen", "name": "Harrow Fen Water Works", "time_zone": "Europe/London",
                "zone_data": zone_data_version(), "reference_temperature": 68.0,
                "temperature_law": "iapws", "units": {"reference_temperature": "[degF]"},
                "unit_labels": {"reference_temperature": "°F"},
                "shifts": ["06:00", "14:00", "22:00"],
                "sources": [{"id": "scada", "layout": "wide", "time_zone": "Europe/London",
                             "every": "PT1M", "expected_every": "PT1H"}],
                "trains": [{"id": "uf-1", "name": "UF train 1", "asset": "MT-0101",
                            "filtration": "dead-end", "drive": "pressurised",
                            "membrane_area": {"value": 34444.5, "unit": "[sft_i]", "unit_label": "ft²"},
                            "drinking_water": true}],
                "revision": "r1", "derivation_version": DERIVATION_VERSION
            })
        );
    }
}
