//! Cleans in place: as the site's procedure says, as they were done, and what they took off.

use crate::base::{HOUR_US, Instant, MINUTE_US, TrainId};
use crate::plant::{Phase, Step, StepClass, VerifiedRinse};

/// One step of a clean that will happen.
#[derive(Clone, Debug, PartialEq)]
pub struct CleanStep {
    /// What was done; its duration counts, none stated means an hour.
    pub step: Step,
    /// What it takes off, as a share (0 to 1) of the chemically reversible resistance at the
    /// start of the whole clean.
    pub removes: f64,
}

/// A clean that the recipe lets happen.
#[derive(Clone, Debug, PartialEq)]
pub struct PlannedClean {
    /// When the train is taken out; later if it is in standby then.
    pub start: Instant,
    /// Its steps, in order.
    pub steps: Vec<CleanStep>,
    /// Resistance that the clean itself leaves for good, 1/m.
    pub irrecoverable_per_m: f64,
    /// The site's own reference of the record.
    pub reference: String,
    /// Whether anybody wrote it down.
    pub recorded: bool,
}

/// A clean as the site wrote it down.
#[derive(Clone, Debug, PartialEq)]
pub struct RecordedClean {
    /// Train.
    pub train: TrainId,
    /// Taken out.
    pub start: Instant,
    /// Last step ended.
    pub end: Instant,
    /// Always `CleanInPlace`.
    pub kind: Phase,
    /// Steps, rinses with what was measured.
    pub steps: Vec<Step>,
    /// The site's own reference.
    pub reference: String,
}

impl CleanStep {
    /// How long it takes, in microseconds; at least a minute.
    pub fn duration_us(&self) -> i64 {
        self.step.duration_us.unwrap_or(HOUR_US).max(MINUTE_US)
    }
}

impl PlannedClean {
    /// A clean by the site's procedure that takes off `removes` (0 to 1) of the chemically
    /// reversible resistance: three quarters of it by hypochlorite, a quarter by acid.
    pub fn by_procedure(start: Instant, removes: f64, reference: &str) -> Self {
        let shares = [0.75 * removes, 0.0, 0.25 * removes, 0.0];
        let done = procedure_steps().into_iter().map(as_done);
        Self {
            start,
            steps: done.zip(shares).map(|(step, removes)| CleanStep { step, removes }).collect(),
            irrecoverable_per_m: 5e9,
            reference: reference.to_owned(),
            recorded: true,
        }
    }

    /// The same with the heater off and the hypochlorite too thin.
    pub fn cold_and_weak(start: Instant, removes: f64, reference: &str) -> Self {
        let mut clean = Self::by_procedure(start, removes, reference);
        for CleanStep { step, .. } in &mut clean.steps {
            step.temperature_degc = step.temperature_degc.map(|_| 14.0);
            if step.class == StepClass::Hypochlorite {
                step.concentration = Some("240 mg/L".to_owned());
                step.ph = Some(10.4);
            }
        }
        clean
    }

    /// When its last step ends if it starts when planned.
    pub fn end(&self) -> Instant {
        self.start.plus(self.steps.iter().map(CleanStep::duration_us).sum())
    }

    /// As the site wrote it down.
    pub(super) fn record(&self, train: &TrainId) -> RecordedClean {
        RecordedClean {
            train: train.clone(),
            start: self.start,
            end: self.end(),
            kind: Phase::CleanInPlace,
            steps: self.steps.iter().map(|s| s.step.clone()).collect(),
            reference: self.reference.clone(),
        }
    }
}

/// The site's procedure for a clean in place, eight hours, within the limits of the invented
/// membrane. Strengths are common practice, no source.
pub fn procedure_steps() -> Vec<Step> {
    let chemical = |class, chemical: &str, concentration: &str, ph| Step {
        class,
        chemical: Some(chemical.to_owned()),
        concentration: Some(concentration.to_owned()),
        ph: Some(ph),
        temperature_degc: Some(35.0),
        duration_us: Some(3 * HOUR_US),
        volume_m3: Some(12.0),
        verified: None,
    };
    let rinse = |free_chlorine_max_mg_l| Step {
        class: StepClass::Rinse,
        chemical: None,
        concentration: None,
        ph: None,
        temperature_degc: None,
        duration_us: Some(HOUR_US),
        volume_m3: None,
        verified: Some(VerifiedRinse {
            ph_range: Some((6.0, 9.0)),
            free_chlorine_max_mg_l: Some(free_chlorine_max_mg_l),
            ph: None,
            free_chlorine_mg_l: None,
            by: None,
        }),
    };
    vec![
        chemical(
            StepClass::Hypochlorite,
            "sodium hypochlorite in sodium hydroxide",
            "400 mg/L",
            11.0,
        ),
        rinse(0.1),
        chemical(StepClass::Acid, "citric acid", "1.5 %", 2.5),
        rinse(0.5),
    ]
}

/// A step as the shift writes it down: a rinse with what was measured at its end.
fn as_done(mut step: Step) -> Step {
    if let Some(check) = &mut step.verified {
        *check = VerifiedRinse {
            ph_range: None,
            free_chlorine_max_mg_l: None,
            ph: Some(7.4),
            free_chlorine_mg_l: Some(0.05),
            by: Some("day shift".to_owned()),
        };
    }
    step
}
