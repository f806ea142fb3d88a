//! What people post of cleans: steps, times, spans. All faults of a body are said at once.

use serde::Deserialize;
use utoipa::ToSchema;

use super::http::Failure;
use crate::answers::{ProblemError, ProblemKind};
use crate::base::{Dimension, Instant, SECOND_US, Span, parse_duration_us, parse_quantity};
use crate::plant::{Phase, Step, StepClass, VerifiedRinse, classes_by_name, strength_mg_l};

/// Faults of a body, each with its place.
#[derive(Debug, Default)]
pub struct Faults(Vec<ProblemError>);

impl Faults {
    /// Notes a fault at a JSON pointer.
    pub fn at(&mut self, pointer: impl Into<String>, detail: impl Into<String>) {
        self.0.push(ProblemError::at_pointer(pointer, detail));
    }
    /// A time.
    pub fn time(&mut self, pointer: &str, text: &str) -> Option<Instant> {
        Instant::parse(text).map_err(|e| self.at(pointer, e.0)).ok()
    }
    /// A time that may be left out.
    pub fn optional_time(&mut self, pointer: &str, text: Option<&str>) -> Option<Instant> {
        self.time(pointer, text?)
    }
    /// All of it, or nothing if there were faults.
    pub fn none<T>(self, taken: Option<T>) -> Result<T, Failure> {
        match (taken, self.0.as_slice()) {
            (Some(taken), []) => Ok(taken),
            (_, faults) => {
                let first = faults.first().map_or("something is missing", |f| f.detail.as_str());
                let more = match faults.len() {
                    0 | 1 => String::new(),
                    n => format!(" ({} faults in all)", n),
                };
                let detail = format!("The body cannot be taken: {first}{more}.");
                Err(ProblemKind::Invalid.problem(detail).with_errors(self.0).into())
            }
        }
    }
}

/// A number, or a text.
#[derive(Clone, Debug, Deserialize, ToSchema)]
#[serde(untagged)]
pub enum NumberOrText {
    /// A number.
    Number(f64),
    /// A text.
    Text(String),
}

impl NumberOrText {
    /// As it was written.
    pub fn text(&self) -> String {
        match self {
            Self::Number(n) => n.to_string(),
            Self::Text(t) => t.trim().to_owned(),
        }
    }
}

/// A kind of clean.
#[derive(Clone, Copy, Debug, Deserialize, ToSchema)]
#[serde(rename_all = "snake_case")]
pub enum CleanKind {
    CleanInPlace,
    MaintenanceClean,
    ChemicalBackwash,
}

impl CleanKind {
    /// The phase in which a train is meanwhile.
    pub const fn phase(self) -> Phase {
        match self {
            Self::CleanInPlace => Phase::CleanInPlace,
            Self::MaintenanceClean => Phase::MaintenanceClean,
            Self::ChemicalBackwash => Phase::ChemicalBackwash,
        }
    }
}

/// A step of a clean, planned or done. A step as it was read, of a work order for example, can
/// be posted again.
#[derive(Clone, Debug, Deserialize, ToSchema)]
#[serde(deny_unknown_fields)]
pub struct StepBody {
    /// `hypochlorite`, `alkali`, `acid`, `peroxide`, `reductant`, `detergent`, `rinse` or
    /// `other`. Left out, it is that which the chemical's name gives away, else `other`; a step
    /// with readings and no chemical is a rinse.
    #[schema(value_type = Option<String>, example = "alkali")]
    class: Option<StepClass>,
    /// The chemical as the site calls it.
    #[schema(example = "sodium hydroxide")]
    chemical: Option<String>,
    /// Strength with its unit: `0.1 %`, `500 mg/L`.
    #[schema(example = "0.1 %")]
    concentration: Option<NumberOrText>,
    /// pH.
    ph: Option<NumberOrText>,
    /// Temperature with its unit: `35 degC`.
    #[schema(example = "35 degC")]
    temperature: Option<NumberOrText>,
    /// How long: `4 h` or `PT4H`.
    #[schema(example = "PT4H")]
    duration: Option<NumberOrText>,
    /// Volume of solution with its unit: `12 m3`.
    #[schema(example = "12 m3")]
    volume: Option<NumberOrText>,
    /// What was read at the end of a rinse, or what passes.
    verified: Option<RinseBody>,
    /// Taken and not kept: a work order says it.
    #[serde(default, rename = "why")]
    _why: Option<String>,
    /// Taken and not kept: a work order says it.
    #[serde(default, rename = "active")]
    _active: Option<String>,
    /// Taken and not kept: a work order says it.
    #[serde(default, rename = "check")]
    _check: Option<String>,
}

/// The check at the end of a rinse: what was read, or what passes.
#[derive(Clone, Debug, Deserialize, ToSchema)]
#[serde(deny_unknown_fields)]
pub struct RinseBody {
    /// pH read; in a plan what passes, as `6 .. 9`.
    ph: Option<NumberOrText>,
    /// Lowest and highest pH that pass.
    ph_range: Option<[f64; 2]>,
    /// Free chlorine read, in mg/L where no unit is named.
    free_chlorine: Option<NumberOrText>,
    /// Highest free chlorine that passes, in mg/L where no unit is named.
    free_chlorine_max: Option<NumberOrText>,
    /// Who read them.
    by: Option<String>,
}

/// Steps as they are kept. `pointer` is that of their list.
pub fn steps(faults: &mut Faults, pointer: &str, list: &[StepBody]) -> Vec<Step> {
    list.iter().enumerate().map(|(i, s)| step(faults, &format!("{pointer}/{i}"), s)).collect()
}

