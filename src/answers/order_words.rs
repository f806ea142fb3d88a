//! Words for what work orders only name: what a crew reads at the train.

use super::reason::verdict_words;
use super::time::moment_words;
use crate::base::{Instant, Zone};
use crate::orders::{
    CancelledWhy, Criterion, Hazard, Isolation, Note, Permit, Ppe, Precondition, Role, Task,
};

/// What is to be done.
pub const fn task_words(task: Task) -> &'static str {
    match task {
        Task::CleanInPlace => "Clean the train in place.",
        Task::MaintenanceClean => "Give the train a maintenance clean.",
    }
}

/// What the work is accepted by.
pub const fn criterion_words(criterion: Criterion) -> &'static str {
    match criterion {
        Criterion::Restored => {
            "At least 95 % of the best permeability after a clean, over 24 to 48 hours of \
             filtration: the verdict restored."
        }
        Criterion::RinsesPass => {
            "Every rinse that keeps chemicals apart, and the last, passes its checks by readings \
             that somebody signs."
        }
        Criterion::IntegrityTest => {
            "An integrity test is passed before the train returns to service."
        }
    }
}

/// How the train is set apart before the first chemical.
pub const fn isolation_words(isolation: Isolation) -> &'static str {
    match isolation {
        Isolation::FeedClosed => {
            "Feed and concentrate valves are closed and locked, and shown to hold."
        }
        Isolation::FiltrateClosed => {
            "The filtrate valve is closed and locked, and shown to hold: no chemical reaches \
             treated water."
        }
        Isolation::DrivesLockedOut => {
            "Pumps and air of the train are locked out and tagged; tried, and do not start."
        }
        Isolation::LoopSetApart => {
            "The cleaning loop is set apart from every other train, tank and chemical."
        }
        Isolation::VentsAndDrainsSet => {
            "Vents and drains are open to where the procedure says, and nowhere else."
        }
    }
}

/// What must be so before work starts.
pub const fn precondition_words(precondition: Precondition) -> &'static str {
    match precondition {
        Precondition::OthersCarryDemand => {
            "The other trains carry the demand without this one, and none of them is due out."
        }
        Precondition::ClearWaterLasts => "The clear-water level lasts for the time out.",
        Precondition::EquipmentFreeAndRinsed => {
            "No other train is on the cleaning equipment, and it is rinsed of what was in it last."
        }
        Precondition::NeutralisationEmpty => {
            "The neutralisation tank is empty and holds the whole clean."
        }
        Precondition::ChemicalsInStock => {
            "Chemicals are in stock and in date, and their strength is read from the label."
        }
        Precondition::PapersAtHand => {
            "Data sheets of the chemicals, the membrane's limits and the site's procedure are at \
             hand."
        }
        Precondition::LastChemicalKnown => "Which chemical the train saw last is known.",
    }
}

/// What can hurt.
pub const fn hazard_words(hazard: Hazard) -> &'static str {
    match hazard {
        Hazard::ChlorineGas => {
            "Hypochlorite and acid make chlorine gas: also in heels, dead legs, tanks and sumps."
        }
        Hazard::SulphurDioxide => "Sulphite in acid gives off sulphur dioxide.",
        Hazard::Corrosive => "Caustic, hypochlorite and acid burn skin and eyes.",
        Hazard::Oxidiser => "An oxidiser: keep it from organic matter and reductants.",
        Hazard::HotSolution => "The solution is hot.",
        Hazard::UnknownChemical => {
            "A chemical of unknown class: treat it as one that must meet no other."
        }
        Hazard::Pressure => "Pipes and vessels are under pressure until shown otherwise.",
        Hazard::OpenTank => "Work over an open tank: drowning, falls.",
        Hazard::Waste => {
            "Waste that was not neutralised harms the works and the stream that receive it."
        }
    }
}

/// What must be signed elsewhere.
pub const fn permit_words(permit: Permit) -> &'static str {
    match permit {
        Permit::ChemicalHandling => "Handling of chemicals.",
        Permit::LockOut => "Lock-out and tag-out.",
        Permit::OverTanks => {
            "Work over open tanks. Entry into one is another permit still, and no part of this task."
        }
        Permit::Discharge => {
            "Discharge of the waste within the consent: pH, free chlorine, oxygen demand."
        }
    }
}

/// What protects people.
pub const fn ppe_words(ppe: Ppe) -> &'static str {
    match ppe {
        Ppe::EyesAndFace => "Chemical goggles and a face shield.",
        Ppe::Gloves => "Gloves that the data sheet names for the chemical.",
        Ppe::BodyAndFeet => "Apron or suit, and boots.",
        Ppe::GasDetector => {
            "A gas detector, and breathing protection as the site's procedure says."
        }
        Ppe::ShowerTried => "Emergency shower and eye wash, tried today.",
        Ppe::LifeJacketOrHarness => "A life jacket or harness.",
    }
}

/// The code of a role.
pub const fn sign_off_role_code(role: Role) -> &'static str {
    match role {
        Role::Operator => "operator",
        Role::ShiftEngineer => "shift_engineer",
        Role::Process => "process",
    }
}

/// The code of why an order was cancelled.
pub(super) const fn cancelled_why_code(why: &CancelledWhy) -> &'static str {
    match why {
        CancelledWhy::Person(_) => "person",
        CancelledWhy::NoLongerHolds => "no_longer_holds",
        CancelledWhy::Declined => "declined",
        CancelledWhy::CleanedUnconfirmed => "cleaned_unconfirmed",
    }
}

/// Why an order was cancelled; a person's own words where one did.
pub fn cancelled_why_words(why: &CancelledWhy) -> &str {
    match why {
        CancelledWhy::Person(said) => said,
        CancelledWhy::NoLongerHolds => "What the draft stood on no longer holds.",
        CancelledWhy::Declined => {
            "The recommendation was declined before anybody approved the draft."
        }
        CancelledWhy::CleanedUnconfirmed => {
            "The train was seen cleaned, and nobody completed the order."
        }
    }
}

/// What happened around an order without changing what was agreed.
pub fn note_words(zone: &Zone, note: &Note, near: Instant) -> String {
    match note {
        Note::NoLongerHolds => "By data that came or were corrected since, the reason for this \
                                order no longer holds. It goes on: whether to stop is for people \
                                to say."
            .to_owned(),
        Note::Declined => "The recommendation was declined; the order goes on until somebody \
                           cancels it."
            .to_owned(),
        Note::SeenCleaned(span) => format!(
            "The train was seen cleaned from {} to {} while the order was open.",
            moment_words(zone, span.from, near),
            moment_words(zone, span.to, near)
        ),
        Note::CompletedByCleaning(id) => {
            format!("Completed by the recorded cleaning {id}, which names the order.")
        }
        Note::DoneWithoutApproval => {
            "The work was recorded as done before anybody had approved it.".to_owned()
        }
        Note::NamedAfterwards(id) => {
            format!("The recorded cleaning {id} names this order, which was closed by then.")
        }
        Note::VerdictWouldBe(verdict) => format!(
            "By data that came or were corrected since, the verdict would now be another: {}",
            verdict_words(*verdict)
        ),
    }
}
