//! An invented train and what the tests of orders share.

mod chemistry;
mod done;
mod life;
mod states;

use super::*;
use crate::advice::{
    Action, AdvisedStep, ClearsWhen, Closed, ClosedWhy, Recommendation, StepsFrom, Urgency, Why,
};
use crate::analysis::{Clean, Dates, Origin, Run, Verdict};
use crate::base::{DAY_US, HOUR_US, Instant, Span, TrainId};
use crate::plant::{
    Dated, Drive, Filtration, HoldLimit, Limits, MembraneLimits, Phase, Procedure, Step, StepClass,
    Train, VerifiedRinse,
};

fn at(hour: i64) -> Instant {
    Instant::from_micros(hour * HOUR_US)
}

fn train() -> Train {
    Train {
        id: TrainId::new("uf-1"),
        name: "UF train 1".to_owned(),
        asset: Some("MT-0101".to_owned()),
        area_m2: vec![Dated { from: at(0), value: 3200.0 }],
        filtration: Filtration::DeadEnd,
        drive: Drive::Pressurised,
        as_new_permeability: None,
        after_clean_permeability: None,
        drinking_water: true,
        clean_duration_us: 8 * HOUR_US,
        clean_notice_us: DAY_US,
        tmp_floor_pa: 3e3,
        tmp_accuracy_pa: 1e3,
        signals: Vec::new(),
        limits: Limits {
            permeability_loss: HoldLimit { advisory: 0.2, clean: 0.3 },
            tmp_pa: HoldLimit { advisory: 9e4, clean: 1.2e5 },
            on_delay_us: 6 * HOUR_US,
            deadband: 0.02,
            planning_horizon_us: 14 * DAY_US,
        },
        membrane_limits: Some(MembraneLimits {
            ph: Some((2.0, 11.0)),
            temperature_degc: Some(40.0),
            free_chlorine_mg_l: Some(500.0),
        }),
        procedures: Vec::new(),
        integrity: None,
    }
}

fn chemical(class: StepClass) -> Step {
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

fn rinse(ph: (f64, f64), chlorine: Option<f64>) -> Step {
    let check = VerifiedRinse {
        ph_range: Some(ph),
        free_chlorine_max_mg_l: chlorine,
        ph: None,
        free_chlorine_mg_l: None,
        by: None,
    };
    Step { verified: Some(check), ..chemical(StepClass::Rinse) }
}

/// A rinse as planned.
fn checked() -> Step {
    rinse((6.0, 9.0), Some(0.5))
}

/// A rinse as read.
fn read(ph: Option<f64>, chlorine: Option<f64>, by: &str) -> Step {
    let reading = VerifiedRinse {
        ph_range: None,
        free_chlorine_max_mg_l: None,
        ph,
        free_chlorine_mg_l: chlorine,
        by: Some(by.to_owned()),
    };
    Step { verified: Some(reading), ..chemical(StepClass::Rinse) }
}

fn passed() -> Step {
    read(Some(7.2), Some(0.1), "shift A")
}

fn last(class: StepClass) -> LastChemical {
    LastChemical { classes: vec![class], at: at(0) }
}

fn recommendation(id: &str, raised: i64) -> Recommendation {
    let step = |class, why| AdvisedStep { step: chemical(class), why };
    Recommendation {
        id: id.to_owned(),
        train: train().id,
        action: Action::CleanInPlace,
        urgency: Urgency::ThisWeek,
        raised: at(raised),
        as_of: at(raised),
        clean_by: Some(Dates { p10: Some(at(300)), p50: Some(at(400)), p90: Some(at(500)) }),
        start_by: Some(at(268)),
        evidence: Vec::new(),
        clears_when: ClearsWhen::CleanedOrLimitFar,
        steps: vec![
            step(StepClass::Hypochlorite, Why::OrganicFouling),
            step(StepClass::Rinse, Why::KeepsApart),
            step(StepClass::Acid, Why::MineralFouling),
            step(StepClass::Rinse, Why::BeforeReturn),
        ],
        steps_from: StepsFrom::GeneralPractice,
        decisions: Vec::new(),
        silent_until: None,
        work_order: None,
        closed: None,
    }
}

fn closed(why: ClosedWhy) -> Recommendation {
    Recommendation { closed: Some(Closed { at: at(20), why }), ..recommendation("r1", 10) }
}

fn actuals(steps: Vec<Step>) -> Actuals {
    Actuals {
        start: at(30),
        end: at(38),
        steps,
        waste_m3: Some(24.0),
        staff_hours: Some(16.0),
        notes: None,
    }
}

fn all_done() -> Actuals {
    let steps = [StepClass::Hypochlorite, StepClass::Acid].map(chemical);
    let [first, second] = steps;
    actuals(vec![first, passed(), second, passed()])
}

fn run(origin: Origin, verdict: Verdict) -> Run {
    Run {
        train: train().id,
        start: at(38),
        clean_start: at(30),
        origin,
        before: None,
        after: None,
        best: None,
        verdict,
        verdict_known: Some(at(72)),
        slope_1_m_per_m: None,
    }
}

fn drafted() -> WorkOrder {
    draft(&train(), &recommendation("r1", 10), None, 41, at(10))
}

fn act(deed: Deed) -> OrderAct {
    OrderAct { by: "shift A".to_owned(), reason: Some("as talked over".to_owned()), deed }
}

fn test_passed() -> IntegrityTest {
    IntegrityTest { passed: true, at: at(39), by: "shift A".to_owned() }
}

/// A deed of a kind that meets its terms on [`drafted`] at hour 100.
fn good(kind: ActKind) -> OrderAct {
    act(match kind {
        ActKind::Approve => Deed::Approve,
        ActKind::Schedule => Deed::Schedule { window: Span::new(at(110), at(118)) },
        ActKind::Start => Deed::Start { at: None },
        ActKind::Wait => Deed::Wait,
        ActKind::Complete => Deed::Complete { actuals: all_done() },
        ActKind::Verify => Deed::Verify { integrity_test: Some(test_passed()) },
        ActKind::Reject => Deed::Reject,
        ActKind::Cancel => Deed::Cancel,
    })
}

/// Does an act at hour 100 with nothing left in the train.
fn does(order: &WorkOrder, act: &OrderAct) -> Result<WorkOrder, Refusal> {
    let train = train();
    apply(order, act, &PlanContext { train: &train, last_chemical: None }, at(100))
}

/// The draft led to a state by its shortest way, its verdict known once done.
fn led_to(state: OrderState) -> WorkOrder {
    use ActKind::*;
    let way: &[ActKind] = match state {
        OrderState::Draft => &[],
        OrderState::Approved => &[Approve],
        OrderState::Scheduled => &[Approve, Schedule],
        OrderState::InProgress => &[Approve, Start],
        OrderState::Waiting => &[Approve, Start, Wait],
        OrderState::Done => &[Approve, Start, Complete],
        OrderState::Verified => &[Approve, Start, Complete, Verify],
        OrderState::Rejected => &[Reject],
        OrderState::Cancelled => &[Cancel],
    };
    let mut order = drafted();
    for kind in way {
        order = does(&order, &good(*kind)).unwrap();
        if *kind == Complete {
            order.outcome = outcome(&run(Origin::Inferred, Verdict::NotRestored), at(72));
        }
    }
    assert_eq!(order.state, state);
    order
}
