use proptest::prelude::*;

use super::AlarmState::*;
use super::*;
use crate::analysis::{Finding, FindingKind, LimitKind, Origin, Run, Standing, Verdict};
use crate::base::{HOUR_US, Instant, SourceId, TrainId};
use crate::plant::{Phase, StepClass};

fn at(hour: i64) -> Instant {
    Instant::from_micros(hour * HOUR_US)
}

fn train() -> TrainId {
    TrainId::new("uf-1")
}

fn condition(kind: AlarmKind) -> Condition {
    let mut c = Condition::integrity(&train(), "t1");
    c.kind = kind;
    c
}

fn look(hour: i64) -> Look<'static> {
    let scope = Scope { kinds: &AlarmKind::ALL, train: None, source: None };
    Look { scope, as_of: at(hour), now: at(hour) }
}

fn run(alarms: &[Alarm], conditions: &[Condition], hour: i64) -> Vec<AlarmChange> {
    let mut ids = 0;
    step(alarms, conditions, &look(hour), &mut || {
        ids += 1;
        format!("a{hour}-{ids}")
    })
}

/// A clean-limit alarm in a state, as its own history would leave it at hour 2; shelved to 10.
fn in_state(state: AlarmState) -> Alarm {
    let raised = run(&[], &[condition(AlarmKind::CleanLimit)], 1).remove(0).alarm;
    let mut quiet = condition(AlarmKind::CleanLimit);
    let withheld = |c: &mut Condition, w| c.withheld = Some(w);
    match state {
        Unacknowledged => raised,
        Acknowledged => acknowledge(&raised, "shift A", at(2)).unwrap(),
        ReturnedUnacknowledged => run(&[raised], &[], 2).remove(0).alarm,
        Shelved => shelve(&raised, "shift A", at(10), "clean is booked", at(2)).unwrap(),
        SuppressedByDesign => {
            withheld(&mut quiet, Withheld::InClean);
            run(&[raised], &[quiet], 2).remove(0).alarm
        }
        OutOfService => {
            withheld(&mut quiet, Withheld::OutOfService);
            run(&[raised], &[quiet], 2).remove(0).alarm
        }
        Normal => {
            let known = acknowledge(&raised, "shift A", at(2)).unwrap();
            run(&[known], &[], 2).remove(0).alarm
        }
    }
}

#[test]
fn every_state_meets_every_look() {
    let plain = condition(AlarmKind::CleanLimit);
    let mut clean = plain.clone();
    clean.withheld = Some(Withheld::InClean);
    let mut out = plain.clone();
    out.withheld = Some(Withheld::OutOfService);
    // From, then: stands, stands in a clean, stands out of service, gone; hour 3, then hour 11
    // when the shelf is over.
    let table = [
        (
            Unacknowledged,
            3,
            [Unacknowledged, SuppressedByDesign, OutOfService, ReturnedUnacknowledged],
        ),
        (Acknowledged, 3, [Acknowledged, SuppressedByDesign, OutOfService, Normal]),
        (
            ReturnedUnacknowledged,
            3,
            [Unacknowledged, SuppressedByDesign, OutOfService, ReturnedUnacknowledged],
        ),
        (Shelved, 3, [Shelved, Shelved, Shelved, Shelved]),
        (Shelved, 11, [Unacknowledged, SuppressedByDesign, OutOfService, Normal]),
        (SuppressedByDesign, 3, [Unacknowledged, SuppressedByDesign, OutOfService, Normal]),
        (OutOfService, 3, [Unacknowledged, SuppressedByDesign, OutOfService, Normal]),
    ];
    for (from, hour, wanted) in table {
        let looks = [vec![plain.clone()], vec![clean.clone()], vec![out.clone()], vec![]];
        for (conditions, wanted) in looks.iter().zip(wanted) {
            let alarm = in_state(from);
            assert_eq!(alarm.state, from);
            let changes = run(std::slice::from_ref(&alarm), conditions, hour);
            assert!(changes.len() <= 1, "{from:?} {conditions:?}");
            let after = changes.first().map_or(alarm.state, |c| c.alarm.state);
            assert_eq!(after, wanted, "{from:?} at {hour} with {conditions:?}");
        }
    }
    // What is over is not looked at again: its condition is a new alarm.
    let again = run(&[in_state(Normal)], &[plain], 3);
    assert_eq!((again.len(), again[0].turn), (1, Turn::Raised));
}

