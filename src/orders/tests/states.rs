use proptest::prelude::*;

use super::*;

/// The transitions as the interface fixes them, written out a second time.
const ALLOWED: [(OrderState, &[OrderState]); 9] = {
    use OrderState::*;
    [
        (Draft, &[Approved, Rejected, Cancelled]),
        (Approved, &[Scheduled, InProgress, Cancelled]),
        (Scheduled, &[InProgress, Waiting, Cancelled]),
        (InProgress, &[Waiting, Done]),
        (Waiting, &[InProgress, Cancelled]),
        (Done, &[Verified]),
        (Verified, &[]),
        (Rejected, &[]),
        (Cancelled, &[]),
    ]
};

#[test]
fn every_state_meets_every_act() {
    for (from, allowed) in ALLOWED {
        let order = led_to(from);
        for kind in ActKind::ALL {
            let mut act = good(kind);
            act.by = "shift B".to_owned();
            let result = does(&order, &act);
            if allowed.contains(&kind.leads_to()) {
                let next = result.unwrap();
                assert_eq!(next.state, kind.leads_to(), "{kind:?} from {from:?}");
                let signed = next.sign_offs.last().unwrap();
                assert_eq!((signed.act, signed.by.as_str()), (kind, "shift B"));
                assert_eq!(signed.role, kind.role());
            } else {
                let why = result.unwrap_err().why;
                assert_eq!(why, RefusalWhy::NotFrom { state: from, act: kind });
                let text = why.to_string();
                for allowed in transitions(from) {
                    assert!(text.contains(allowed.code()), "{text}");
                }
            }
        }
    }
}

#[test]
fn said_twice_by_the_same_person_changes_nothing() {
    for (kind, state) in [
        (ActKind::Approve, OrderState::Approved),
        (ActKind::Schedule, OrderState::Scheduled),
        (ActKind::Complete, OrderState::Done),
        (ActKind::Verify, OrderState::Verified),
        (ActKind::Cancel, OrderState::Cancelled),
    ] {
        let order = led_to(state);
        assert_eq!(does(&order, &good(kind)).unwrap(), order);
    }
    let other = act(Deed::Schedule { window: Span::new(at(120), at(128)) });
    assert!(does(&led_to(OrderState::Scheduled), &other).is_err());
}

#[test]
fn a_sign_off_is_a_persons_and_reasons_are_given() {
    for kind in ActKind::ALL {
        for by in ["", " ", "washbell"] {
            let unsigned = OrderAct { by: by.to_owned(), ..good(kind) };
            let refused = does(&drafted(), &unsigned).unwrap_err();
            assert_eq!((refused.pointer.as_str(), &refused.why), ("/by", &RefusalWhy::NeedsPerson));
        }
    }
    for (from, kind) in [
        (OrderState::Draft, ActKind::Reject),
        (OrderState::Draft, ActKind::Cancel),
        (OrderState::InProgress, ActKind::Wait),
    ] {
        let silent = OrderAct { reason: None, ..good(kind) };
        assert_eq!(does(&led_to(from), &silent).unwrap_err().pointer, "/reason");
    }
}

#[test]
fn times_make_sense() {
    let past = act(Deed::Schedule { window: Span::new(at(80), at(90)) });
    assert_eq!(does(&led_to(OrderState::Approved), &past).unwrap_err().why, RefusalWhy::BadWindow);
    let ahead = act(Deed::Start { at: Some(at(101)) });
    assert_eq!(does(&led_to(OrderState::Approved), &ahead).unwrap_err().why, RefusalWhy::BadTimes);
    let mut done = all_done();
    done.end = done.start;
    let complete = act(Deed::Complete { actuals: done });
    let refused = does(&led_to(OrderState::InProgress), &complete).unwrap_err();
    assert_eq!(refused.pointer, "/actuals/end");
}

#[test]
fn verifying_waits_for_the_verdict_and_wants_the_integrity_test() {
    let verify = |test| act(Deed::Verify { integrity_test: test });
    let why = |order: &WorkOrder, test| does(order, &verify(test)).unwrap_err().why;
    let done = led_to(OrderState::Done);
    let mut early = done.clone();
    early.outcome = None;
    assert_eq!(why(&early, Some(test_passed())), RefusalWhy::VerdictNotKnown);
    assert_eq!(why(&done, None), RefusalWhy::IntegrityTestMissing);
    let before = IntegrityTest { at: at(29), ..test_passed() };
    assert_eq!(why(&done, Some(before)), RefusalWhy::IntegrityTestMissing);
    let failed = IntegrityTest { passed: false, ..test_passed() };
    assert_eq!(why(&done, Some(failed)), RefusalWhy::IntegrityTestFailed);
    // A poor verdict is acknowledged, not hidden.
    let verified = does(&done, &verify(Some(test_passed()))).unwrap();
    assert_eq!(verified.outcome.unwrap().verdict, Verdict::NotRestored);
    let river = Train { drinking_water: false, ..train() };
    let context = PlanContext { train: &river, last_chemical: None };
    assert!(apply(&done, &verify(None), &context, at(100)).is_ok());
}

#[test]
fn an_order_survives_the_store() {
    for state in OrderState::ALL {
        let order = led_to(state);
        let text = serde_json::to_string(&order).unwrap();
        assert_eq!(serde_json::from_str::<WorkOrder>(&text).unwrap(), order);
        assert_eq!(OrderState::from_code(state.code()), Some(state));
    }
}

proptest! {
    #[test]
    fn no_sequence_of_acts_skips_a_step(kinds in prop::collection::vec(0..ActKind::ALL.len(), 1..25)) {
        let mut order = drafted();
        for (n, k) in kinds.into_iter().enumerate() {
            let kind = ActKind::ALL[k];
            let mut act = good(kind);
            act.by = format!("Person {n}");
            if let Ok(next) = does(&order, &act) {
                let allowed = ALLOWED.iter().find(|(s, _)| *s == order.state).unwrap().1;
                prop_assert!(allowed.contains(&next.state));
                prop_assert_eq!(next.sign_offs.len(), order.sign_offs.len() + 1);
                order = next;
                if order.state == OrderState::Done {
                    order.outcome = outcome(&run(Origin::Inferred, Verdict::Restored), at(72));
                }
            }
            let did = |kind| order.sign_offs.iter().any(|s| s.act == kind);
            if order.state == OrderState::Verified {
                prop_assert!(did(ActKind::Complete) && order.integrity_test.is_some());
            }
            if matches!(order.state, OrderState::InProgress | OrderState::Done) {
                prop_assert!(did(ActKind::Approve) && did(ActKind::Start));
            }
            prop_assert_eq!(order.actuals.is_some(), did(ActKind::Complete));
            prop_assert_eq!(order.cancelled_why.is_some(), order.state == OrderState::Cancelled);
            prop_assert_eq!(order.rejected_why.is_some(), order.state == OrderState::Rejected);
        }
    }
}
