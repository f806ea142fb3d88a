use serde_json::{Value, json};

use crate::site::{DAYS, done, items, no, rinsed, site};
use crate::support::walk;

const LIST: &str = "/v1/cleanings";

fn cleaning(train: &str, day: u32, steps: Value) -> Value {
    json!({"train": train, "start": format!("2026-03-{day:02}T08:00:00+00:00"),
           "end": format!("2026-03-{day:02}T12:00:00+00:00"), "kind": "maintenance_clean",
           "steps": steps})
}

fn acid() -> Value {
    json!({"class": "acid", "chemical": "citric acid", "concentration": "1.5 %", "ph": 2.5,
           "temperature": "35 degC", "duration": "PT2H"})
}

fn hypochlorite() -> Value {
    json!({"chemical": "sodium hypochlorite", "concentration": "400 mg/L", "duration": "2 h"})
}

#[tokio::test(flavor = "multi_thread")]
async fn what_met_raises_an_alarm_and_a_clean_after_it_ends_it() {
    let app = site(DAYS * 24).await;
    let met = cleaning("uf-2", 10, json!([hypochlorite(), acid(), rinsed(7.0, "0.1 mg/L")]));
    let told = done(&app, LIST, &met, 201).await;
    assert_eq!(told["steps"][1]["temperature"], "35 °C");
    assert_eq!(told["steps"][0]["class"], "hypochlorite");
    let alarms = items(&app, "/v1/alarms?train=uf-2").await;
    let alarm = alarms.iter().find(|a| a["kind"] == "chemical_conflict").unwrap();
    assert_eq!(alarm["state"], "unacknowledged");
    assert_eq!((&alarm["subject"], &alarm["train"]), (&told["id"], &json!("uf-2")));
    assert!(alarm["detail"].as_str().unwrap().contains("chlorine gas"), "{alarm}");
    assert!(alarm["response"].as_str().unwrap().contains("ventilate"), "{alarm}");
    assert_eq!(alarm["actions"], json!(["acknowledge", "shelve"]));

    let path = format!("/v1/alarms/{}", alarm["id"].as_str().unwrap());
    let acknowledge = format!("{path}/acknowledge");
    let known = done(&app, &acknowledge, &json!({"by": "shift A"}), 200).await;
    assert_eq!(known["state"], "acknowledged");
    assert_eq!(done(&app, &acknowledge, &json!({"by": "shift A"}), 200).await, known);
    no(&app, &acknowledge, &json!({"by": "shift B"}), 409).await;
    let shelve = format!("{path}/shelve");
    let until = "2026-03-14T06:00:00+00:00";
    for (body, pointer) in [
        (json!({"by": "shift A", "until": until, "reason": " "}), "/reason"),
        (json!({"by": "shift A", "until": "2026-03-20T06:00:00Z", "reason": "x"}), "/until"),
        (json!({"by": "shift A", "until": "tomorrow", "reason": "x"}), "/until"),
        (json!({"by": " ", "until": until, "reason": "x"}), "/by"),
    ] {
        assert_eq!(no(&app, &shelve, &body, 422).await.1, pointer, "{body}");
    }
    let silent = json!({"by": "shift A", "until": until, "reason": "record being looked at"});
    let shelved = done(&app, &shelve, &silent, 200).await;
    assert_eq!((&shelved["state"], &shelved["shelved_until"]), (&json!("shelved"), &json!(until)));
    assert_eq!(items(&app, "/v1/alarms?state=shelved").await, [shelved]);
    app.get("/v1/alarms/none").await.problem(404, "/v1/alarms/none");
    app.get("/v1/alarms?state=loud").await.problem(400, "/v1/alarms");

    // A later cleaning without: the condition stands no more, behind the shelf.
    let good = cleaning("uf-2", 12, json!([acid(), rinsed(7.0, "0.1 mg/L")]));
    done(&app, LIST, &good, 201).await;
    assert_ne!(app.get_json(&path).await["returned"], Value::Null);
}

#[tokio::test(flavor = "multi_thread")]
async fn what_was_left_meets_the_next_cleaning_if_nothing_was_filtered_between() {
    let app = site(DAYS * 24).await;
    let at = |from: &str, to: &str, steps: Value| {
        json!({"train": "uf-1", "start": format!("2026-03-{from}:00Z"),
               "end": format!("2026-03-{to}:00Z"), "kind": "maintenance_clean", "steps": steps})
    };
    let conflicts = || async {
        let all = items(&app, "/v1/alarms?train=uf-1").await;
        all.iter().filter(|a| a["kind"] == "chemical_conflict").count()
    };
    // The train filters for two days between.
    done(&app, LIST, &at("04T08:00", "04T09:00", json!([hypochlorite()])), 201).await;
    done(&app, LIST, &at("06T08:00", "06T09:00", json!([acid(), rinsed(7.0, "0")])), 201).await;
    assert_eq!(conflicts().await, 0);
    // Within one clean in place, in two records.
    done(&app, LIST, &at("10T07:00", "10T09:00", json!([hypochlorite()])), 201).await;
    done(&app, LIST, &at("10T10:00", "10T12:00", json!([acid()])), 201).await;
    assert_eq!(conflicts().await, 1);
}

