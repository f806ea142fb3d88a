//! What a door answers to a delivery.

use std::collections::BTreeMap;

use serde::Serialize;
use utoipa::ToSchema;

use super::time::PlantTime;
use crate::base::{Counts, Outcome, Receipt, Rejection, Zone};

/// A receipt.
#[derive(Clone, Debug, PartialEq, Serialize, ToSchema)]
pub struct ReceiptView {
    /// Sortable id.
    pub id: String,
    /// Source it was posted to.
    pub source: String,
    /// File name as the sender gave it.
    pub file: String,
    /// When it was received.
    pub received: PlantTime,
    /// `sha256:` and the hex digest of the body as decoded.
    pub digest: String,
    /// Earliest reading in it.
    pub from: Option<PlantTime>,
    /// Latest reading in it.
    pub to: Option<PlantTime>,
    /// Rows below the header.
    pub rows: u64,
    /// Rows times mapped columns; the six counts add up to it.
    pub cells: u64,
    /// `taken`, `taken_with_faults`, `nothing_new` or `nothing_usable`.
    pub outcome: String,
    /// In one sentence.
    pub message: String,
    /// What became of the cells.
    pub readings: CountsView,
    /// Columns that no train uses.
    pub unmapped_columns: Vec<String>,
    /// How local times were read.
    pub clock: ClockView,
    /// The first 1,000 rejections.
    pub rejections: Vec<RejectionView>,
    /// How many there were.
    pub rejections_total: u64,
    /// From when each train's answers changed.
    pub changed_from: BTreeMap<String, PlantTime>,
    /// `done`, or `pending` while much has to be worked again.
    pub analysis: String,
    /// An earlier receipt for the same file under another mapping.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub earlier: Option<String>,
    /// Anything else the sender should know.
    #[serde(skip_serializing_if = "Vec::is_empty")]
    pub notes: Vec<String>,
}

/// What became of the cells of a delivery.
#[derive(Clone, Debug, PartialEq, Serialize, ToSchema)]
pub struct CountsView {
    /// New, or a good value over a bad one.
    pub accepted: u64,
    /// Stored already.
    pub repeated: u64,
    /// Another value was stored; this one counts from now.
    pub revised: u64,
    /// Marked so by the export.
    pub bad: u64,
    /// Empty cells.
    pub missing: u64,
    /// Could not be read, or may not be taken.
    pub rejected: u64,
}

/// How local times were read.
#[derive(Clone, Debug, PartialEq, Serialize, ToSchema)]
pub struct ClockView {
    /// IANA name of the zone.
    pub time_zone: String,
    /// Rows in an hour that the clock shows twice.
    pub repeated_hour_rows: u64,
    /// Rows in an hour that the clock skips.
    pub skipped_hour_rows: u64,
}

/// One thing that was not taken.
#[derive(Clone, Debug, PartialEq, Serialize, ToSchema)]
pub struct RejectionView {
    /// Line of the file, the header being line 1; null for readings posted as JSON.
    pub line: Option<u64>,
    /// Column name or tag; null where the whole row was rejected.
    pub column: Option<String>,
    /// The text as it stood.
    pub value: String,
    /// Why.
    pub reason: String,
}

/// A receipt as it is shown.
pub fn receipt_view(zone: &Zone, receipt: &Receipt) -> ReceiptView {
    ReceiptView {
        id: receipt.id.clone(),
        source: receipt.source.to_string(),
        file: receipt.file.clone(),
        received: PlantTime::new(zone, receipt.received),
        digest: receipt.digest.clone(),
        from: PlantTime::optional(zone, receipt.from),
        to: PlantTime::optional(zone, receipt.to),
        rows: receipt.rows,
        cells: receipt.cells,
        outcome: outcome_code(receipt.outcome).to_owned(),
        message: receipt.message.clone(),
        readings: counts(&receipt.readings),
        unmapped_columns: receipt.unmapped_columns.clone(),
        clock: ClockView {
            time_zone: receipt.time_zone.clone(),
            repeated_hour_rows: receipt.repeated_hour_rows,
            skipped_hour_rows: receipt.skipped_hour_rows,
        },
        rejections: receipt.rejections.iter().map(rejection).collect(),
        rejections_total: receipt.rejections_total,
        changed_from: receipt
            .changed_from
            .iter()
            .map(|(train, at)| (train.to_string(), PlantTime::new(zone, *at)))
            .collect(),
        analysis: if receipt.analysed { "done" } else { "pending" }.to_owned(),
        earlier: receipt.earlier.clone(),
        notes: receipt.notes.clone(),
    }
}

