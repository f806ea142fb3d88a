use StepClass::*;

use super::*;

const CLASSES: [StepClass; 8] =
    [Hypochlorite, Alkali, Acid, Peroxide, Reductant, Detergent, Rinse, Other];

/// What comes of each pair, rows and columns in the order above. Hypochlorite with acid: CDC,
/// MMWR 61(48):981-985, 2012; the others from memory of safety data sheets.
fn expected(a: StepClass, b: StepClass) -> Option<ConflictKind> {
    use ConflictKind as K;
    let table: [[Option<K>; 8]; 8] = {
        let (n, u) = (None, Some(K::Unknown));
        let (g, s, v) = (Some(K::ChlorineGas), Some(K::SulphurDioxide), Some(K::Violent));
        let (c, h) = (Some(K::Chlorination), Some(K::Neutralisation));
        [
            [n, n, g, v, v, c, n, u],
            [n, n, h, n, n, n, n, u],
            [g, h, n, n, s, n, n, u],
            [v, n, n, n, v, n, n, u],
            [v, n, s, v, n, n, n, u],
            [c, n, n, n, n, n, n, u],
            [n, n, n, n, n, n, n, n],
            [u, u, u, u, u, u, n, u],
        ]
    };
    let index = |c| CLASSES.iter().position(|x| *x == c).unwrap();
    table[index(a)][index(b)]
}

#[test]
fn every_pair_of_classes_meets_in_a_plan_a_record_and_the_train() {
    for a in CLASSES {
        for b in CLASSES {
            let wanted = expected(a, b);
            assert_eq!(ConflictKind::of(a, b), wanted, "{a:?} {b:?}");
            let beside = [chemical(a), chemical(b), checked()];
            let met = conflicts(&beside, None);
            assert_eq!(met.first().map(|c| c.kind), wanted, "{a:?} {b:?}");
            assert!(met.iter().all(|c| (c.from_step, c.at_step) == (Some(0), 1)));
            if a == Rinse {
                continue;
            }
            let from_before = conflicts(&[chemical(b)], Some(&last(a)));
            assert_eq!(from_before.first().map(|c| c.kind), wanted, "{a:?} then {b:?}");
            assert!(from_before.iter().all(|c| c.from_step.is_none()));
            if b == Rinse {
                continue;
            }
            let refused = check(&beside, &train(), None).err().map(|r| r.why);
            assert_eq!(matches!(refused, Some(RefusalWhy::Conflict(_))), wanted.is_some());
            let late = check(&beside[1..], &train(), Some(&last(a))).err().map(|r| r.why);
            assert_eq!(matches!(late, Some(RefusalWhy::Conflict(_))), wanted.is_some());
            // No reading of a rinse shows that a reductant or an unknown chemical is gone.
            let proven = wanted.is_none() || a == b || !matches!(a, Reductant | Other);
            let apart = [chemical(a), checked(), chemical(b), checked()];
            assert_eq!(check(&apart, &train(), None).is_ok(), proven, "{a:?} {b:?}");
            let read = [chemical(a), passed(), chemical(b), passed()];
            assert_eq!(conflicts(&read, None).is_empty(), proven, "{a:?} {b:?}");
        }
    }
}

#[test]
fn a_recorded_rinse_counts_by_its_readings() {
    let met = |rinse: Step| conflicts(&[chemical(Hypochlorite), rinse, chemical(Acid)], None);
    assert_eq!(met(passed()), []);
    for rinse in [
        chemical(Rinse),
        checked(),
        read(Some(7.0), None, "shift A"),
        read(None, Some(0.1), "shift A"),
        read(Some(10.8), Some(0.1), "shift A"),
        read(Some(7.0), Some(40.0), "shift A"),
    ] {
        let found = met(rinse.clone());
        assert_eq!(found.len(), 1, "{rinse:?}");
        assert!(found[0].unproven_rinse);
        assert_eq!(found[0].kind, ConflictKind::ChlorineGas);
    }
    let near = conflicts(&[chemical(Hypochlorite), chemical(Acid)], None);
    assert!(!near[0].unproven_rinse);
}

