use StepClass::*;

use super::*;

fn complete(done: Actuals) -> Result<WorkOrder, Refusal> {
    does(&led_to(OrderState::InProgress), &act(Deed::Complete { actuals: done }))
}

#[test]
fn completing_wants_the_readings_of_each_rinse() {
    let with = |first: Step, second: Step| {
        complete(actuals(vec![chemical(Hypochlorite), first, chemical(Acid), second]))
    };
    assert_eq!(with(passed(), passed()).unwrap().state, OrderState::Done);
    use Reading::*;
    let missing = RefusalWhy::ReadingMissing;
    let outside =
        |reading, value, low, high| RefusalWhy::ReadingOutside { reading, value, low, high };
    for (bad, field, why) in [
        (chemical(Rinse), "ph", missing(Ph)),
        (read(None, Some(0.1), "shift A"), "ph", missing(Ph)),
        (read(Some(7.0), None, "shift A"), "free_chlorine", missing(FreeChlorine)),
        (read(Some(7.0), Some(0.1), " "), "by", missing(By)),
        (read(Some(7.0), Some(0.1), "washbell"), "by", missing(By)),
        (read(Some(9.1), Some(0.1), "shift A"), "ph", outside(Ph, 9.1, 6.0, 9.0)),
        (
            read(Some(7.0), Some(0.6), "shift A"),
            "free_chlorine",
            outside(FreeChlorine, 0.6, 0.0, 0.5),
        ),
    ] {
        let refused = with(bad.clone(), passed()).unwrap_err();
        assert_eq!(refused.pointer, format!("/actuals/steps/1/verified/{field}"));
        assert_eq!(refused.why, why);
        let refused = with(passed(), bad).unwrap_err();
        assert_eq!(refused.pointer, format!("/actuals/steps/3/verified/{field}"));
        assert_eq!(refused.why, why);
    }
}

#[test]
fn a_record_cannot_bring_its_own_limits() {
    let mut wide = read(Some(9.5), Some(3.0), "shift A");
    if let Some(v) = wide.verified.as_mut() {
        v.ph_range = Some((0.0, 14.0));
        v.free_chlorine_max_mg_l = Some(100.0);
    }
    let steps = vec![chemical(Hypochlorite), wide, chemical(Acid), passed()];
    assert!(matches!(complete(actuals(steps)).unwrap_err().why, RefusalWhy::ReadingOutside { .. }));
}

#[test]
fn steps_done_otherwise_are_told_and_still_kept_apart() {
    assert_eq!(complete(actuals(vec![])).unwrap_err().why, RefusalWhy::NoStepsDone);
    let half = vec![chemical(Hypochlorite), passed()];
    let refused = complete(actuals(half.clone())).unwrap_err();
    assert_eq!(
        (refused.pointer.as_str(), refused.why),
        ("/actuals/notes", RefusalWhy::DoneOtherwise)
    );
    let mut told = actuals(half);
    told.notes = Some("acid pump failed".to_owned());
    assert!(complete(told).is_ok());
    // One more rinse needs no word; the first may fail where the second passes.
    let twice = vec![
        chemical(Hypochlorite),
        read(Some(10.5), Some(3.0), "shift A"),
        passed(),
        chemical(Acid),
        passed(),
    ];
    assert!(complete(actuals(twice)).is_ok());
    let bare = vec![chemical(Hypochlorite), chemical(Acid), passed()];
    let refused = complete(actuals(bare)).unwrap_err();
    assert!(matches!(refused.why, RefusalWhy::Conflict(c) if c.kind == ConflictKind::ChlorineGas));
    assert_eq!(refused.pointer, "/actuals/steps/1");
    let unrinsed = vec![chemical(Hypochlorite), passed(), chemical(Acid)];
    assert_eq!(complete(actuals(unrinsed)).unwrap_err().why, RefusalWhy::NotRinsed(Acid));
}