/// A receipt as `text/plain`: the message alone.
pub fn receipt_text(receipt: &Receipt) -> String {
    format!("{}\n", receipt.message)
}

const fn outcome_code(outcome: Outcome) -> &'static str {
    match outcome {
        Outcome::Taken => "taken",
        Outcome::TakenWithFaults => "taken_with_faults",
        Outcome::NothingNew => "nothing_new",
        Outcome::NothingUsable => "nothing_usable",
    }
}

fn counts(c: &Counts) -> CountsView {
    CountsView {
        accepted: c.accepted,
        repeated: c.repeated,
        revised: c.revised,
        bad: c.bad,
        missing: c.missing,
        rejected: c.rejected,
    }
}

fn rejection(r: &Rejection) -> RejectionView {
    RejectionView {
        line: (r.line > 0).then_some(r.line),
        column: (!r.column.is_empty()).then(|| r.column.clone()),
        value: r.value.clone(),
        reason: r.reason.clone(),
    }
}

#[cfg(test)]
mod tests {
    use serde_json::json;

    use super::super::fixture;
    use super::*;
    use crate::base::{SourceId, TrainId};

    fn receipt() -> Receipt {
        Receipt {
            id: "0195".to_owned(),
            source: SourceId::new("scada"),
            file: "0600.csv".to_owned(),
            received: fixture::at("2026-03-02T06:01"),
            digest: "sha256:00".to_owned(),
            from: Some(fixture::at("2026-03-02T05:00")),
            to: Some(fixture::at("2026-03-02T05:59")),
            rows: 60,
            cells: 360,
            outcome: Outcome::TakenWithFaults,
            message: "351 of 360 readings taken.".to_owned(),
            readings: Counts {
                accepted: 351,
                bad: 4,
                missing: 3,
                rejected: 2,
                ..Counts::default()
            },
            unmapped_columns: vec!["FT-900".to_owned()],
            time_zone: "Europe/London".to_owned(),
            repeated_hour_rows: 0,
            skipped_hour_rows: 0,
            rejections: vec![Rejection {
                line: 14,
                column: "PT-101".to_owned(),
                value: "1.2.3".to_owned(),
                reason: "not a number".to_owned(),
            }],
            rejections_total: 2,
            changed_from: [(TrainId::new("uf-1"), fixture::at("2026-03-02T05:00"))].into(),
            analysed: true,
            earlier: None,
            notes: Vec::new(),
        }
    }

    #[test]
    fn a_receipt_is_that_of_the_interface() {
        assert_eq!(
            serde_json::to_string(&receipt_view(&fixture::plant().zone, &receipt())).unwrap(),
            r#"{"id":"0195","source":"scada","file":"0600.csv","received":"2026-03-02T06:01:00+00:00","#
                .to_owned()
                + r#""digest":"sha256:00","from":"2026-03-02T05:00:00+00:00","to":"2026-03-02T05:59:00+00:00","#
                + r#""rows":60,"cells":360,"outcome":"taken_with_faults","message":"351 of 360 readings taken.","#
                + r#""readings":{"accepted":351,"repeated":0,"revised":0,"bad":4,"missing":3,"rejected":2},"#
                + r#""unmapped_columns":["FT-900"],"clock":{"time_zone":"Europe/London","repeated_hour_rows":0,"skipped_hour_rows":0},"#
                + r#""rejections":[{"line":14,"column":"PT-101","value":"1.2.3","reason":"not a number"}],"rejections_total":2,"#
                + r#""changed_from":{"uf-1":"2026-03-02T05:00:00+00:00"},"analysis":"done"}"#
        );
        assert_eq!(receipt_text(&receipt()), "351 of 360 readings taken.\n");
    }

    #[test]
    fn what_is_pending_or_has_no_place_says_so() {
        let mut r = receipt();
        r.analysed = false;
        r.from = None;
        r.earlier = Some("0101".to_owned());
        r.notes = vec!["A note.".to_owned()];
        r.rejections[0].line = 0;
        r.rejections[0].column.clear();
        let v = serde_json::to_value(receipt_view(&fixture::plant().zone, &r)).unwrap();
        assert_eq!(v["analysis"], json!("pending"));
        assert_eq!(v["from"], json!(null));
        assert_eq!(v["earlier"], json!("0101"));
        assert_eq!(v["notes"], json!(["A note."]));
        assert_eq!(
            v["rejections"],
            json!([{"line": null, "column": null, "value": "1.2.3", "reason": "not a number"}])
        );
    }
}
