use serde_json::json;

use super::super::fixture::{self, at, dates};
use super::super::units::UnitSystem;
use super::*;
use crate::advice::{Action, ClearsWhen, StepsFrom, Urgency};
use crate::analysis::{Dates, Hold, LimitKind, NoDates};
use crate::base::HOUR_US;

mod sentences;

/// Everything that a case borrows.
struct Held {
    plant: Plant,
    standing: Standing,
    open: Vec<Recommendation>,
    now: Now,
    wall: Instant,
    units: UnitSystem,
}

impl Held {
    /// A train in the middle of a run, its limit three days off, with fresh data.
    fn new() -> Self {
        let plant = fixture::plant();
        let standing = fixture::standing(&Site::new(&plant, &plant.trains[0]));
        let now = Now {
            train: standing.train.clone(),
            phase: Phase::Filtration,
            since: at("2026-03-08T05:41"),
            newest: at("2026-03-08T05:59"),
        };
        let wall = at("2026-03-08T06:01");
        Self { plant, standing, open: Vec::new(), now, wall, units: UnitSystem::Si }
    }

    fn with_clean(mut self, start_by: &str) -> Self {
        self.open.push(open(Action::CleanInPlace, Urgency::ThisWeek, Some(at(start_by))));
        self
    }

    fn with(mut self, change: impl FnOnce(&mut Self)) -> Self {
        change(&mut self);
        self
    }

    fn hold(&mut self, kind: LimitKind, since: &str, held: Option<&str>) {
        let slot = LimitKind::ALL.iter().position(|k| *k == kind).unwrap();
        self.standing.holds[slot] =
            Hold { over_s: 7200.0, since: Some(at(since)), held: held.map(at) };
    }

    fn loss_dates(&mut self, d: Dates) {
        self.standing.dates[1] = Some(d);
    }

    fn no_dates(&mut self, why: NoDates) {
        self.standing.dates = [None; 4];
        self.standing.no_dates = Some(why);
    }

    fn view(&self) -> TrainView {
        let site = Site::new(&self.plant, &self.plant.trains[0]);
        let case = TrainCase {
            plant: &self.plant,
            site: &site,
            standing: Some(&self.standing),
            open: &self.open,
            now: Some(&self.now),
            wall: self.wall,
            stale_after_us: 3 * HOUR_US,
            unknown_codes: &[],
        };
        train_view(&Units::new(self.units), &case)
    }

    #[track_caller]
    fn says(&self, advice: &str, sentence: &str) {
        let standing = self.view().standing;
        assert_eq!((standing.advice.as_str(), standing.sentence.as_str()), (advice, sentence));
    }
}

fn open(action: Action, urgency: Urgency, start_by: Option<Instant>) -> Recommendation {
    Recommendation {
        id: "r1".to_owned(),
        train: fixture::train().id,
        action,
        urgency,
        raised: at("2026-03-01T07:00"),
        as_of: at("2026-03-08T06:00"),
        clean_by: None,
        start_by,
        evidence: Vec::new(),
        clears_when: ClearsWhen::CleanedOrLimitFar,
        steps: Vec::new(),
        steps_from: StepsFrom::None,
        decisions: Vec::new(),
        silent_until: None,
        work_order: None,
        closed: None,
    }
}

