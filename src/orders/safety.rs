//! Isolation, preconditions, hazards, permits and protection of a clean. General practice
//! (common practice, no source): the site's procedure, local codes and licensed operators
//! decide. Worded for people in `answers`; each value says here what is meant.

use serde::{Deserialize, Serialize};

use crate::plant::{Drive, Step, StepClass, Train};

/// Solutions warmer than this are hot, degrees Celsius (common practice, no source).
const HOT_DEGC: f64 = 30.0;

/// How the train is set apart before the first chemical.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Serialize, Deserialize)]
#[serde(rename_all = "snake_case")]
pub enum Isolation {
    /// Feed and concentrate valves are closed and locked, and shown to hold.
    FeedClosed,
    /// The filtrate valve is closed and locked, and shown to hold: no chemical reaches treated
    /// water.
    FiltrateClosed,
    /// Pumps and air of the train are locked out and tagged; tried, and do not start.
    DrivesLockedOut,
    /// The cleaning loop is set apart from every other train, tank and chemical.
    LoopSetApart,
    /// Vents and drains are open to where the procedure says, and nowhere else.
    VentsAndDrainsSet,
}

/// What must be so before work starts.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Serialize, Deserialize)]
#[serde(rename_all = "snake_case")]
pub enum Precondition {
    /// The other trains carry the demand without this one, and none of them is due out.
    OthersCarryDemand,
    /// The clear-water level lasts for the time out.
    ClearWaterLasts,
    /// No other train is on the cleaning equipment, and it is rinsed of what was in it last.
    EquipmentFreeAndRinsed,
    /// The neutralisation tank is empty and holds the whole clean.
    NeutralisationEmpty,
    /// Chemicals are in stock, in date, and their strength is read from the label.
    ChemicalsInStock,
    /// Data sheets of the chemicals, the membrane's limits and the site's procedure are at hand.
    PapersAtHand,
    /// Which chemical the train saw last is known.
    LastChemicalKnown,
}

/// What can hurt.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Serialize, Deserialize)]
#[serde(rename_all = "snake_case")]
pub enum Hazard {
    /// Hypochlorite and acid make chlorine gas: also in heels, dead legs, tanks and sumps.
    ChlorineGas,
    /// Sulphite in acid gives off sulphur dioxide.
    SulphurDioxide,
    /// Caustic or acid burns skin and eyes.
    Corrosive,
    /// An oxidiser: keep from organic matter and reductants.
    Oxidiser,
    /// The solution is hot.
    HotSolution,
    /// A chemical of unknown class: treat it as one that must meet no other.
    UnknownChemical,
    /// Pipes and vessels are under pressure until shown otherwise.
    Pressure,
    /// Work over an open tank: drowning, falls.
    OpenTank,
    /// Waste that was not neutralised harms the works and the stream that receive it.
    Waste,
}

/// What must be signed elsewhere.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Serialize, Deserialize)]
#[serde(rename_all = "snake_case")]
pub enum Permit {
    /// Handling of chemicals.
    ChemicalHandling,
    /// Lock-out and tag-out.
    LockOut,
    /// Work over open tanks; entry into one is another permit still, and not part of this task.
    OverTanks,
    /// Discharge of the waste within the consent: pH, free chlorine, oxygen demand.
    Discharge,
}

/// What protects people.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Serialize, Deserialize)]
#[serde(rename_all = "snake_case")]
pub enum Ppe {
    /// Chemical goggles and a face shield.
    EyesAndFace,
    /// Gloves that the data sheet names for the chemical.
    Gloves,
    /// Apron or suit, and boots.
    BodyAndFeet,
    /// A gas detector, and breathing protection as the site's procedure says.
    GasDetector,
    /// Emergency shower and eye wash, tried today.
    ShowerTried,
    /// A life jacket or harness.
    LifeJacketOrHarness,
}

/// All five lists of an order.
#[derive(Clone, Debug, Default, PartialEq, Serialize, Deserialize)]
pub struct Safety {
    /// Isolation.
    pub isolation: Vec<Isolation>,
    /// Preconditions.
    pub preconditions: Vec<Precondition>,
    /// Hazards.
    pub hazards: Vec<Hazard>,
    /// Permits.
    pub permits: Vec<Permit>,
    /// Protection.
    pub ppe: Vec<Ppe>,
}

/// The lists for a clean of a train with these steps.
pub fn safety(train: &Train, steps: &[Step]) -> Safety {
    let has = |classes: &[StepClass]| steps.iter().any(|s| classes.contains(&s.class));
    let open_tank = train.drive == Drive::Submerged;
    let mut hazards = vec![Hazard::Pressure, Hazard::Waste];
    // Of a mixture of the two, one half may come from another clean, a heel or a sump.
    let gas = has(&[StepClass::Hypochlorite, StepClass::Acid, StepClass::Other]);
    let hot = steps.iter().any(|s| s.temperature_degc.is_some_and(|t| t >= HOT_DEGC));
    for (there, hazard) in [
        (gas, Hazard::ChlorineGas),
        (has(&[StepClass::Reductant]), Hazard::SulphurDioxide),
        (has(&[StepClass::Hypochlorite, StepClass::Alkali, StepClass::Acid]), Hazard::Corrosive),
        (has(&[StepClass::Hypochlorite, StepClass::Peroxide]), Hazard::Oxidiser),
        (hot, Hazard::HotSolution),
        (has(&[StepClass::Other]), Hazard::UnknownChemical),
        (open_tank, Hazard::OpenTank),
    ] {
        if there {
            hazards.push(hazard);
        }
    }
    let mut permits = vec![Permit::ChemicalHandling, Permit::LockOut, Permit::Discharge];
    let mut ppe = vec![Ppe::EyesAndFace, Ppe::Gloves, Ppe::BodyAndFeet, Ppe::ShowerTried];
    if gas || has(&[StepClass::Reductant]) {
        ppe.push(Ppe::GasDetector);
    }
    if open_tank {
        permits.push(Permit::OverTanks);
        ppe.push(Ppe::LifeJacketOrHarness);
    }
    Safety {
        isolation: vec![
            Isolation::FeedClosed,
            Isolation::FiltrateClosed,
            Isolation::DrivesLockedOut,
            Isolation::LoopSetApart,
            Isolation::VentsAndDrainsSet,
        ],
        preconditions: vec![
            Precondition::OthersCarryDemand,
            Precondition::ClearWaterLasts,
            Precondition::EquipmentFreeAndRinsed,
            Precondition::NeutralisationEmpty,
            Precondition::ChemicalsInStock,
            Precondition::PapersAtHand,
            Precondition::LastChemicalKnown,
        ],
        hazards,
        permits,
        ppe,
    }
}
