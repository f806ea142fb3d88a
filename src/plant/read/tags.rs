//! `[train.tags]`: which signal of the historian is what.

use std::ops::Range;

use super::source::belongs;
use super::values::ALWAYS;
use super::walk::{Section, Value};
use crate::base::{Dimension, SourceId, Tag, TrainId, Unit, Zone, unit_by_name, unit_help};
use crate::plant::not_yet::refuse;
use crate::plant::words::{PHASES, PRESSURES};
use crate::plant::{Dated, Phase, PressureKind, Role, Signal};

/// A signal with its place in the file.
#[derive(Clone)]
pub(super) struct Placed {
    pub signal: Signal,
    /// The tag itself.
    pub span: Range<usize>,
    /// What it serves.
    pub serves_span: Option<Range<usize>>,
}

/// What a tag may refer to.
pub(super) struct Context<'c> {
    pub zone: &'c Zone,
    pub sources: &'c [SourceId],
}

/// What `[train.tags]` holds.
#[derive(Default)]
pub(super) struct Tags {
    /// The header; `None` if it is missing.
    pub span: Option<Range<usize>>,
    /// Roles that are named, rightly or not.
    pub named: Vec<Role>,
    pub placed: Vec<Placed>,
}

/// Reads `[train.tags]`.
pub(super) fn tags(section: Section<'_>, context: &Context<'_>) -> Tags {
    let mut placed = Vec::new();
    let mut named = Vec::new();
    for role in Role::all() {
        let Some(value) = section.get(role.word()) else { continue };
        named.push(role);
        if !value.is_list() {
            placed.extend(tag(&value, role, context));
            continue;
        }
        let items = value.items();
        if items.is_empty() {
            value.mistake(format!("{} is empty", value.name()), "leave it out, or name a tag");
        }
        let read: Vec<Option<Placed>> = items.iter().map(|i| tag(i, role, context)).collect();
        let dates: Vec<Dated<()>> =
            read.iter().flatten().map(|p| Dated { from: p.signal.from, value: () }).collect();
        value.ascending(&items, &dates);
        placed.extend(read.into_iter().flatten());
    }
    let misspelt = section.misspelt();
    named.extend(Role::all().filter(|r| misspelt.contains(&r.word())));
    let span = Some(section.span.clone());
    section.finish();
    Tags { span, named, placed }
}

fn tag(value: &Value<'_>, role: Role, context: &Context<'_>) -> Option<Placed> {
    let first = context.sources.first().cloned().unwrap_or_else(|| SourceId::new(""));
    let plain = |name: &str| Signal {
        role,
        source: first.clone(),
        tag: Tag::new(name),
        from: ALWAYS,
        unit: None,
        pressure: PressureKind::Gauge,
        elevation_m: 0.0,
        serves: Vec::new(),
        max_hold_us: None,
        states: Vec::new(),
    };
    if value.is_text() {
        let mut signal = plain(value.text()?);
        if role == Role::State {
            let help = "write { tag = \"XS-101\", filtration = [\"1\"], backwash = [\"2\"] }";
            value.mistake("a state tag needs the codes of its states", help);
            return None;
        }
        signal.unit = assumed_unit(value, role);
        return Some(Placed { signal, span: value.span.clone(), serves_span: None });
    }
    let section = value.section()?;
    let name = section.required("tag", "\"PT-101\"", Value::text);
    let mut signal = plain(name.unwrap_or_default());
    if let Some(source) = section.optional("source", |v| known_source(v, context)) {
        signal.source = source;
    }
    signal.from = section.optional("from", |v| v.moment(context.zone)).unwrap_or(ALWAYS);
    if let Some(hold) = section.get("max_hold") {
        signal.max_hold_us = hold.duration_us();
        if role != Role::State {
            refuse("max_hold", "", &hold);
        }
    }
    let mut serves_span = None;
    if role == Role::State {
        signal.states = states(&section);
    } else {
        signal.unit = match section.get("unit") {
            Some(unit) => role.dimension().and_then(|d| known_unit(&unit, d)),
            None => assumed_unit(value, role),
        };
        serves_span = placement(&section, role, &mut signal);
    }
    section.finish();
    name.map(|_| Placed { signal, span: value.span.clone(), serves_span })
}

