//! Checks across sections: what refers to what, and what does not fit together.

use super::super::mistake::Report;
use super::procedure::PlacedProcedure;
use super::tags::Placed;
use super::train::PlacedTrain;
use crate::base::{TrainId, nearest};
use crate::plant::membrane::beyond;
use crate::plant::not_yet::{SHARED_METERS, STATE_IS_NEEDED};
use crate::plant::{Drive, Filtration, MembraneLimits, Role};

/// Checks trains against each other and in themselves, and gives every train the signals of the
/// meters that serve it.
pub(super) fn trains(report: &Report<'_>, trains: &mut [PlacedTrain]) {
    same_ids(report, trains);
    serves(report, trains);
    share_meters(trains);
    same_tags(report, trains);
    for placed in trains.iter_mut() {
        needed(report, placed);
        floor(report, placed);
        let name = placed.train.name.clone();
        for procedure in &placed.procedures {
            if let Some(limits) = &placed.train.membrane_limits {
                steps_within(report, procedure, limits, &name);
            }
        }
        consequences(report, placed);
        placed.train.signals = placed.tags.placed.iter().map(|p| p.signal.clone()).collect();
    }
}

fn same_ids(report: &Report<'_>, trains: &[PlacedTrain]) {
    for (at, placed) in trains.iter().enumerate() {
        let id = placed.train.id.as_str();
        if !id.is_empty() && trains.iter().take(at).any(|t| t.train.id == placed.train.id) {
            report.mistake_help(
                &placed.id_span,
                format!("there is a train `{id}` already"),
                "give each train an id of its own",
            );
        }
    }
}

fn serves(report: &Report<'_>, trains: &[PlacedTrain]) {
    // An id that could not be read would make every reference to it a mistake of its own.
    if trains.iter().any(|t| t.train.id.as_str().is_empty()) {
        return;
    }
    let ids: Vec<&str> = trains.iter().map(|t| t.train.id.as_str()).collect();
    for train in trains {
        for placed in &train.tags.placed {
            let Some(span) = &placed.serves_span else { continue };
            let served = &placed.signal.serves;
            for (at, id) in served.iter().enumerate() {
                if !ids.contains(&id.as_str()) {
                    let help = match nearest(id.as_str(), ids.iter().copied()) {
                        Some(near) => format!("did you mean `{near}`?"),
                        None => format!("trains here: {}", ids.join(", ")),
                    };
                    report.mistake_help(span, format!("there is no train `{id}` to serve"), help);
                }
                if served.iter().take(at).any(|other| other == id) {
                    report.mistake(span, format!("`{id}` is served twice"));
                }
            }
            let known = served.iter().all(|id| ids.contains(&id.as_str()));
            if known && served.len() > 1 {
                report.mistake(span, SHARED_METERS);
            }
            if !served.contains(&train.train.id) {
                let id = &train.train.id;
                report.mistake_help(
                    span,
                    format!("the meter of `{id}` does not serve it"),
                    format!("add \"{id}\" to `serves`, or leave `serves` out"),
                );
            }
        }
    }
}

/// A meter that serves several trains need be named at one of them only.
fn share_meters(trains: &mut [PlacedTrain]) {
    let shared: Vec<(TrainId, Placed)> = trains
        .iter()
        .flat_map(|t| t.tags.placed.iter())
        .flat_map(|p| p.signal.serves.iter().map(move |id| (id.clone(), p.clone())))
        .collect();
    for train in trains {
        let own = train.tags.named.clone();
        for (_, placed) in shared.iter().filter(|(id, _)| *id == train.train.id) {
            let role = placed.signal.role;
            if !own.contains(&role) {
                train.tags.named.push(role);
                train.tags.placed.push(Placed { serves_span: None, ..placed.clone() });
            }
        }
        train.tags.placed.sort_by_key(|p| (p.signal.role, p.signal.from));
    }
}

/// One tag has one unit, one set of trains, and is one pressure of a train.
fn same_tags(report: &Report<'_>, trains: &[PlacedTrain]) {
    let all: Vec<(&TrainId, &Placed)> =
        trains.iter().flat_map(|t| t.tags.placed.iter().map(|p| (&t.train.id, p))).collect();
    for (at, (train, placed)) in all.iter().enumerate() {
        let signal = &placed.signal;
        for (earlier_train, earlier) in all.iter().take(at) {
            let other = &earlier.signal;
            if (&other.tag, &other.source, other.from) != (&signal.tag, &signal.source, signal.from)
                || placed.span == earlier.span
            {
                continue;
            }
            let tag = &signal.tag;
            if let (Some(a), Some(b)) = (other.unit, signal.unit)
                && a.ucum != b.ucum
            {
                let message = format!(
                    "`{tag}` is in {} for `{earlier_train}` and in {} here",
                    a.label, b.label
                );
                report.mistake_help(&placed.span, message, "one tag has one unit");
            }
            if other.role == signal.role && other.serves != signal.serves {
                report.mistake_help(
                    &placed.span,
                    format!("`{tag}` serves other trains for `{earlier_train}` than here"),
                    "write the same `serves` at each, or name the meter once",
                );
            }
            let pressures = [Role::FeedPressure, Role::PermeatePressure, Role::ConcentratePressure];
            let both = pressures.contains(&signal.role) && pressures.contains(&other.role);
            if train == earlier_train && both && other.role != signal.role {
                let message = format!(
                    "`{tag}` is {} and {} of one train",
                    other.role.word(),
                    signal.role.word()
                );
                report.mistake_help(&placed.span, message, "check which tag is which");
            }
        }
    }
}