#[test]
fn a_name_counts_as_much_as_a_class() {
    let named = |class, name: &str| Step { chemical: Some(name.to_owned()), ..chemical(class) };
    let mixed = [named(Alkali, "caustic with sodium hypochlorite"), chemical(Acid)];
    assert!(conflicts(&mixed, None).iter().any(|c| c.kind == ConflictKind::ChlorineGas));
    let one = [named(Acid, "sodium hypochlorite")];
    let found = conflicts(&one, None);
    assert_eq!((found[0].from_step, found[0].at_step), (Some(0), 0));
    assert_eq!(conflicts(&[named(Other, "sodium hypochlorite")], None), [], "one unknown is one");
}

#[test]
fn what_is_left_is_what_no_reading_shows_gone() {
    let left = |steps: &[Step], before: Option<&LastChemical>| {
        LastChemical::left_by(steps, before, at(5)).map(|l| l.classes)
    };
    assert_eq!(left(&[chemical(Acid), passed()], None), None);
    assert_eq!(left(&[chemical(Acid), chemical(Rinse)], None), Some(vec![Acid]));
    let low = read(Some(7.0), None, "shift A");
    assert_eq!(left(&[chemical(Acid), low.clone()], None), None, "no chlorine in acid");
    assert_eq!(left(&[chemical(Hypochlorite), low], None), Some(vec![Hypochlorite]));
    assert_eq!(left(&[passed()], Some(&last(Acid))), None);
    assert_eq!(
        left(&[chemical(Alkali)], Some(&last(Hypochlorite))),
        Some(vec![Hypochlorite, Alkali])
    );
}

#[test]
fn a_plan_ends_rinsed_and_within_the_membranes_limits() {
    let why = |steps: &[Step]| check(steps, &train(), None).unwrap_err();
    assert_eq!(why(&[]).why, RefusalWhy::NothingPlanned);
    assert_eq!(why(&[checked()]).why, RefusalWhy::NothingPlanned);
    assert_eq!(why(&[chemical(Acid)]).why, RefusalWhy::NotRinsed(Acid));
    assert_eq!(why(&[chemical(Acid), chemical(Rinse)]).pointer, "/steps/1");
    let dose = |text: &str| Step { concentration: Some(text.to_owned()), ..chemical(Hypochlorite) };
    for (step, field) in [
        (Step { ph: Some(12.0), ..chemical(Alkali) }, "ph"),
        (Step { ph: Some(1.5), ..chemical(Acid) }, "ph"),
        (Step { temperature_degc: Some(45.0), ..chemical(Alkali) }, "temperature"),
        (dose("600 mg/L"), "concentration"),
        (dose("0.1 %"), "concentration"),
        (dose("strong"), "concentration"),
    ] {
        assert_eq!(why(&[step, checked()]).pointer, format!("/steps/0/{field}"));
    }
    for step in [
        Step { ph: Some(11.0), temperature_degc: Some(40.0), ..chemical(Alkali) },
        dose("500 mg/L"),
        dose("0.05 %"),
        chemical(Hypochlorite),
    ] {
        assert_eq!(check(&[step.clone(), checked()], &train(), None), Ok(()), "{step:?}");
    }
}

#[test]
fn quantities_are_of_active_substance() {
    let mass = |class, dose: &str, volume_m3| {
        active_kg(&Step { concentration: Some(dose.to_owned()), volume_m3, ..chemical(class) })
    };
    // 12 m3 at 0.1 % of 1000 kg/m3, and at 500 g/m3.
    for (dose, kg) in [("0.1 %", 12.0), ("500 mg/L", 6.0), ("1.5 %", 180.0)] {
        let found = mass(Hypochlorite, dose, Some(12.0)).unwrap();
        assert!((found - kg).abs() < 1e-9, "{dose}: {found}");
    }
    assert_eq!(mass(Acid, "0.1 %", None), None);
    assert_eq!(mass(Acid, "some", Some(12.0)), None);
    assert_eq!(mass(Rinse, "0.1 %", Some(12.0)), None);
}