#[test]
fn the_last_chemical_counts_when_approving_starting_and_completing() {
    let train = train();
    let acid = last(Acid);
    let context = PlanContext { train: &train, last_chemical: Some(&acid) };
    let refused =
        |order: &WorkOrder, kind| apply(order, &good(kind), &context, at(100)).unwrap_err().why;
    let clash = |why| matches!(why, RefusalWhy::Conflict(c) if c.from_step.is_none());
    assert!(clash(refused(&drafted(), ActKind::Approve)));
    assert!(clash(refused(&led_to(OrderState::Approved), ActKind::Start)));
    assert!(clash(refused(&led_to(OrderState::InProgress), ActKind::Complete)));
    // While work waited, the train may have seen another chemical.
    assert!(clash(refused(&led_to(OrderState::Waiting), ActKind::Start)));
    // A draft that knows of it puts a rinse in front.
    let order = draft(&train, &recommendation("r1", 10), Some(&acid), 41, at(10));
    assert_eq!(order.steps.len(), 5);
    assert_eq!(order.steps[0].why, Some(Why::KeepsApart));
    assert!(apply(&order, &good(ActKind::Approve), &context, at(100)).is_ok());
}

#[test]
fn a_draft_holds_what_a_planner_needs() {
    let order = drafted();
    assert_eq!((order.number, order.asset.as_deref()), (41, Some("MT-0101")));
    assert_eq!(order.location, "UF train 1");
    assert_eq!((order.needed_by, order.start_by), (Some(at(300)), Some(at(268))));
    assert_eq!(order.hours_out, 8.0);
    assert!(
        order.steps.iter().filter(|s| s.step.class == Rinse).all(|s| s.step.verified.is_some())
    );
    assert!(order.safety.hazards.contains(&Hazard::ChlorineGas));
    assert!(!order.safety.hazards.contains(&Hazard::OpenTank));
    assert!(order.acceptance.contains(&Criterion::IntegrityTest));
    assert!(order.sign_offs.is_empty(), "nobody signed it");
    let hot = Step { temperature_degc: Some(35.0), ..chemical(Reductant) };
    let tank = Train { drive: Drive::Submerged, ..train() };
    let found = safety(&tank, &[hot]);
    for hazard in [Hazard::HotSolution, Hazard::OpenTank, Hazard::SulphurDioxide] {
        assert!(found.hazards.contains(&hazard), "{hazard:?}");
    }
    assert!(found.permits.contains(&Permit::OverTanks));
}

#[test]
fn by_hand_takes_the_sites_procedure_or_the_plan_as_given() {
    let site = Procedure {
        kind: Phase::CleanInPlace,
        revision: Some("7".to_owned()),
        steps: vec![Step {
            concentration: Some("0.1 %".to_owned()),
            volume_m3: Some(12.0),
            ..chemical(Alkali)
        }],
    };
    let train = Train { procedures: vec![site], ..train() };
    let ask = |steps| ByHand {
        task: Task::CleanInPlace,
        by: "shift A".to_owned(),
        reason: Some("before the dry weeks".to_owned()),
        steps,
        needed_by: Some(at(200)),
        window: None,
    };
    let order = by_hand(&train, ask(None), None, None, 7, at(1)).unwrap();
    assert_eq!(order.procedure_revision.as_deref(), Some("7"));
    assert_eq!(order.steps.len(), 2, "a rinse before return is added");
    assert_eq!(order.steps[0].active_kg, Some(12.0));
    assert_eq!(order.start_by, Some(at(200 - 32)));
    let bad = vec![chemical(Hypochlorite), chemical(Acid)];
    let order = by_hand(&train, ask(Some(bad)), None, None, 7, at(1)).unwrap();
    assert_eq!(does(&order, &good(ActKind::Approve)).unwrap_err().pointer, "/steps/1");
    let open = by_hand(&train, ask(None), Some(6), None, 7, at(1)).unwrap_err();
    assert_eq!(open.why, RefusalWhy::AnotherOpen(6));
    let nobody = ByHand { by: String::new(), ..ask(None) };
    assert_eq!(by_hand(&train, nobody, None, None, 7, at(1)).unwrap_err().pointer, "/by");
}
