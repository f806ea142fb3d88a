//! An alarm: what stands, what response it asks for, and who knows.

use serde::Serialize;
use utoipa::ToSchema;

use super::alarm_words::{
    alarm_act_code, alarm_kind_words, alarm_state_words, limit_words, met_words, response_words,
};
use super::recommendation_view::{EvidenceView, evidence_view};
use super::time::{PlantTime, moment_words};
use super::units::Units;
use crate::alarms::{Alarm, AlarmAct, AlarmKind, Detail, acts_allowed};
use crate::base::Zone;

/// An alarm.
#[derive(Clone, Debug, PartialEq, Serialize, ToSchema)]
pub struct AlarmView {
    /// Its id.
    pub id: String,
    /// `clean_limit`, `data_stale`, `instrument`, `clean_doubtful`, `integrity` or
    /// `chemical_conflict`.
    pub kind: String,
    /// Whose; null where it is not one train's.
    pub train: Option<String>,
    /// Which source's, for data that are stale.
    pub source: Option<String>,
    /// The tag, cleaning or test it is about, where it is about one.
    pub subject: Option<String>,
    /// `unacknowledged`, `acknowledged`, `returned_unacknowledged`, `shelved`,
    /// `suppressed_by_design`, `out_of_service` or `normal`.
    pub state: String,
    /// The state in words.
    pub state_detail: String,
    /// What stands, in words.
    pub detail: String,
    /// The response it asks for.
    pub response: String,
    /// Data time at which it was raised.
    pub raised: PlantTime,
    /// Data time of the last look that changed it.
    pub as_of: PlantTime,
    /// Data time at which its condition no longer stood; null while it stands.
    pub returned: Option<PlantTime>,
    /// Until when it is silent, while shelved.
    pub shelved_until: Option<PlantTime>,
    /// On what evidence.
    pub evidence: Vec<EvidenceView>,
    /// What people did to it, in order.
    pub acts: Vec<AlarmActView>,
    /// What can be done to it now: `acknowledge`, `shelve`.
    pub actions: Vec<String>,
}

/// What a person did to an alarm.
#[derive(Clone, Debug, PartialEq, Serialize, ToSchema)]
pub struct AlarmActView {
    /// `acknowledge` or `shelve`.
    pub act: String,
    /// Who.
    pub by: String,
    /// When, by the wall clock.
    pub at: PlantTime,
    /// Until when, for shelving.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub until: Option<PlantTime>,
    /// Why.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub reason: Option<String>,
}

/// An alarm as it is shown.
pub fn alarm_view(zone: &Zone, units: &Units, alarm: &Alarm) -> AlarmView {
    AlarmView {
        id: alarm.id.clone(),
        kind: alarm.kind.code().to_owned(),
        train: alarm.train.as_ref().map(|t| t.to_string()),
        source: alarm.source.as_ref().map(|s| s.to_string()),
        subject: Some(alarm.subject.clone()).filter(|s| !s.is_empty()),
        state: alarm.state.code().to_owned(),
        state_detail: alarm_state_words(alarm.state).to_owned(),
        detail: detail(zone, alarm),
        response: response_words(alarm.response).to_owned(),
        raised: PlantTime::new(zone, alarm.raised),
        as_of: PlantTime::new(zone, alarm.as_of),
        returned: PlantTime::optional(zone, alarm.returned),
        shelved_until: PlantTime::optional(zone, alarm.shelved_until),
        evidence: alarm.evidence.iter().map(|e| evidence_view(zone, units, e)).collect(),
        acts: alarm.acts.iter().map(|a| act_view(zone, a)).collect(),
        actions: acts_allowed(alarm).iter().map(|a| alarm_act_code(*a).to_owned()).collect(),
    }
}

fn act_view(zone: &Zone, act: &AlarmAct) -> AlarmActView {
    AlarmActView {
        act: alarm_act_code(act.what).to_owned(),
        by: act.by.clone(),
        at: PlantTime::new(zone, act.at),
        until: PlantTime::optional(zone, act.until),
        reason: act.reason.clone(),
    }
}

/// What stands, in words.
fn detail(zone: &Zone, alarm: &Alarm) -> String {
    match (&alarm.detail, alarm.kind) {
        (Detail::Limit(kind), _) => format!("The {} has held.", limit_words(*kind)),
        (Detail::NewestReading(newest), _) => {
            let source = alarm.source.as_ref().map_or("the source", |s| s.as_str());
            format!(
                "The newest reading of {source} is of {}, more than three times its usual spacing \
                 ago.",
                moment_words(zone, *newest, alarm.as_of)
            )
        }
        (Detail::Met { first, second }, _) => met_words(*first, *second),
        (Detail::None, AlarmKind::Instrument) if !alarm.subject.is_empty() => {
            format!("{} is not to be believed.", alarm.subject)
        }
        (Detail::None, kind) => alarm_kind_words(kind).to_owned(),
    }
}