#[test]
fn every_state_meets_every_act() {
    let table = [
        (Unacknowledged, Some(Acknowledged), Some(Shelved)),
        (Acknowledged, None, Some(Shelved)),
        (ReturnedUnacknowledged, Some(Normal), None),
        (Shelved, None, Some(Shelved)),
        (SuppressedByDesign, None, None),
        (OutOfService, None, None),
        (Normal, None, None),
    ];
    assert_eq!(table.len(), AlarmState::ALL.len());
    for (from, acknowledged, shelved) in table {
        let alarm = in_state(from);
        let told = acknowledge(&alarm, "shift B", at(3));
        assert_eq!(told.as_ref().map(|a| a.state).ok(), acknowledged, "acknowledge {from:?}");
        let silent = shelve(&alarm, "shift B", at(12), "booked", at(3));
        assert_eq!(silent.as_ref().map(|a| a.state).ok(), shelved, "shelve {from:?}");
        let allowed = acts_allowed(&alarm);
        assert_eq!(allowed.contains(&AlarmActKind::Acknowledge), acknowledged.is_some());
        assert_eq!(allowed.contains(&AlarmActKind::Shelve), shelved.is_some());
        for refused in [told.err(), silent.err()].into_iter().flatten() {
            assert_eq!(refused, AlarmRefused::NotFrom(from));
            assert!(!refused.to_string().is_empty());
        }
    }
    let known = in_state(Acknowledged);
    assert_eq!(acknowledge(&known, "shift A", at(9)).unwrap(), known, "said twice");
}

#[test]
fn a_shelf_wants_a_person_a_reason_and_an_end_within_a_day() {
    let alarm = in_state(Unacknowledged);
    let cases = [
        ("", at(5), "why", AlarmRefused::NeedsPerson),
        ("washbell", at(5), "why", AlarmRefused::NeedsPerson),
        ("shift A", at(5), " ", AlarmRefused::NeedsReason),
        ("shift A", at(2), "why", AlarmRefused::UntilOutOfReach),
        ("shift A", at(27), "why", AlarmRefused::UntilOutOfReach),
    ];
    for (by, until, reason, refused) in cases {
        assert_eq!(shelve(&alarm, by, until, reason, at(2)), Err(refused));
    }
    assert!(shelve(&alarm, "shift A", at(26), "why", at(2)).is_ok());
    let integrity = run(&[], &[condition(AlarmKind::Integrity)], 1).remove(0).alarm;
    let refused = shelve(&integrity, "shift A", at(5), "why", at(2));
    assert_eq!(refused, Err(AlarmRefused::NeverShelved));
}

#[test]
fn a_breach_and_a_conflict_sound_in_a_clean_too() {
    for kind in [AlarmKind::Integrity, AlarmKind::ChemicalConflict] {
        let mut c = condition(kind);
        c.withheld = Some(Withheld::InClean);
        assert_eq!(run(&[], &[c], 1)[0].alarm.state, Unacknowledged);
    }
    let mut c = condition(AlarmKind::CleanLimit);
    c.withheld = Some(Withheld::InClean);
    assert!(run(&[], &[c], 1).is_empty());
}

#[test]
fn what_a_look_does_not_cover_stays_but_its_shelf_ends() {
    let kinds = [AlarmKind::DataStale];
    let other = TrainId::new("uf-2");
    for scope in [
        Scope { kinds: &kinds, train: None, source: None },
        Scope { kinds: &AlarmKind::ALL, train: Some(&other), source: None },
    ] {
        let look = Look { scope, as_of: at(11), now: at(11) };
        let mut id = String::new;
        assert!(step(&[in_state(Unacknowledged)], &[], &look, &mut id).is_empty());
        let changes = step(&[in_state(Shelved)], &[], &look, &mut id);
        assert_eq!((changes[0].turn, changes[0].alarm.state), (Turn::Sounds, Unacknowledged));
    }
}

