//! What to clean with. The site's own procedure where there is one; else classes of chemical
//! only, never a strength: the membrane's limits and the site's procedure rule.

use serde::{Deserialize, Serialize};

use crate::plant::{self, Phase, Step, StepClass, Train};

/// Why a step is there. Worded for people in `answers`.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Serialize, Deserialize)]
#[serde(rename_all = "snake_case")]
pub enum Why {
    /// It is the site's procedure.
    SiteProcedure,
    /// It is the site's procedure, held to the membrane's limits where it goes beyond them.
    HeldToMembraneLimits,
    /// Organic and biological fouling yields to it (common practice, no source).
    OrganicFouling,
    /// Iron, manganese, aluminium and calcium yield to it (common practice, no source).
    MineralFouling,
    /// Chemicals that must not meet stand on its two sides.
    KeepsApart,
    /// Nothing may be left when the train returns to service.
    BeforeReturn,
}

/// Where a list of steps comes from.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Serialize, Deserialize)]
#[serde(rename_all = "snake_case")]
pub enum StepsFrom {
    /// The site's procedure.
    SiteProcedure,
    /// General practice: classes only.
    GeneralPractice,
    /// No steps.
    None,
}

/// A step with its reason.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize)]
pub struct AdvisedStep {
    /// The step.
    pub step: Step,
    /// Why.
    pub why: Why,
}

/// The usual cautions. Worded for people in `answers`.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord, Serialize, Deserialize)]
#[serde(rename_all = "snake_case")]
pub enum Caution {
    /// Local codes, the site's procedure, permits and licensed operators decide.
    SiteDecides,
    /// Hypochlorite and acid make chlorine gas.
    ChlorineGas,
    /// Heels, dead legs, shared tanks and sumps count.
    SharedVessels,
    /// Reductant only in controlled neutralisation.
    Reductant,
    /// Isolation proven; filtrate to waste until pH and residual pass.
    ReturnToService,
    /// Integrity test before return on drinking water.
    IntegrityBeforeReturn,
    /// Permeability never shows a breach.
    NotIntegrity,
    /// No membrane limits in the plant file: class of chemical only.
    NoMembraneLimits,
    /// Nothing here starts a pump.
    StartsNothing,
}

/// Steps of a clean in place of a train.
pub fn in_place(train: &Train) -> (Vec<AdvisedStep>, StepsFrom) {
    if let Some(own) = train.procedures.iter().find(|p| p.kind == Phase::CleanInPlace) {
        let steps = own.steps.iter().map(|s| held_to_membrane(train, s)).collect();
        return (steps, StepsFrom::SiteProcedure);
    }
    let steps = [
        (StepClass::Hypochlorite, Why::OrganicFouling),
        (StepClass::Rinse, Why::KeepsApart),
        (StepClass::Acid, Why::MineralFouling),
        (StepClass::Rinse, Why::BeforeReturn),
    ];
    let steps = steps
        .into_iter()
        .map(|(class, why)| AdvisedStep { step: class_only(class), why })
        .collect();
    (steps, StepsFrom::GeneralPractice)
}

fn held_to_membrane(train: &Train, step: &Step) -> AdvisedStep {
    match train.membrane_limits.map(|l| plant::within(step, &l)) {
        Some((step, true)) => AdvisedStep { step, why: Why::HeldToMembraneLimits },
        _ => AdvisedStep { step: step.clone(), why: Why::SiteProcedure },
    }
}

fn class_only(class: StepClass) -> Step {
    Step {
        class,
        chemical: None,
        concentration: None,
        ph: None,
        temperature_degc: None,
        duration_us: None,
        volume_m3: None,
        verified: None,
    }
}

/// The cautions that go with steps on a train.
pub fn cautions(train: &Train, steps: &[AdvisedStep]) -> Vec<Caution> {
    let mut out = vec![Caution::SiteDecides];
    let has = |class: StepClass| steps.iter().any(|s| s.step.class == class);
    if !steps.is_empty() {
        out.push(Caution::ChlorineGas);
        out.push(Caution::SharedVessels);
        if has(StepClass::Reductant) {
            out.push(Caution::Reductant);
        }
        out.push(Caution::ReturnToService);
        if train.drinking_water {
            out.push(Caution::IntegrityBeforeReturn);
        }
        if train.membrane_limits.is_none() {
            out.push(Caution::NoMembraneLimits);
        }
    }
    out.push(Caution::NotIntegrity);
    out.push(Caution::StartsNothing);
    out
}
