//! Floor 7: what is said, and how. View structs and pure functions from domain to view, so that
//! API, page, commands and deliveries say the same thing: units, rounding, offsets and wording
//! are decided here and nowhere else.

mod alarm_view;
mod alarm_words;
mod cleaning_view;
mod cycles_view;
mod fouling_parts;
mod fouling_view;
mod list;
mod order_parts;
mod order_words;
mod permeability_csv;
mod permeability_view;
mod plant_view;
mod problem;
mod reason;
mod receipt_view;
mod recommendation_view;
mod refused;
mod sentence;
mod step_view;
mod time;
mod train_view;
mod units;
mod work_order_view;

#[cfg(test)]
mod fixture;

pub use alarm_view::{AlarmActView, AlarmView, alarm_view};
pub use alarm_words::{alarm_state_words, conflict_words, response_words};
pub use cleaning_view::{
    CleaningFigures, CleaningView, LevelView, RecordedCleaning, inferred_cleaning, inferred_id,
    recorded_cleaning,
};
pub use cycles_view::{CycleView, CyclesView, cycles_view};
pub use fouling_parts::{PartView, ResistancesView};
pub use fouling_view::{
    BaselineView, BaselinesView, ForecastDates, ForecastView, FoulingCase, FoulingView, TrendView,
    fouling_view,
};
pub use list::Page;
pub use order_parts::{
    ActualsView, AnnotationView, CancelledView, ExternalView, IntegrityTestView, OrderStepView,
    SignOffView, WindowView,
};
pub use order_words::{
    criterion_words, hazard_words, isolation_words, note_words, permit_words, ppe_words,
    precondition_words, task_words,
};
pub use permeability_csv::permeability_csv;
pub use permeability_view::{
    PermeabilityPoint, PermeabilityView, SeriesStep, SeriesUnits, day_points, hour_points,
    minute_points, permeability_view,
};
pub use plant_view::{PlantView, ShortTrain, SourceView, plant_view};
pub use problem::{Problem, ProblemError, ProblemKind};
pub use reason::{
    action_code_words, action_words, baseline_words, caution_words, clears_when_words,
    closed_why_words, finding_words, no_dates_words, phase_code, phase_words, reason_words,
    reasons_words, role_code, role_words, step_class_code, step_class_words, urgency_words,
    verdict_words, why_words,
};
pub use receipt_view::{
    ClockView, CountsView, ReceiptView, RejectionView, receipt_text, receipt_view,
};
pub use recommendation_view::{
    ClosedView, DatesView, DecisionView, EvidenceView, RecommendationView, evidence_view,
    recommendation_view,
};
pub use step_view::{StepView, VerifiedView, step_view};
pub use time::{PlantTime, day_words, duration_text, duration_words, moment_words};
pub use train_view::{
    DistrustedView, LimitView, LimitsView, LossView, StandingView, TrainCase, TrainView,
    clean_by_order, train_view,
};
pub use units::{Shown, UnitCodes, UnitSystem, Units, ValueView, unit_maps};
pub use work_order_view::{OrderResultView, WorkOrderView, work_order_view};
