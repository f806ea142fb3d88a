//! Floor 6: what was agreed to be done. A work order is drafted with a recommendation or by
//! hand, approved, done and verified by people; [`apply`] is the list of what they may do from
//! where, [`step`] what the computer does with the orders of a train at a look. Knows nothing
//! of alarms. No order starts anything in the plant.

mod apply;
mod chemistry;
mod draft;
mod number;
mod order;
mod outcome;
mod plan;
mod refusal;
mod rinses;
mod safety;
mod step;
#[cfg(test)]
mod tests;

pub use apply::{Deed, OrderAct, PlanContext, apply, transitions};
pub use chemistry::{Conflict, ConflictKind, LastChemical, conflicts};
pub use draft::{ByHand, by_hand, draft};
pub use number::{number_of, spoken};
pub use order::{
    ActKind, Actuals, Annotation, CancelledWhy, Criterion, External, IntegrityTest, Note,
    OrderState, Outcome, PlannedStep, Role, SignOff, Task, WorkOrder,
};
pub use outcome::outcome;
pub use plan::{active_kg, check};
pub use refusal::{Reading, Refusal, RefusalWhy};
pub use safety::{Hazard, Isolation, Permit, Ppe, Precondition, Safety, safety};
pub use step::{Named, OrderChange, OrderLook, OrderTurn, step};
