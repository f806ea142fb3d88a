//! Whether the rinses of what was done show by their readings that nothing met and nothing is
//! left.

use crate::base::names_a_person;
use crate::plant::{Step, StepClass, VerifiedRinse};

use super::chemistry::{Conflict, LastChemical, find, left, shown};
use super::order::Actuals;
use super::refusal::{Reading, Refusal, RefusalWhy};

/// What was done, held against the plan.
///
/// # Errors
/// The first reading that is missing or does not pass, or what met or is left.
pub(super) fn check_done(
    plan: &[Step],
    done: &Actuals,
    last: Option<&LastChemical>,
) -> Result<(), Refusal> {
    if done.steps.is_empty() {
        return Err(Refusal::new("/actuals/steps", RefusalWhy::NoStepsDone));
    }
    let noted = done.notes.as_deref().is_some_and(|n| !n.trim().is_empty());
    if chemicals(plan) != chemicals(&done.steps) && !noted {
        return Err(Refusal::new("/actuals/notes", RefusalWhy::DoneOtherwise));
    }
    let steps = with_limits(plan, &done.steps);
    let apart = |k: usize, a: StepClass, b: StepClass| {
        steps.get(k).is_some_and(|s| reads(s).is_ok()) && shown(&steps, k, a, b)
    };
    if let Some(conflict) = find(&steps, last, &apart).into_iter().next() {
        return Err(not_apart(&steps, conflict));
    }
    match left(&steps, None, &apart).first() {
        Some(class) => Err(not_rinsed(&steps, *class)),
        None => Ok(()),
    }
}

fn chemicals(steps: &[Step]) -> Vec<StepClass> {
    steps.iter().map(|s| s.class).filter(|c| *c != StepClass::Rinse).collect()
}

/// The steps as done, each rinse with the limits that the plan gives it: those of the same step
/// where the classes are the plan's, else the strictest that the plan holds.
fn with_limits(plan: &[Step], done: &[Step]) -> Vec<Step> {
    let same = plan.len() == done.len() && plan.iter().zip(done).all(|(p, d)| p.class == d.class);
    let strict = strictest(plan);
    let limited = |(k, step): (usize, &Step)| {
        let mut step = step.clone();
        if step.class == StepClass::Rinse {
            let own = plan.get(k).filter(|_| same).and_then(|p| p.verified.clone());
            let limits = if same { own } else { strict.clone() };
            let read = step.verified.take();
            step.verified = Some(VerifiedRinse {
                ph_range: limits.as_ref().and_then(|l| l.ph_range),
                free_chlorine_max_mg_l: limits.and_then(|l| l.free_chlorine_max_mg_l),
                ph: read.as_ref().and_then(|r| r.ph),
                free_chlorine_mg_l: read.as_ref().and_then(|r| r.free_chlorine_mg_l),
                by: read.and_then(|r| r.by),
            });
        }
        step
    };
    done.iter().enumerate().map(limited).collect()
}

fn strictest(plan: &[Step]) -> Option<VerifiedRinse> {
    let checks = || plan.iter().filter_map(|s| s.verified.as_ref());
    checks().next()?;
    Some(VerifiedRinse {
        ph_range: checks().filter_map(|c| c.ph_range).reduce(|a, b| (a.0.max(b.0), a.1.min(b.1))),
        free_chlorine_max_mg_l: checks().filter_map(|c| c.free_chlorine_max_mg_l).reduce(f64::min),
        ph: None,
        free_chlorine_mg_l: None,
        by: None,
    })
}

/// Whether a rinse has every reading that its limits ask for, within them, and who read.
fn reads(rinse: &Step) -> Result<(), (Reading, RefusalWhy)> {
    let missing = |r: Reading| (r, RefusalWhy::ReadingMissing(r));
    let Some(v) = &rinse.verified else { return Err(missing(Reading::Ph)) };
    let chlorine = v.free_chlorine_max_mg_l.map(|max| (0.0, max));
    for (reading, range, value) in
        [(Reading::Ph, v.ph_range, v.ph), (Reading::FreeChlorine, chlorine, v.free_chlorine_mg_l)]
    {
        let Some((low, high)) = range else { continue };
        let value = value.ok_or_else(|| missing(reading))?;
        if !(low..=high).contains(&value) {
            return Err((reading, RefusalWhy::ReadingOutside { reading, value, low, high }));
        }
    }
    let named = v.by.as_deref().is_some_and(names_a_person);
    if named { Ok(()) } else { Err(missing(Reading::By)) }
}

fn not_apart(steps: &[Step], conflict: Conflict) -> Refusal {
    let between = conflict.from_step.map_or(0, |i| i + 1)..conflict.at_step;
    let rinse = between.rev().find(|k| steps.get(*k).is_some_and(|s| s.class == StepClass::Rinse));
    let whole = || {
        let pointer = format!("/actuals/steps/{}", conflict.at_step);
        Refusal::new(pointer, RefusalWhy::Conflict(conflict))
    };
    rinse.and_then(|k| fault(steps, k)).unwrap_or_else(whole)
}

fn not_rinsed(steps: &[Step], class: StepClass) -> Refusal {
    let last = steps.len().saturating_sub(1);
    let rinsed = steps.get(last).is_some_and(|s| s.class == StepClass::Rinse);
    let whole = || Refusal::new(format!("/actuals/steps/{last}"), RefusalWhy::NotRinsed(class));
    if rinsed { fault(steps, last).unwrap_or_else(whole) } else { whole() }
}

/// What is wrong with a rinse's readings: by its limits, else one that the chemistry needs and
/// the plan did not ask for.
fn fault(steps: &[Step], k: usize) -> Option<Refusal> {
    let rinse = steps.get(k)?;
    let at =
        |r: Reading, why| Refusal::new(format!("/actuals/steps/{k}/verified/{}", r.field()), why);
    if let Err((reading, why)) = reads(rinse) {
        return Some(at(reading, why));
    }
    let read = rinse.verified.as_ref()?;
    [(Reading::Ph, read.ph), (Reading::FreeChlorine, read.free_chlorine_mg_l)]
        .into_iter()
        .find(|(_, value)| value.is_none())
        .map(|(r, _)| at(r, RefusalWhy::ReadingMissing(r)))
}
