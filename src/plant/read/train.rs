//! `[[train]]`.

use std::ops::Range;

use super::limits::{integrity, limits, membrane_limits};
use super::procedure::{PlacedProcedure, procedure};
use super::source::belongs;
use super::tags::{Context, Tags, tags};
use super::values::ALWAYS;
use super::walk::{Section, Value};
use crate::base::{Dimension, HOUR_US, TrainId, Zone};
use crate::plant::not_yet::refuse;
use crate::plant::{Dated, Drive, Filtration, IntegrityValues, Limits, Loop, Train};

/// TMP under which it is not believed, Pa.
pub(super) const TMP_FLOOR_PA: f64 = 3_000.0;
/// Accuracy of a TMP, Pa.
pub(super) const TMP_ACCURACY_PA: f64 = 1_000.0;

/// A train with the places that later checks point at.
pub(super) struct PlacedTrain {
    pub train: Train,
    /// Its header.
    pub span: Range<usize>,
    /// Its id.
    pub id_span: Range<usize>,
    pub tags: Tags,
    pub procedures: Vec<PlacedProcedure>,
}

/// What holds for all trains.
pub(super) struct Common<'c> {
    pub tags: Context<'c>,
    pub limits: Limits,
    pub procedures: Vec<PlacedProcedure>,
    pub integrity: Option<IntegrityValues>,
}

/// Reads one `[[train]]`.
pub(super) fn train(section: Section<'_>, common: &Common<'_>) -> PlacedTrain {
    let id_value = section.get("id");
    let id = section.required("id", "\"uf-1\"", Value::id).unwrap_or_default();
    let zone = common.tags.zone;
    let area = section.required("membrane_area", "\"3200 m2\"", |v| areas(v, zone));
    let filtration = filtration(&section);
    let drive = drive(&section);
    let permeability = |v: &Value<'_>| v.positive(Dimension::Permeability);
    let pressure = |v: &Value<'_>| v.within(Dimension::Pressure, 0.0..=1e5, "from 0 to 1 bar");
    let mut procedures: Vec<_> = section.sections("procedure").into_iter().map(procedure).collect();
    procedures.extend(common.procedures.iter().cloned());
    let membrane = membrane_limits(section.section("membrane_limits"));
    let tags = section
        .required("tags", "{ … }", Value::section)
        .map_or_else(Tags::default, |below| tags(below, &common.tags));
    let train = Train {
        id: TrainId::new(id),
        name: section.optional("name", Value::text).unwrap_or(id).to_owned(),
        asset: section.optional("asset", Value::text_or_number),
        area_m2: area.unwrap_or_default(),
        filtration,
        drive,
        as_new_permeability: section.optional("as_new_permeability", permeability),
        after_clean_permeability: section
            .optional("after_clean_permeability", |v| after_clean(v, zone)),
        drinking_water: section.optional("drinking_water", Value::boolean).unwrap_or(true),
        clean_duration_us: section
            .optional("clean_duration", Value::duration_us)
            .unwrap_or(8 * HOUR_US),
        clean_notice_us: section
            .optional("clean_notice", Value::duration_or_zero_us)
            .unwrap_or(24 * HOUR_US),
        tmp_floor_pa: section.optional("tmp_floor", pressure).unwrap_or(TMP_FLOOR_PA),
        tmp_accuracy_pa: section.optional("tmp_accuracy", pressure).unwrap_or(TMP_ACCURACY_PA),
        signals: Vec::new(),
        limits: limits(section.section("limits"), &common.limits),
        membrane_limits: membrane,
        procedures: procedures.iter().map(|p| p.procedure.clone()).collect(),
        integrity: integrity(section.section("integrity")).or(common.integrity),
    };
    let span = section.span.clone();
    section.finish();
    let id_span = id_value.map_or(span.clone(), |v| v.span);
    PlacedTrain { train, span, id_span, tags, procedures }
}

fn filtration(section: &Section<'_>) -> Filtration {
    let value = section.get("filtration");
    let cross = section.required("filtration", "\"dead-end\"", |v| {
        v.choice(&[("dead-end", false), ("cross-flow", true)])
    });
    if cross != Some(true) {
        belongs(section, "loop", "filtration = \"cross-flow\"");
        return Filtration::DeadEnd;
    }
    if let Some(value) = &value {
        refuse("filtration", "cross-flow", value);
    }
    let loops = [
        ("once-through", Loop::OnceThrough),
        ("feed-and-bleed", Loop::FeedAndBleed),
        ("batch", Loop::Batch),
    ];
    let kind = section.required("loop", "\"feed-and-bleed\"", |v| v.choice(&loops));
    Filtration::CrossFlow(kind.unwrap_or(Loop::FeedAndBleed))
}

fn drive(section: &Section<'_>) -> Drive {
    let Some(value) = section.get("drive") else { return Drive::Pressurised };
    let drive =
        value.choice(&[("pressurised", Drive::Pressurised), ("submerged", Drive::Submerged)]);
    if drive == Some(Drive::Submerged) {
        refuse("drive", "submerged", &value);
    }
    drive.unwrap_or(Drive::Pressurised)
}

fn areas(value: &Value<'_>, zone: &Zone) -> Option<Vec<Dated<f64>>> {
    if value.is_text() {
        let value = value.positive(Dimension::Area)?;
        return Some(vec![Dated { from: ALWAYS, value }]);
    }
    if !value.is_list() {
        return Some(vec![area_from(value, zone)?]);
    }
    let items = value.items();
    if items.is_empty() {
        value.mistake("the membrane area is an empty list", "write it like `3200 m2`");
    }
    let areas: Vec<_> = items.iter().filter_map(|i| area_from(i, zone)).collect();
    if areas.len() == items.len() {
        value.ascending(&items, &areas);
    }
    Some(areas)
}

fn area_from(value: &Value<'_>, zone: &Zone) -> Option<Dated<f64>> {
    let section = value.section()?;
    let from = section.required("from", "\"2026-01-01\"", |v| v.moment(zone));
    let area = section.required("area", "\"3200 m2\"", |v| v.positive(Dimension::Area));
    section.finish();
    Some(Dated { from: from?, value: area? })
}

fn after_clean(value: &Value<'_>, zone: &Zone) -> Option<Dated<f64>> {
    if value.is_text() {
        let value = value.positive(Dimension::Permeability)?;
        return Some(Dated { from: ALWAYS, value });
    }
    let section = value.section()?;
    let from = section.optional("from", |v| v.moment(zone));
    let dated = section.get("from").is_some();
    let known =
        section.required("value", "\"270 L/(m2.h.bar)\"", |v| v.positive(Dimension::Permeability));
    section.finish();
    let from = if dated { from? } else { ALWAYS };
    Some(Dated { from, value: known? })
}
