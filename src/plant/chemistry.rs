//! Which chemicals may follow each other in a membrane train.
//!
//! Hypochlorite and acid make chlorine gas (CDC, MMWR 61(48):981-985, 2012); sulphite in acid
//! releases sulphur dioxide; hypochlorite with organic matter or ammonia, and oxidants with
//! reductants, react violently. Heels, dead legs, shared tanks and waste sumps count too. A
//! check here replaces no safety data sheet: local codes and the site's procedure decide.

use super::model::{Step, StepClass, VerifiedRinse};

/// A rinse passes only within this pH: what drinking water may have (common practice, no
/// source).
const RINSED_PH: (f64, f64) = (5.0, 10.0);
/// And at no more free chlorine than drinking water may hold in the United States, 4 mg/L as
/// chlorine (40 CFR 141.65, from memory).
const RINSED_FREE_CHLORINE_MG_L: f64 = 4.0;

impl StepClass {
    /// Whether the two must never meet. An unknown chemical conflicts with every other.
    pub fn conflicts_with(self, other: Self) -> bool {
        use StepClass::*;
        if self == Rinse || other == Rinse {
            return false;
        }
        matches!(
            (self.min(other), self.max(other)),
            (_, Other)
                | (Hypochlorite, Acid | Peroxide | Reductant | Detergent)
                | (Alkali, Acid)
                | (Acid | Peroxide, Reductant)
        )
    }
}

/// Whether a planned rinse, if it passes its own check, keeps two classes apart: it names a pH
/// near that of water, and with hypochlorite or an unknown chemical on either side a residual
/// of free chlorine too.
pub fn rinse_separates(rinse: &Step, before: StepClass, after: StepClass) -> bool {
    let Some(check) = rinse.verified.as_ref().filter(|_| rinse.class == StepClass::Rinse) else {
        return false;
    };
    // Nothing that a rinse reads here shows that these are gone.
    if matches!(before, StepClass::Reductant | StepClass::Other) && before != after {
        return false;
    }
    // A rinse with a chemical in it is none.
    let named = rinse.chemical.as_deref().map(classes_by_name).unwrap_or_default();
    if !named.is_empty() {
        return false;
    }
    let chlorine_counts =
        [before, after].iter().any(|c| matches!(c, StepClass::Hypochlorite | StepClass::Other));
    ph_passes(check) && (!chlorine_counts || chlorine_passes(check))
}

fn ph_passes(check: &VerifiedRinse) -> bool {
    check.ph_range.is_some_and(|(low, high)| low >= RINSED_PH.0 && high <= RINSED_PH.1)
}

fn chlorine_passes(check: &VerifiedRinse) -> bool {
    check.free_chlorine_max_mg_l.is_some_and(|max| max <= RINSED_FREE_CHLORINE_MG_L)
}

/// Pairs of steps of a plan that conflict with no rinse between them that keeps them apart.
/// Steps in between do not help: what they leave of the first still meets the second.
pub fn conflicts(steps: &[Step]) -> Vec<(usize, usize)> {
    let mut found = Vec::new();
    for (j, later) in steps.iter().enumerate() {
        for (i, earlier) in steps.iter().enumerate().take(j) {
            let apart = steps
                .iter()
                .take(j)
                .skip(i + 1)
                .any(|between| rinse_separates(between, earlier.class, later.class));
            if earlier.class.conflicts_with(later.class) && !apart {
                found.push((i, j));
            }
        }
    }
    found
}

/// The classes that a chemical's name gives away; none where it gives none.
pub fn classes_by_name(chemical: &str) -> Vec<StepClass> {
    let mut name = format!(" {}", chemical.to_lowercase());
    // Called acids, and something else first.
    for (called, meant) in [
        ("hypochlorous acid", "hypochlor"),
        ("peracetic acid", "peroxide"),
        ("peroxyacetic acid", "peroxide"),
        ("ascorbic acid", "ascorb"),
    ] {
        name = name.replace(called, meant);
    }
    const TELLING: [(StepClass, &[&str]); 5] = [
        (StepClass::Hypochlorite, &["hypochlor", "bleach", "naocl", "naclo"]),
        (StepClass::Alkali, &["caustic", "sodium hydroxide", "naoh"]),
        (StepClass::Acid, &[" acid", "citric", "oxalic", "hcl", "h2so4"]),
        (StepClass::Peroxide, &["peroxide", "peracetic", "h2o2"]),
        (StepClass::Reductant, &["sulphite", "sulfite", "thiosul", "ascorb"]),
    ];
    TELLING
        .iter()
        .filter(|(_, words)| words.iter().any(|w| name.contains(w)))
        .map(|(class, _)| *class)
        .collect()
}

#[cfg(test)]
mod tests {
    use StepClass::*;

    use super::*;

    fn step(class: StepClass) -> Step {
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

    fn rinse(low: f64, high: f64, chlorine: Option<f64>) -> Step {
        let verified = VerifiedRinse {
            ph_range: Some((low, high)),
            free_chlorine_max_mg_l: chlorine,
            ph: None,
            free_chlorine_mg_l: None,
            by: None,
        };
        Step { verified: Some(verified), ..step(Rinse) }
    }

    #[test]
    fn conflicts_are_symmetric_and_rinses_meet_everything() {
        let all = [Hypochlorite, Alkali, Acid, Peroxide, Reductant, Detergent, Rinse, Other];
        for a in all {
            assert!(!a.conflicts_with(Rinse) && !Rinse.conflicts_with(a));
            for b in all {
                assert_eq!(a.conflicts_with(b), b.conflicts_with(a), "{a:?} {b:?}");
            }
            assert_eq!(a.conflicts_with(Other), a != Rinse);
        }
        assert!(Hypochlorite.conflicts_with(Acid));
        assert!(Acid.conflicts_with(Reductant));
        assert!(!Hypochlorite.conflicts_with(Alkali));
        assert!(!Acid.conflicts_with(Acid));
    }

    #[test]
    fn only_a_rinse_verified_by_ph_and_residual_keeps_hypochlorite_from_acid() {
        let plan = |between: Step| conflicts(&[step(Hypochlorite), between, step(Acid)]);
        assert_eq!(plan(step(Rinse)), [(0, 2)]);
        assert_eq!(plan(rinse(6.0, 9.0, None)), [(0, 2)]);
        assert_eq!(plan(rinse(2.0, 12.0, Some(0.5))), [(0, 2)]);
        assert_eq!(plan(rinse(6.0, 9.0, Some(500.0))), [(0, 2)]);
        assert_eq!(plan(rinse(6.0, 9.0, Some(0.5))), []);
        // Caustic in between conflicts with the acid and does not take the chlorine away.
        assert_eq!(plan(step(Alkali)), [(0, 2), (1, 2)]);
        assert_eq!(conflicts(&[step(Acid), rinse(6.0, 9.0, None), step(Reductant)]), []);
    }

    #[test]
    fn names_give_their_class_away() {
        for (name, classes) in [
            ("Sodium hypochlorite 12 %", vec![Hypochlorite]),
            ("citric acid", vec![Acid]),
            ("ascorbic acid", vec![Reductant]),
            ("peracetic acid", vec![Peroxide]),
            ("sodium hydroxide with NaOCl", vec![Hypochlorite, Alkali]),
            ("potable water", vec![]),
        ] {
            assert_eq!(classes_by_name(name), classes, "{name}");
        }
    }
}