#[tokio::test(flavor = "multi_thread")]
async fn a_record_is_taken_once() {
    let app = site(DAYS * 24).await;
    let mut body = cleaning("uf-1", 5, json!([acid(), rinsed(7.0, "0.1 mg/L")]));
    body["reference"] = json!("shift log 77");
    let first = done(&app, LIST, &body, 201).await;
    assert_eq!(done(&app, LIST, &body, 200).await["id"], first["id"]);
    let mut other = cleaning("uf-1", 6, json!([acid(), rinsed(7.0, "0.1 mg/L")]));
    other["reference"] = json!("shift log 77");
    let (detail, pointer) = no(&app, LIST, &other, 409).await;
    assert_eq!(pointer, "/reference");
    assert!(detail.contains(first["id"].as_str().unwrap()), "{detail}");
    let mut over = cleaning("uf-1", 5, json!([acid()]));
    over["start"] = json!("2026-03-05T11:00:00Z");
    over["end"] = json!("2026-03-05T13:00:00Z");
    let (detail, pointer) = no(&app, LIST, &over, 409).await;
    assert_eq!(pointer, "/start");
    assert!(detail.contains("Thursday 5 March 08:00"), "{detail}");
    over["train"] = json!("uf-2");
    done(&app, LIST, &over, 201).await;
}

#[tokio::test(flavor = "multi_thread")]
async fn faults_of_a_record_are_named_by_their_place() {
    let app = site(24).await;
    let good = cleaning("uf-1", 5, json!([acid()]));
    for (change, pointer) in [
        (json!({"train": "uf-7"}), "/train"),
        (json!({"start": "yesterday"}), "/start"),
        (json!({"start": "2026-03-05T08:00:00"}), "/start"),
        (json!({"end": "2026-03-05T07:00:00Z"}), "/end"),
        (json!({"end": "2026-03-25T07:00:00Z"}), "/end"),
        (json!({"kind": "wash"}), "/kind"),
        (json!({"steps": []}), "/steps"),
        (json!({"steps": [{"class": "soap"}]}), "/steps/0/class"),
        (json!({"steps": [{"class": "acid", "temperature": "warm"}]}), "/steps/0/temperature"),
        (json!({"steps": [acid(), {"class": "acid", "strength": 1}]}), "/steps/1/strength"),
        (json!({"reference": " "}), "/reference"),
    ] {
        let mut body = good.clone();
        for (name, value) in change.as_object().unwrap() {
            body[name] = value.clone();
        }
        assert_eq!(no(&app, LIST, &body, 422).await.1, pointer, "{change}");
    }
    assert!(items(&app, LIST).await.is_empty());
    // A name against its class is taken, and said.
    let odd = json!([{"class": "alkali", "chemical": "sodium hypochlorite"}, rinsed(7.0, "0")]);
    let told = done(&app, LIST, &cleaning("uf-1", 5, odd), 201).await;
    let notes = told["notes"].to_string();
    assert!(notes.contains("recorded as alkali") && notes.contains("hypochlorite"), "{notes}");
}

#[tokio::test(flavor = "multi_thread")]
async fn seen_and_told_cleans_are_listed_together_newest_first() {
    let app = site(DAYS * 24).await;
    let seen = items(&app, LIST).await;
    assert_eq!(seen.len(), 1);
    assert_eq!((&seen[0]["origin"], &seen[0]["train"]), (&json!("inferred"), &json!("uf-1")));
    assert_eq!(seen[0]["kind"], "clean_in_place");
    let id = seen[0]["id"].as_str().unwrap();
    assert_eq!(app.get_json(&format!("{LIST}/{id}")).await, seen[0]);
    for day in [4, 6, 11] {
        done(&app, LIST, &cleaning("uf-1", day, json!([acid(), rinsed(7.0, "0")])), 201).await;
    }
    let all = items(&app, &format!("{LIST}?train=uf-1")).await;
    let origins: Vec<&str> = all.iter().map(|c| c["origin"].as_str().unwrap()).collect();
    assert_eq!(origins, ["recorded", "inferred", "recorded", "recorded"]);
    for n in [1, 2, 3] {
        assert_eq!(walk(&app, &format!("{LIST}?train=uf-1&limit={n}"), "items").await, all);
    }
    assert!(items(&app, &format!("{LIST}?train=uf-2")).await.is_empty());
    app.get(&format!("{LIST}/none")).await.problem(404, &format!("{LIST}/none"));
    app.get(&format!("{LIST}?train=uf-7")).await.problem(404, LIST);
}
