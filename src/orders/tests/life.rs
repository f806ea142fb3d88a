use proptest::prelude::*;

use super::*;

/// What a look sees beside the orders.
#[derive(Clone, Debug, Default)]
struct Seen {
    recommendation: Option<Recommendation>,
    cleans: Vec<Clean>,
    runs: Vec<Run>,
    named: Vec<Named>,
}

/// Looks at an hour; numbers go on from `next`.
fn looks(orders: &[WorkOrder], hour: i64, seen: &Seen, next: &mut i64) -> Vec<OrderChange> {
    let look = OrderLook {
        train: &train(),
        orders,
        recommendation: seen.recommendation.as_ref(),
        cleans: &seen.cleans,
        runs: &seen.runs,
        named: &seen.named,
        last_chemical: None,
        as_of: at(hour),
    };
    step(&look, &mut || {
        *next += 1;
        *next
    })
}

fn one(order: &WorkOrder, hour: i64, seen: &Seen) -> Option<OrderChange> {
    let mut changes = looks(std::slice::from_ref(order), hour, seen, &mut 41);
    assert!(changes.len() <= 1, "{changes:?}");
    changes.pop()
}

fn advised(recommendation: Recommendation) -> Seen {
    Seen { recommendation: Some(recommendation), ..Seen::default() }
}

fn clean(from: i64, to: i64, origin: Origin) -> Seen {
    let clean = Clean { start: at(from), end: at(to), origin };
    Seen { cleans: vec![clean], ..Seen::default() }
}

#[test]
fn a_recommendation_opens_one_draft() {
    let seen = advised(recommendation("r1", 10));
    let opened = looks(&[], 10, &seen, &mut 40);
    assert_eq!((opened.len(), opened[0].turn), (1, OrderTurn::Opened));
    assert_eq!((opened[0].order.number, opened[0].order.state), (41, OrderState::Draft));
    let order = &opened[0].order;
    assert_eq!(one(order, 11, &seen), None, "nothing changed");
    // Rejected by a person, it is not drafted again for the same recommendation.
    let noted = Recommendation { work_order: Some(41), ..recommendation("r1", 10) };
    assert_eq!(looks(&[], 12, &advised(noted), &mut 41), []);
    let other = Recommendation { action: Action::Inspect, ..recommendation("r1", 10) };
    assert_eq!(looks(&[], 12, &advised(other), &mut 41), []);
    // What is done leaves room for the next.
    let next = looks(&[led_to(OrderState::Done)], 80, &advised(recommendation("r2", 80)), &mut 41);
    assert_eq!(next[0].order.number, 42);
}

#[test]
fn drafts_follow_and_agreed_orders_move_their_dates_alone() {
    let mut moved = recommendation("r2", 20);
    moved.clean_by = Some(Dates { p10: Some(at(250)), p50: None, p90: None });
    moved.steps.truncate(2);
    let seen = advised(moved);
    let change = one(&drafted(), 20, &seen).unwrap();
    assert_eq!(change.turn, OrderTurn::Updated);
    assert_eq!(change.order.needed_by, Some(at(250)));
    assert_eq!(change.order.steps.len(), 2);
    assert_eq!(change.order.recommendation.as_deref(), Some("r2"), "taken up, not raised again");
    let change = one(&led_to(OrderState::Approved), 20, &seen).unwrap();
    assert_eq!(change.order.needed_by, Some(at(250)));
    assert_eq!(change.order.steps, drafted().steps);
    assert_eq!(one(&led_to(OrderState::InProgress), 20, &seen), None);
}

#[test]
fn corrected_data_cancel_a_draft_and_annotate_what_was_agreed() {
    for (why, cancelled, note) in [
        (ClosedWhy::NoLongerHolds, CancelledWhy::NoLongerHolds, Note::NoLongerHolds),
        (ClosedWhy::Declined, CancelledWhy::Declined, Note::Declined),
    ] {
        let seen = advised(closed(why));
        let change = one(&drafted(), 20, &seen).unwrap();
        assert_eq!(change.turn, OrderTurn::Cancelled);
        assert_eq!(change.order.cancelled_why, Some(cancelled));
        use OrderState::*;
        for state in [Approved, Scheduled, InProgress, Waiting] {
            let change = one(&led_to(state), 20, &seen).unwrap();
            assert_eq!((change.turn, change.order.state), (OrderTurn::Annotated, state));
            assert_eq!(change.order.annotations[0].note, note);
            assert_eq!(one(&change.order, 21, &seen), None, "said once");
        }
    }
    let seen = advised(Recommendation { id: "r0".to_owned(), ..closed(ClosedWhy::NoLongerHolds) });
    assert_eq!(one(&drafted(), 20, &seen), None, "another recommendation's end");
}

#[test]
fn a_train_seen_cleaned_cancels_what_nobody_completed() {
    let seen = clean(12, 20, Origin::Inferred);
    let cancelled = |order: &WorkOrder, hour| {
        one(order, hour, &seen).is_some_and(|c| {
            assert_eq!(c.order.cancelled_why, Some(CancelledWhy::CleanedUnconfirmed));
            c.order.state == OrderState::Cancelled
        })
    };
    // The draft is of hour 10.
    assert!(!cancelled(&drafted(), 34));
    assert!(cancelled(&drafted(), 35));
    for state in [OrderState::Approved, OrderState::Scheduled] {
        assert!(!cancelled(&led_to(state), 44));
        assert!(cancelled(&led_to(state), 45));
    }
    let begun = one(&led_to(OrderState::InProgress), 60, &seen).unwrap().order;
    assert_eq!(begun.state, OrderState::InProgress);
    assert_eq!(begun.annotations[0].note, Note::SeenCleaned(Span::new(at(12), at(20))));
    assert_eq!(one(&drafted(), 60, &clean(1, 9, Origin::Inferred)), None, "cleaned before");
    assert_eq!(one(&drafted(), 60, &clean(55, 63, Origin::Inferred)), None, "not over yet");
}