#[test]
fn data_are_stale_after_three_times_their_spacing() {
    let source = SourceId::new("scada");
    let stale = |newest, now| Condition::data_stale(&source, newest, HOUR_US, at(now));
    assert_eq!(stale(None, 100), None);
    assert_eq!(stale(Some(at(1)), 4), None);
    let condition = stale(Some(at(1)), 5).unwrap();
    assert_eq!(condition.source, Some(source));
    assert_eq!(condition.detail, Detail::NewestReading(at(1)));
}

fn standing() -> Standing {
    Standing {
        train: train(),
        as_of: at(50),
        run_start: None,
        baseline: None,
        loss: None,
        end_tmp_pa: None,
        holds: Default::default(),
        dates: [None; 4],
        no_dates: None,
        run_days: 0,
        assessed: None,
        in_clean: None,
        clean: None,
        earlier_verdicts: Vec::new(),
        growth_from: None,
        troubles: Vec::new(),
    }
}

#[test]
fn a_clean_limit_raises_one_alarm_and_an_advisory_none() {
    let mut s = standing();
    let held = |s: &mut Standing, kind: LimitKind, hour| {
        let k = LimitKind::ALL.iter().position(|x| *x == kind).unwrap();
        s.holds[k].held = Some(at(hour));
    };
    held(&mut s, LimitKind::LossAdvisory, 10);
    held(&mut s, LimitKind::TmpAdvisory, 10);
    assert_eq!(conditions(&s, &[], Phase::Filtration), []);
    held(&mut s, LimitKind::LossClean, 30);
    held(&mut s, LimitKind::TmpClean, 20);
    let found = conditions(&s, &[], Phase::Filtration);
    assert_eq!(found.len(), 1);
    assert_eq!(found[0].detail, Detail::Limit(LimitKind::TmpClean), "held first");
    assert_eq!(found[0].withheld, None);
    assert_eq!(conditions(&s, &[], Phase::OutOfService)[0].withheld, Some(Withheld::OutOfService));
    s.in_clean = Some(at(49));
    assert_eq!(conditions(&s, &[], Phase::CleanInPlace)[0].withheld, Some(Withheld::InClean));
}

#[test]
fn a_doubtful_clean_raises_one_alarm_by_its_cleaning() {
    let mut s = standing();
    let clean = |verdict| Run {
        train: train(),
        start: at(20),
        clean_start: at(12),
        origin: Origin::Recorded("c7".to_owned()),
        before: None,
        after: None,
        best: None,
        verdict,
        verdict_known: Some(at(48)),
        slope_1_m_per_m: None,
    };
    s.clean = Some(clean(Verdict::NotRestored));
    assert_eq!(conditions(&s, &[], Phase::Filtration), []);
    s.clean = Some(clean(Verdict::Doubtful));
    let evidence = crate::analysis::Evidence {
        finding: FindingKind::CleanVerdict,
        limit_kind: None,
        value: 1.1,
        limit: None,
        measure: crate::analysis::Measure::Share,
        baseline: None,
        from: at(21),
        to: at(48),
        dates: None,
        verdict: Some(Verdict::Doubtful),
        reasons: Vec::new(),
    };
    let finding = Finding { train: train(), as_of: at(50), evidence };
    let found = conditions(&s, std::slice::from_ref(&finding), Phase::Filtration);
    assert_eq!(found.len(), 1);
    assert_eq!((found[0].kind, found[0].subject.as_str()), (AlarmKind::CleanDoubtful, "c7"));
    assert_eq!(found[0].evidence, [finding.evidence]);
}

#[test]
fn a_conflict_names_its_classes_and_survives_the_store() {
    let c = Condition::chemical_conflict(&train(), "c9", StepClass::Hypochlorite, StepClass::Acid);
    let alarm = run(&[], &[c.clone(), c], 1);
    assert_eq!(alarm.len(), 1, "named twice is one");
    assert_eq!(alarm[0].alarm.response, Response::MakeSafe);
    let text = serde_json::to_string(&alarm[0].alarm).unwrap();
    assert_eq!(serde_json::from_str::<Alarm>(&text).unwrap(), alarm[0].alarm);
}

