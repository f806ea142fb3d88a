//! `[[procedure]]`: how the site cleans. Its chemistry is checked here and in `check`.

use std::ops::Range;

use super::source::belongs;
use super::walk::{Section, Value};
use crate::base::{Dimension, QuantityError, parse_quantity};
use crate::plant::chemistry::{classes_by_name, conflicts};
use crate::plant::words::CLASSES;
use crate::plant::{Phase, Procedure, Step, StepClass, VerifiedRinse};

/// Kinds of clean, as procedures and cleanings name them.
const KINDS: [(&str, Phase); 3] = [
    ("clean_in_place", Phase::CleanInPlace),
    ("maintenance_clean", Phase::MaintenanceClean),
    ("chemical_backwash", Phase::ChemicalBackwash),
];

/// A procedure with the places of its steps.
#[derive(Clone)]
pub(super) struct PlacedProcedure {
    pub procedure: Procedure,
    pub step_spans: Vec<Range<usize>>,
}

/// Reads one `[[procedure]]`.
pub(super) fn procedure(section: Section<'_>) -> PlacedProcedure {
    let kind = section.required("kind", "\"clean_in_place\"", |v| v.choice(&KINDS));
    let revision = section.optional("revision", Value::text_or_number);
    let example = "[{ class = \"alkali\", duration = \"4 h\" }]";
    let items = section.required("steps", example, Value::list).unwrap_or_default();
    if let (Some(steps), true) = (section.get("steps"), items.is_empty())
        && steps.is_list()
    {
        steps.mistake("a procedure has at least one step", format!("write steps = {example}"));
    }
    let read: Vec<(Step, Range<usize>)> =
        items.iter().filter_map(|v| Some((step(v.section()?)?, v.span.clone()))).collect();
    let whole = read.len() == items.len();
    let (steps, step_spans): (Vec<_>, Vec<_>) = read.into_iter().unzip();
    let placed = PlacedProcedure {
        procedure: Procedure { kind: kind.unwrap_or(Phase::CleanInPlace), revision, steps },
        step_spans,
    };
    // A step that could not be read leaves a gap that would look like two steps meeting.
    if whole {
        check_order(&section, &placed);
    }
    section.finish();
    placed
}

/// Notes steps that would meet what they must not.
fn check_order(section: &Section<'_>, placed: &PlacedProcedure) {
    let steps = &placed.procedure.steps;
    for (i, j) in conflicts(steps) {
        let (Some(before), Some(after)) = (steps.get(i), steps.get(j)) else { continue };
        let Some(span) = placed.step_spans.get(j) else { continue };
        let (a, b) = (before.class.word(), after.class.word());
        section.report.mistake_help(
            span,
            format!(
                "{b} follows {a} with no rinse between them that is verified by pH and residual"
            ),
            "put between them: { class = \"rinse\", verified = { ph = \"6 .. 9\", \
             free_chlorine_max = \"0.5 mg/L\" } }",
        );
    }
    if steps.last().is_some_and(|s| s.class != StepClass::Rinse || s.verified.is_none()) {
        section.report.warn(
            &section.span,
            "the procedure does not end with a verified rinse: its last chemical counts as still \
             in the train",
            Some("end it with { class = \"rinse\", verified = { … } }".to_owned()),
        );
    }
}

fn step(section: Section<'_>) -> Option<Step> {
    let class = section.required("class", "\"alkali\"", |v| v.choice(&CLASSES));
    let chemical = section.get("chemical");
    let name = chemical.as_ref().and_then(Value::text);
    if let (Some(value), Some(name), Some(class)) = (&chemical, name, class) {
        check_name(value, name, class);
    }
    let verified = if class.is_none_or(|c| c == StepClass::Rinse) {
        section.optional("verified", Value::section).map(verified)
    } else {
        belongs(&section, "verified", "class = \"rinse\"");
        None
    };
    let step = Step {
        class: class.unwrap_or(StepClass::Other),
        chemical: name.map(str::to_owned),
        concentration: section.optional("concentration", strength),
        ph: section.optional("ph", Value::ph),
        temperature_degc: section.optional("temperature", |v| {
            v.within(Dimension::Temperature, 0.0..=100.0, "from 0 to 100 degC")
        }),
        duration_us: section.optional("duration", Value::duration_us),
        volume_m3: section.optional("volume", |v| v.positive(Dimension::Volume)),
        verified,
    };
    section.finish();
    class.map(|_| step)
}

/// A name that says another class than the step does hides what must not meet.
fn check_name(value: &Value<'_>, name: &str, class: StepClass) {
    let named = classes_by_name(name);
    for (i, a) in named.iter().enumerate() {
        if let Some(b) = named.iter().skip(i + 1).find(|b| a.conflicts_with(**b)) {
            let message = format!("`{name}` mixes {} and {}", a.word(), b.word());
            value.mistake(
                message,
                "these must never meet; make them two steps with a verified rinse between",
            );
            return;
        }
    }
    let says = named.iter().find(|c| **c == StepClass::Hypochlorite).or(named.first());
    if let Some(says) = says.filter(|s| **s != class && class != StepClass::Other) {
        let message = format!("`{name}` is of class {}, not {}", says.word(), class.word());
        value.mistake(message, format!("write class = \"{}\"", says.word()));
    }
}

fn verified(section: Section<'_>) -> VerifiedRinse {
    let check = VerifiedRinse {
        ph_range: section.optional("ph", Value::ph_range),
        free_chlorine_max_mg_l: section.optional("free_chlorine_max", chlorine_mg_l),
        ph: None,
        free_chlorine_mg_l: None,
        by: None,
    };
    section.finish();
    check
}

/// A concentration of free chlorine, mg/L, from zero.
pub(super) fn chlorine_mg_l(value: &Value<'_>) -> Option<f64> {
    let said = "from zero to 100 g/L";
    value.within(Dimension::Concentration, 0.0..=100.0, said).map(|kg_m3| kg_m3 * 1e3)
}

/// A strength as it stands, which is a share or a concentration.
fn strength(value: &Value<'_>) -> Option<String> {
    let text = value.text()?;
    match strength_mg_l(text) {
        Ok(_) => Some(text.to_owned()),
        Err(error) => {
            let help = error.help.unwrap_or_default();
            value.mistake(format!("{}: {}", value.name(), error.message), help);
            None
        }
    }
}

/// A strength in mg/L, from 0 to 1,000,000; a share by mass is taken as of water, 1 % as 10 g/L.
///
/// # Errors
/// If the text is neither a share nor a concentration, or out of that range.
pub fn strength_mg_l(text: &str) -> Result<f64, QuantityError> {
    let help = |message: String, help: &str| QuantityError { message, help: Some(help.to_owned()) };
    let read = match parse_quantity(text, Dimension::Share) {
        Ok(share) => Ok(share.value_si * 1e6),
        Err(_) => parse_quantity(text, Dimension::Concentration).map(|c| c.value_si * 1e3),
    };
    let mg_l = read.map_err(|e| help(e.message, "write a strength like `0.1 %` or `500 mg/L`"))?;
    if (0.0..=1e6).contains(&mg_l) {
        Ok(mg_l)
    } else {
        Err(help(format!("`{text}` is out of range"), "it is from 0 to 100 %"))
    }
}