#[test]
fn a_cleaning_that_names_the_order_completes_it() {
    let named = Named { cleaning: "c3".to_owned(), number: 41, actuals: all_done() };
    let seen = Seen { named: vec![named], ..clean(30, 38, Origin::Recorded("c3".to_owned())) };
    for state in OrderState::ALL.into_iter().filter(|s| s.is_open()) {
        let change = one(&led_to(state), 40, &seen).unwrap();
        assert_eq!((change.turn, change.order.state), (OrderTurn::Completed, OrderState::Done));
        assert_eq!(change.order.cleaning.as_deref(), Some("c3"));
        let unapproved =
            change.order.annotations.iter().any(|a| a.note == Note::DoneWithoutApproval);
        assert_eq!(unapproved, state == OrderState::Draft);
        assert_eq!(change.order.sign_offs, led_to(state).sign_offs, "the service signs nothing");
        assert_eq!(one(&change.order, 41, &seen), None);
    }
    let change = one(&led_to(OrderState::Cancelled), 40, &seen).unwrap();
    assert_eq!(change.order.state, OrderState::Cancelled);
    assert_eq!(change.order.annotations[0].note, Note::NamedAfterwards("c3".to_owned()));
}

#[test]
fn the_verdict_fills_the_outcome_once_it_is_known() {
    let mut done = led_to(OrderState::Done);
    done.outcome = None;
    let runs = |verdict| Seen { runs: vec![run(Origin::Inferred, verdict)], ..Seen::default() };
    assert_eq!(one(&done, 71, &runs(Verdict::Restored)), None);
    let change = one(&done, 72, &runs(Verdict::Restored)).unwrap();
    assert_eq!(change.turn, OrderTurn::OutcomeKnown);
    assert_eq!(change.order.outcome.as_ref().unwrap().verdict, Verdict::Restored);
    // Late data: before verification the verdict follows, after it a note is made.
    let later = one(&change.order, 90, &runs(Verdict::NotRestored)).unwrap().order;
    assert_eq!(later.outcome.unwrap().verdict, Verdict::NotRestored);
    let verified = led_to(OrderState::Verified);
    let noted = one(&verified, 90, &runs(Verdict::Restored)).unwrap().order;
    assert_eq!(noted.outcome, verified.outcome);
    assert_eq!(noted.annotations[0].note, Note::VerdictWouldBe(Verdict::Restored));
    // Another clean's run is none of its.
    let mut recorded = done.clone();
    recorded.cleaning = Some("c3".to_owned());
    let other = run(Origin::Recorded("c4".to_owned()), Verdict::Restored);
    assert_eq!(one(&recorded, 90, &Seen { runs: vec![other], ..Seen::default() }), None);
}

proptest! {
    #[test]
    fn a_train_has_one_open_order_and_begun_work_is_never_stopped(
        events in prop::collection::vec((0..10usize, 0..ActKind::ALL.len(), 1..30i64), 1..40)
    ) {
        let mut orders: Vec<WorkOrder> = Vec::new();
        let (mut number, mut hour, mut raised) = (40, 10, 0);
        let mut seen = Seen::default();
        for (what, kind, hours) in events {
            hour += hours;
            match what {
                0 | 1 => {
                    raised += 1;
                    seen.recommendation = Some(recommendation(&format!("r{raised}"), hour));
                }
                2 => if let Some(r) = seen.recommendation.as_mut() {
                    r.closed = Some(Closed { at: at(hour), why: ClosedWhy::NoLongerHolds });
                },
                3 => seen.cleans.push(Clean {
                    start: at(hour - 1), end: at(hour), origin: Origin::Inferred
                }),
                4 => seen.named.push(Named {
                    cleaning: format!("c{hour}"), number, actuals: all_done()
                }),
                _ => if let Some(order) = orders.last_mut()
                    && let Ok(next) = does(order, &good(ActKind::ALL[kind]))
                {
                    *order = next;
                },
            }
            let before = orders.clone();
            for change in looks(&orders, hour, &seen, &mut number) {
                match orders.iter_mut().find(|o| o.number == change.order.number) {
                    Some(order) => *order = change.order,
                    None => {
                        if let Some(r) = seen.recommendation.as_mut() {
                            r.work_order = Some(change.order.number);
                        }
                        orders.push(change.order);
                    }
                }
            }
            prop_assert!(orders.iter().filter(|o| o.state.is_open()).count() <= 1);
            for (was, is) in before.iter().zip(&orders) {
                prop_assert!(!was.state.is_started() || is.state != OrderState::Cancelled);
                prop_assert_eq!(&was.sign_offs, &is.sign_offs);
                prop_assert!(is.annotations.len() >= was.annotations.len());
                let over = !was.state.is_open() && was.state != OrderState::Done;
                prop_assert!(!over || was.state == is.state);
            }
            prop_assert_eq!(looks(&orders, hour, &seen, &mut number), vec![], "a look twice");
        }
    }
}