#[cfg(test)]
mod tests {
    use serde_json::json;

    use super::super::fixture::{self, at};
    use super::super::units::UnitSystem;
    use super::*;
    use crate::alarms::{AlarmActKind, AlarmState};
    use crate::analysis::LimitKind;
    use crate::base::{SourceId, TrainId};
    use crate::plant::StepClass;

    fn alarm(kind: AlarmKind, detail: Detail) -> Alarm {
        Alarm {
            id: "a1".to_owned(),
            kind,
            train: Some(TrainId::new("uf-1")),
            source: None,
            subject: String::new(),
            state: AlarmState::Unacknowledged,
            raised: at("2026-03-08T06:00"),
            as_of: at("2026-03-08T07:00"),
            returned: None,
            evidence: Vec::new(),
            detail,
            response: kind.response(),
            acts: Vec::new(),
            shelved_until: None,
        }
    }

    #[test]
    fn an_alarm_names_its_response_and_what_can_be_done() {
        let zone = fixture::plant().zone;
        let met = Detail::Met { first: StepClass::Hypochlorite, second: StepClass::Acid };
        let mut shelved = alarm(AlarmKind::ChemicalConflict, met);
        shelved.subject = "c1".to_owned();
        shelved.state = AlarmState::Shelved;
        shelved.shelved_until = Some(at("2026-03-08T14:00"));
        shelved.acts.push(AlarmAct {
            what: AlarmActKind::Shelve,
            by: "shift A".to_owned(),
            at: at("2026-03-08T07:30"),
            until: Some(at("2026-03-08T14:00")),
            reason: Some("record being corrected".to_owned()),
        });
        let view = alarm_view(&zone, &Units::new(UnitSystem::Si), &shelved);
        assert_eq!(
            serde_json::to_value(view).unwrap(),
            json!({
                "id": "a1", "kind": "chemical_conflict", "train": "uf-1", "source": null,
                "subject": "c1", "state": "shelved",
                "state_detail": "It is silent for a time, by a person's act.",
                "detail": "By the record of a cleaning, acid came to hypochlorite, and no rinse \
                           between them shows by its readings that it kept them apart: together \
                           they give off chlorine gas.",
                "response": "Stop dosing, keep people away, ventilate, and follow the site's \
                             emergency procedure; then prove by pH and free chlorine that the \
                             train, its tank and its sump are rinsed. If only the record is wrong, \
                             acknowledge this and note the correction in the shift log: a record cannot be changed.",
                "raised": "2026-03-08T06:00:00+00:00", "as_of": "2026-03-08T07:00:00+00:00",
                "returned": null, "shelved_until": "2026-03-08T14:00:00+00:00", "evidence": [],
                "acts": [{"act": "shelve", "by": "shift A", "at": "2026-03-08T07:30:00+00:00",
                          "until": "2026-03-08T14:00:00+00:00",
                          "reason": "record being corrected"}],
                "actions": ["shelve"]
            })
        );
    }

    #[test]
    fn every_kind_says_what_stands() {
        let zone = fixture::plant().zone;
        let newest = Detail::NewestReading(at("2026-03-08T02:00"));
        let mut stale = alarm(AlarmKind::DataStale, newest);
        stale.source = Some(SourceId::new("scada"));
        let mut tag = alarm(AlarmKind::Instrument, Detail::None);
        tag.subject = "PT-101".to_owned();
        let limit = Detail::Limit(LimitKind::TmpClean);
        for (alarm, words) in [
            (alarm(AlarmKind::CleanLimit, limit), "The clean limit of TMP has held."),
            (
                stale,
                "The newest reading of scada is of Sunday 8 March 02:00, more than three times its \
                 usual spacing ago.",
            ),
            (tag, "PT-101 is not to be believed."),
            (alarm(AlarmKind::Integrity, Detail::None), "An integrity test failed."),
        ] {
            assert_eq!(detail(&zone, &alarm), words);
        }
        for kind in AlarmKind::ALL {
            assert!(response_words(kind.response()).ends_with('.'));
            assert!(alarm_kind_words(kind).ends_with('.'));
        }
    }
}