#[derive(Clone, Debug)]
enum Happens {
    Look(Vec<(usize, Option<Withheld>)>),
    Acknowledge(usize),
    Shelve(usize, i64),
    Hours(i64),
}

fn happens() -> impl Strategy<Value = Happens> {
    let withheld =
        prop_oneof![Just(None), Just(Some(Withheld::InClean)), Just(Some(Withheld::OutOfService))];
    prop_oneof![
        prop::collection::vec((0..AlarmKind::ALL.len(), withheld), 0..4).prop_map(Happens::Look),
        (0..6usize).prop_map(Happens::Acknowledge),
        (0..6usize, -2..40i64).prop_map(|(n, h)| Happens::Shelve(n, h)),
        (1..30i64).prop_map(Happens::Hours),
    ]
}

fn sound(alarms: &[Alarm]) {
    for a in alarms {
        assert_eq!(a.state == Shelved, a.shelved_until.is_some(), "{a:?}");
        assert!(a.kind.can_be_shelved() || a.state != Shelved, "{a:?}");
        let quiet = matches!(a.state, SuppressedByDesign | OutOfService);
        assert!(a.kind.can_be_withheld() || !quiet, "{a:?}");
        match a.state {
            ReturnedUnacknowledged | Normal => assert!(a.returned.is_some(), "{a:?}"),
            Unacknowledged | Acknowledged => assert!(a.returned.is_none(), "{a:?}"),
            _ => {}
        }
        let told = a.acts.iter().any(|x| x.what == AlarmActKind::Acknowledge);
        assert!(a.state != Acknowledged || told, "{a:?}");
        assert!(a.acts.iter().all(|x| !x.by.is_empty()));
        let twins = alarms.iter().filter(|b| !b.is_normal() && !a.is_normal() && b.kind == a.kind);
        assert!(twins.count() <= 1, "{a:?}");
    }
}

proptest! {
    #[test]
    fn no_sequence_reaches_an_undefined_state(list in prop::collection::vec(happens(), 1..60)) {
        let mut alarms: Vec<Alarm> = Vec::new();
        let mut hour = 0;
        for (n, event) in list.into_iter().enumerate() {
            match event {
                Happens::Hours(h) => hour += h,
                Happens::Acknowledge(k) => {
                    if let Some(a) = alarms.get_mut(k)
                        && let Ok(next) = acknowledge(a, "shift A", at(hour))
                    {
                        *a = next;
                    }
                }
                Happens::Shelve(k, hours) => {
                    if let Some(a) = alarms.get_mut(k)
                        && let Ok(next) = shelve(a, "shift A", at(hour + hours), "why", at(hour))
                    {
                        prop_assert!(hours > 0 && hours <= 24);
                        *a = next;
                    }
                }
                Happens::Look(stand) => {
                    let conditions: Vec<Condition> = stand.iter().map(|(k, w)| {
                        let mut c = condition(AlarmKind::ALL[*k]);
                        c.withheld = *w;
                        c
                    }).collect();
                    for change in run(&alarms, &conditions, hour) {
                        let mut alarm = change.alarm;
                        if change.turn == Turn::Raised {
                            alarm.id = format!("{n}-{}", alarm.id);
                            alarms.push(alarm);
                        } else if let Some(a) = alarms.iter_mut().find(|a| a.id == alarm.id) {
                            prop_assert!(!a.is_normal());
                            prop_assert!(change.turn != Turn::Updated || a.state == alarm.state);
                            *a = alarm;
                        }
                    }
                    // After a look that covers all, a condition that stands is in sight.
                    for c in conditions.iter().filter(|c| c.withheld.is_none()) {
                        prop_assert!(alarms.iter().any(|a| a.kind == c.kind && !a.is_normal()
                            && a.state != ReturnedUnacknowledged));
                    }
                }
            }
            sound(&alarms);
        }
    }
}