fn floor(report: &Report<'_>, placed: &PlacedTrain) {
    let train = &placed.train;
    let lowest = train.limits.tmp_pa.advisory.min(train.limits.tmp_pa.clean);
    if train.tmp_floor_pa >= lowest {
        report.mistake_help(
            &placed.span,
            format!(
                "the TMP floor of {} bar lies above a TMP limit of {} bar, which could never be reached",
                train.tmp_floor_pa / 1e5,
                lowest / 1e5
            ),
            "tmp_floor is the TMP under which a reading is not believed, mostly 0.03 bar",
        );
    }
}

/// The membrane's limits hold for the site's own procedure too.
fn steps_within(
    report: &Report<'_>,
    placed: &PlacedProcedure,
    limits: &MembraneLimits,
    train: &str,
) {
    for (step, span) in placed.procedure.steps.iter().zip(&placed.step_spans) {
        for message in beyond(step, limits) {
            let help = "the membrane's data sheet rules: advice and work orders stop at its limit";
            report.warn(span, format!("{message} of {train}"), Some(help.to_owned()));
        }
    }
}

/// Notes the tags without which a train cannot be worked.
fn needed(report: &Report<'_>, placed: &PlacedTrain) {
    let Some(span) = &placed.tags.span else { return };
    let has = |role: Role| placed.tags.named.contains(&role);
    let train = &placed.train;
    let pressures: &[Role] = match (train.filtration, train.drive) {
        (_, Drive::Submerged) => &[Role::PermeatePressure, Role::TankLevel],
        (Filtration::DeadEnd, _) => &[Role::FeedPressure, Role::PermeatePressure],
        (Filtration::CrossFlow(_), _) => {
            &[Role::FeedPressure, Role::ConcentratePressure, Role::PermeatePressure]
        }
    };
    let mut lacking: Vec<&str> = Vec::new();
    if !has(Role::PermeateFlow) {
        lacking.push(Role::PermeateFlow.word());
    }
    if !has(Role::TransmembranePressure) {
        lacking.extend(pressures.iter().filter(|r| !has(**r)).map(|r| r.word()));
    }
    for word in lacking {
        let help = if word == Role::PermeateFlow.word() {
            "add permeate_flow = { tag = \"FT-101\", unit = \"m3/h\" }".to_owned()
        } else {
            format!(
                "add {word} = {{ tag = \"PT-101\", unit = \"bar\" }}, or the controller's own \
                 transmembrane_pressure"
            )
        };
        report.missing(span, format!("no tag is the train's {word}"), help);
    }
    if STATE_IS_NEEDED && !has(Role::State) {
        report.missing(
            span,
            "no tag is the train's state, and this version does not infer it",
            "add state = { tag = \"XS-101\", filtration = [\"1\"], backwash = [\"2\"] }",
        );
    }
    if !has(Role::Temperature) {
        report.warn(
            span,
            "no tag is the train's temperature: permeability cannot be brought to the reference \
             temperature",
            Some(
                "add temperature = { tag = \"TT-101\", unit = \"degC\" }; one thermometer may serve \
                 all trains"
                    .to_owned(),
            ),
        );
    }
}

/// Warns of what the file leaves out, where an answer will lack something for it.
fn consequences(report: &Report<'_>, placed: &PlacedTrain) {
    let train = &placed.train;
    let warn = |message: String, help: &str| {
        report.warn(&placed.span, message, Some(help.to_owned()));
    };
    let name = &train.name;
    if train.membrane_limits.is_none() && train.procedures.is_empty() {
        warn(
            format!(
                "{name} has neither membrane limits nor a procedure: advice names the class of \
                 chemical only"
            ),
            "add [train.membrane_limits] from the data sheet, or the site's [[train.procedure]]",
        );
    }
    if train.as_new_permeability.is_none() && train.after_clean_permeability.is_none() {
        warn(
            format!(
                "{name} has no known permeability: there is no loss until a clean is judged \
                 restored"
            ),
            "add after_clean_permeability = { from = \"2026-01-10\", value = \"270 L/(m2.h.bar)\" } \
             if it is known",
        );
    }
    if let (Some(new), Some(after)) = (train.as_new_permeability, train.after_clean_permeability)
        && after.value > new
    {
        warn(
            format!("{name} is more permeable after a clean than as new"),
            "check as_new_permeability and after_clean_permeability",
        );
    }
    if train.limits.tmp_pa.clean.is_infinite() {
        warn(
            format!("{name} has no TMP limit to clean by: only the loss of permeability counts"),
            "add tmp_clean = \"1.2 bar\" under [limits], with the limit of the membrane or pumps",
        );
    }
    if train.drinking_water && train.integrity.is_none() {
        warn(
            format!("{name} has no approved integrity values: no log removal is worked"),
            "add [integrity], or drinking_water = false if its filtrate is not drunk",
        );
    }
}