/// Reads what says where and how a tag measures; answers where `serves` stands.
fn placement(section: &Section<'_>, role: Role, signal: &mut Signal) -> Option<Range<usize>> {
    let against = role.is_referred_pressure();
    if against {
        let kind = section.optional("pressure", |v| v.choice(&PRESSURES));
        signal.pressure = kind.unwrap_or(PressureKind::Gauge);
    }
    let height = |v: &Value<'_>| {
        v.within(Dimension::Length, -100.0..=100.0, "a height within 100 m of the train")
    };
    if against {
        signal.elevation_m = section.optional("elevation", height).unwrap_or(0.0);
    } else if role == Role::TankLevel {
        signal.elevation_m = section.optional("datum", height).unwrap_or(0.0);
    }
    if role.dimension() != Some(Dimension::Flow) {
        belongs(section, "serves", "a flow");
        return None;
    }
    let serves = section.get("serves")?;
    signal.serves = serves.items().iter().filter_map(Value::id).map(TrainId::new).collect();
    Some(serves.span.clone())
}

fn known_source(value: &Value<'_>, context: &Context<'_>) -> Option<SourceId> {
    let text = value.text()?;
    let found = context.sources.iter().find(|s| s.as_str() == text);
    if found.is_none() {
        let names: Vec<&str> = context.sources.iter().map(SourceId::as_str).collect();
        let help = match crate::base::nearest(text, names.iter().copied()) {
            Some(near) => format!("did you mean `{near}`?"),
            None => format!("sources here: {}", names.join(", ")),
        };
        value.mistake(format!("there is no source `{text}`"), help);
    }
    found.cloned()
}

fn known_unit(value: &Value<'_>, dimension: Dimension) -> Option<Unit> {
    let text = value.text()?;
    match unit_by_name(text) {
        Some(unit) if unit.dimension == dimension => Some(unit),
        Some(unit) => {
            value.mistake(
                format!(
                    "`{text}` is the unit of {}, where that of {} belongs",
                    unit.dimension.in_words(),
                    dimension.in_words()
                ),
                format!("{} is written like `{}`", dimension.in_words(), dimension.example()),
            );
            None
        }
        None => {
            value.mistake(format!("`{text}` is not a known unit"), unit_help(text, dimension));
            None
        }
    }
}

/// The unit of a tag that does not name one.
pub(super) fn default_unit(role: Role) -> Option<Unit> {
    let code = match role.dimension()? {
        Dimension::Pressure => "bar",
        Dimension::Flow => "m3/h",
        Dimension::Temperature => "Cel",
        Dimension::Length => "m",
        Dimension::Turbidity => "{NTU}",
        _ => "mg/L",
    };
    unit_by_name(code)
}

fn assumed_unit(value: &Value<'_>, role: Role) -> Option<Unit> {
    let unit = default_unit(role)?;
    let message = format!("{} has no unit; its readings are taken in {}", value.name(), unit.label);
    value.report.warn(&value.span, message, Some(format!("write unit = \"{}\"", unit.label)));
    Some(unit)
}

fn states(section: &Section<'_>) -> Vec<(String, Phase)> {
    let mut states: Vec<(String, Phase)> = Vec::new();
    for (word, phase) in PHASES {
        let Some(value) = section.get(word) else { continue };
        let codes = if value.is_list() { value.items() } else { vec![value] };
        for code in codes {
            let Some(text) = code.text_or_number() else { continue };
            if let Some((_, taken)) = states.iter().find(|(t, _)| same_code(t, &text)) {
                let message = format!("state `{text}` means {} already", taken.word());
                code.mistake(message, "a code means one state; remove it from one of the two");
            }
            states.push((text, phase));
        }
    }
    if !states.iter().any(|(_, p)| *p == Phase::Filtration) {
        section.report.missing(
            &section.span,
            "no code of the state tag means filtration",
            "add filtration = [\"1\"] with the code that the control system writes",
        );
    }
    states
}

/// Whether two codes are the same to an export, which may write 1 as 1.0 and words in any case.
fn same_code(a: &str, b: &str) -> bool {
    let number = |t: &str| t.parse::<f64>().ok();
    a.eq_ignore_ascii_case(b) || (number(a).is_some() && number(a) == number(b))
}