fn step(faults: &mut Faults, at: &str, body: &StepBody) -> Step {
    let chemical = body.chemical.as_deref().map(str::trim).filter(|c| !c.is_empty());
    let named = chemical.map(classes_by_name).unwrap_or_default();
    let read_only = chemical.is_none() && body.verified.is_some();
    let unnamed = if read_only { StepClass::Rinse } else { StepClass::Other };
    let field = |name: &str| format!("{at}/{name}");
    Step {
        class: body.class.or(named.first().copied()).unwrap_or(unnamed),
        chemical: chemical.map(str::to_owned),
        concentration: body.concentration.as_ref().and_then(|c| {
            let text = c.text();
            match strength_mg_l(&text) {
                Ok(_) => Some(text),
                Err(e) => {
                    faults.at(field("concentration"), said(&e.message, e.help.as_deref()));
                    None
                }
            }
        }),
        ph: body.ph.as_ref().and_then(|p| ph(faults, &field("ph"), p)),
        temperature_degc: quantity(
            faults,
            &field("temperature"),
            body.temperature.as_ref(),
            Dimension::Temperature,
            (-10.0, 150.0),
        ),
        duration_us: body.duration.as_ref().and_then(|d| duration(faults, &field("duration"), d)),
        volume_m3: quantity(
            faults,
            &field("volume"),
            body.volume.as_ref(),
            Dimension::Volume,
            (0.0, 1e6),
        ),
        verified: body.verified.as_ref().map(|v| verified(faults, &field("verified"), v)),
    }
}

fn said(message: &str, help: Option<&str>) -> String {
    help.map_or_else(|| message.to_owned(), |help| format!("{message}; {help}"))
}

fn ph(faults: &mut Faults, at: &str, value: &NumberOrText) -> Option<f64> {
    let text = value.text();
    match text.parse::<f64>() {
        Ok(ph) if (0.0..=14.0).contains(&ph) => Some(ph),
        _ => {
            faults.at(at, format!("`{text}` is no pH; write a number from 0 to 14"));
            None
        }
    }
}

/// A quantity in the internal unit of its dimension, within a range of it.
fn quantity(
    faults: &mut Faults,
    at: &str,
    value: Option<&NumberOrText>,
    dimension: Dimension,
    (low, high): (f64, f64),
) -> Option<f64> {
    let text = value?.text();
    match parse_quantity(&text, dimension) {
        Ok(q) if (low..=high).contains(&q.value_si) => Some(q.value_si),
        Ok(_) => {
            faults.at(at, format!("`{text}` is out of range"));
            None
        }
        Err(e) => {
            faults.at(at, said(&e.message, e.help.as_deref()));
            None
        }
    }
}

fn duration(faults: &mut Faults, at: &str, value: &NumberOrText) -> Option<i64> {
    let text = value.text();
    if text.starts_with('P') {
        return parse_duration_us(&text).map_err(|e| faults.at(at, e.0)).ok();
    }
    let year_s = 365.0 * 86_400.0;
    let seconds = quantity(faults, at, Some(value), Dimension::Time, (0.0, year_s))?;
    Some((seconds * SECOND_US as f64) as i64)
}

/// Free chlorine in mg/L, which is also the unit where none is named.
fn chlorine(faults: &mut Faults, at: &str, value: Option<&NumberOrText>) -> Option<f64> {
    let bare = value?.text();
    let text = if bare.parse::<f64>().is_ok() { format!("{bare} mg/L") } else { bare };
    let text = NumberOrText::Text(text);
    let kg_m3 = quantity(faults, at, Some(&text), Dimension::Concentration, (0.0, 1000.0))?;
    // By way of decimal text, so that 0.1 mg/L comes back as 0.1.
    format!("{:.9e}", kg_m3 * 1e3).parse().ok()
}

fn verified(faults: &mut Faults, at: &str, body: &RinseBody) -> VerifiedRinse {
    let field = |name: &str| format!("{at}/{name}");
    let span = body.ph.as_ref().map(NumberOrText::text).and_then(|t| {
        let (low, high) = t.split_once("..")?;
        Some([low.trim().parse().ok()?, high.trim().parse().ok()?])
    });
    let range = body.ph_range.or(span);
    if range.is_some_and(|[low, high]| !(0.0..=14.0).contains(&low) || high < low || high > 14.0) {
        faults.at(field("ph_range"), "write the lowest and the highest pH, from 0 to 14");
    }
    let read = body.ph.as_ref().filter(|_| span.is_none());
    VerifiedRinse {
        ph_range: range.map(|[low, high]| (low, high)),
        free_chlorine_max_mg_l: chlorine(
            faults,
            &field("free_chlorine_max"),
            body.free_chlorine_max.as_ref(),
        ),
        ph: read.and_then(|p| ph(faults, &field("ph"), p)),
        free_chlorine_mg_l: chlorine(faults, &field("free_chlorine"), body.free_chlorine.as_ref()),
        by: body.by.as_deref().map(str::trim).filter(|b| !b.is_empty()).map(str::to_owned),
    }
}

/// When work is meant to be done.
#[derive(Clone, Debug, Deserialize, ToSchema)]
#[serde(deny_unknown_fields)]
pub struct WindowBody {
    /// From.
    #[schema(format = DateTime)]
    from: String,
    /// Up to.
    #[schema(format = DateTime)]
    to: String,
}

/// A window as it is kept.
pub fn window(faults: &mut Faults, pointer: &str, body: &WindowBody) -> Option<Span> {
    let from = faults.time(&format!("{pointer}/from"), &body.from);
    let to = faults.time(&format!("{pointer}/to"), &body.to);
    Some(Span::new(from?, to?))
}

/// A volume in m3.
pub fn volume(faults: &mut Faults, pointer: &str, value: Option<&NumberOrText>) -> Option<f64> {
    quantity(faults, pointer, value, Dimension::Volume, (0.0, 1e6))
}

#[cfg(test)]
mod tests;