#[test]
fn a_train_is_that_of_the_interface() {
    let view = Held::new().with_clean("2026-03-09T08:00").view();
    assert_eq!(
        serde_json::to_value(view).unwrap(),
        json!({
            "id": "uf-1", "name": "UF train 1", "asset": "MT-0101",
            "standing": {
                "state": "filtration", "since": "2026-03-08T05:41:00+00:00",
                "loss": {"value": 27.4, "unit": "%", "unit_label": "%", "baseline": "after_clean",
                         "interval": [26.2, 28.7], "at": "2026-03-08T05:00:00+00:00"},
                "limits": {
                    "permeability_loss_advisory": {
                        "limit": 20.0, "unit": "%", "unit_label": "%", "value": 27.4,
                        "exceeded_since": null, "held_since": null,
                        "p10": "2026-02-20T12:00:00+00:00", "p50": "2026-02-22T12:00:00+00:00",
                        "p90": "2026-02-24T12:00:00+00:00"},
                    "permeability_loss_clean": {
                        "limit": 30.0, "unit": "%", "unit_label": "%", "value": 27.4,
                        "exceeded_since": null, "held_since": null,
                        "p10": "2026-03-10T12:00:00+00:00", "p50": "2026-03-12T12:00:00+00:00",
                        "p90": "2026-03-15T12:00:00+00:00"},
                    "tmp_advisory": null,
                    "tmp_clean": {
                        "limit": 1.2, "unit": "bar", "unit_label": "bar", "value": 0.412,
                        "exceeded_since": null, "held_since": null,
                        "p10": null, "p50": null, "p90": null}
                },
                "binding": "permeability_loss_clean", "advice": "clean_in_place",
                "distrusted": [], "unknown_state_codes": [], "data_age": "PT2M", "stale": false,
                "as_of": "2026-03-08T05:59:00+00:00",
                "sentence": "Lost 27.4 % of permeability against the last clean that restored it \
                             (baseline 231 L/(m²·h·bar)); clean limit (30 %) most likely Thursday \
                             12 March, one chance in ten before Tuesday 10 March: start the clean \
                             by Monday 9 March 08:00."
            }
        })
    );
}

#[test]
fn a_train_without_data_says_so() {
    let plant = fixture::plant();
    let site = Site::new(&plant, &plant.trains[0]);
    let case = TrainCase {
        plant: &plant,
        site: &site,
        standing: None,
        open: &[],
        now: None,
        wall: at("2026-03-08T06:01"),
        stale_after_us: 3 * HOUR_US,
        unknown_codes: &[],
    };
    let s = train_view(&Units::new(UnitSystem::Us), &case).standing;
    assert_eq!((s.state.as_str(), s.advice.as_str()), ("unknown", "cannot_advise"));
    assert_eq!((s.as_of, s.data_age, s.loss), (None, None, None));
    assert_eq!(
        s.limits.tmp_clean.map(|l| (l.limit, l.unit)),
        Some((Some(17.4), "[psi]".to_owned()))
    );
    assert!(s.sentence.starts_with("Cannot advise: no reading"), "{}", s.sentence);
}

#[test]
fn troubles_name_the_instruments_they_point_to() {
    let view = Held::new()
        .with(|h| {
            h.standing.troubles =
                vec![Reason::NoTemperature, Reason::TmpUnderFloor, Reason::UnsteadyFlow];
        })
        .view();
    let told: Vec<_> = view
        .standing
        .distrusted
        .iter()
        .map(|d| (d.role.as_str(), d.tag.as_str(), d.reason.as_str()))
        .collect();
    assert_eq!(
        told,
        [
            ("temperature", "TT-101", "no_temperature"),
            ("feed_pressure", "PT-101", "tmp_under_floor"),
            ("permeate_pressure", "PT-103", "tmp_under_floor"),
        ]
    );
}

#[test]
fn the_most_urgent_recommendation_speaks() {
    let held = Held::new().with_clean("2026-03-09T08:00").with(|h| {
        h.open.push(open(Action::IntegrityTest, Urgency::ThisShift, None));
        h.open.push(open(Action::Inspect, Urgency::ThisWeek, None));
    });
    let s = held.view().standing;
    assert_eq!(s.advice, "integrity_test");
    assert!(s.sentence.contains(": start the clean by"), "{}", s.sentence);
    assert!(s.sentence.contains("Test the integrity:"), "{}", s.sentence);
}

#[test]
fn trains_are_ordered_by_when_they_must_be_clean() {
    let near = Held::new();
    let far = Held::new().with(|h| h.loss_dates(dates("2026-06-03", "2026-06-20", "")));
    let held = Held::new()
        .with(|h| h.hold(LimitKind::TmpClean, "2026-03-07T22:00", Some("2026-03-08T05:00")));
    let mut list = [None, Some(&far), Some(&held), Some(&near)];
    list.sort_by_key(|h| clean_by_order(h.map(|h| &h.standing)));
    let order: Vec<_> = list.iter().map(|h| h.map(std::ptr::from_ref)).collect();
    let expected = [Some(&held), Some(&near), Some(&far), None].map(|h| h.map(std::ptr::from_ref));
    assert_eq!(order, expected);
}
