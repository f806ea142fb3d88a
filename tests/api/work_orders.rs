use serde_json::{Value, json};

use crate::site::{DAYS, done, items, no, post, put, recipe_with_clean, rinsed, rows, site, take};
use crate::support::{TestApp, walk};

const LIST: &str = "/v1/work-orders";

/// An order by hand for the first train, by the site's procedure.
async fn asked(app: &TestApp) -> String {
    let body = json!({"train": "uf-1", "by": "shift A", "reason": "before the cold spell"});
    let order = done(app, LIST, &body, 201).await;
    assert_eq!(order["state"], "draft");
    let number = order["number"].as_str().unwrap().strip_prefix("WO ").unwrap().to_owned();
    format!("{LIST}/{number}")
}

/// What was done on day 8, from the plan as it is shown.
fn actuals(order: &Value) -> Value {
    let mut steps = order["steps"].clone();
    for step in steps.as_array_mut().unwrap() {
        if step["class"] == "rinse" {
            step["verified"] = json!({"ph": 7.2, "free_chlorine": 0.05, "by": "shift A"});
        }
    }
    json!({"start": "2026-03-10T07:00:00+00:00", "end": "2026-03-10T15:00:00+00:00",
           "steps": steps, "waste": "40 m3", "staff_hours": 12})
}

#[tokio::test(flavor = "multi_thread")]
async fn an_order_is_agreed_done_and_verified() {
    let app = site(DAYS * 24 - 2).await;
    let at = asked(&app).await;
    let path = |act: &str| format!("{at}/{act}");
    let kim = json!({"by": "shift A"});
    let sam = json!({"by": "shift B"});

    let draft = app.get_json(&at).await;
    assert_eq!((&draft["asset"], &draft["location"]), (&json!("MT-0101"), &draft["location"]));
    assert_eq!(draft["actions"], json!(["approve", "reject", "cancel"]));
    assert_eq!(draft["steps"][0]["active"], "4.8 kg", "400 mg/L in 12 m3");
    let (detail, _) = no(&app, &path("start"), &kim, 409).await;
    assert_eq!(detail, "Start does not follow draft: approve, reject or cancel can follow.");

    let approved = done(&app, &path("approve"), &kim, 200).await;
    assert_eq!(approved["state"], "approved");
    // Said again it is the same; said by another it is refused.
    assert_eq!(done(&app, &path("approve"), &kim, 200).await, approved);
    no(&app, &path("approve"), &sam, 409).await;

    let window = json!({"from": "2026-03-14T07:00:00Z", "to": "2026-03-14T15:00:00Z"});
    let scheduled = json!({"by": "shift A", "window": window});
    let order = done(&app, &path("schedule"), &scheduled, 200).await;
    assert_eq!(order["window"]["from"], "2026-03-14T07:00:00+00:00");
    let began = json!({"by": "shift B", "at": "2026-03-10T07:00:00Z"});
    let order = done(&app, &path("start"), &began, 200).await;
    assert_eq!(order["state"], "in_progress");
    let (_, pointer) = no(&app, &path("wait"), &sam, 422).await;
    assert_eq!(pointer, "/reason");
    let waits = json!({"by": "shift B", "reason": "heater tripped"});
    assert_eq!(done(&app, &path("wait"), &waits, 200).await["state"], "waiting");
    done(&app, &path("start"), &sam, 200).await;

    let mut body = json!({"by": "shift B", "actuals": actuals(&draft)});
    body["actuals"]["steps"][1]["verified"] = json!({"ph": 7.2, "by": "shift A"});
    let (detail, pointer) = no(&app, &path("complete"), &body, 422).await;
    assert_eq!(pointer, "/actuals/steps/1/verified/free_chlorine", "{detail}");
    body["actuals"]["steps"][1]["verified"] = json!({"ph": "neutral", "by": "shift A"});
    let (_, pointer) = no(&app, &path("complete"), &body, 422).await;
    assert_eq!(pointer, "/actuals/steps/1/verified/ph");
    body["actuals"] = actuals(&draft);
    let order = done(&app, &path("complete"), &body, 200).await;
    assert_eq!((&order["state"], &order["actuals"]["waste"]), (&json!("done"), &json!("40 m³")));
    assert_eq!(done(&app, &path("complete"), &body, 200).await["state"], "done");

    let told = format!("/v1/cleanings/{}", order["cleaning"].as_str().unwrap());
    let cleaning = app.get_json(&told).await;
    assert_eq!((&cleaning["origin"], &cleaning["by"]), (&json!("recorded"), &json!("shift B")));
    assert_eq!(cleaning["work_order"], order["number"]);
    assert_eq!(items(&app, "/v1/cleanings?train=uf-1").await.len(), 1, "seen and told is one");

    let test = json!({"passed": true, "at": "2026-03-10T16:00:00Z", "by": "shift B"});
    let verify = json!({"by": "shift C", "integrity_test": test});
    take(&app, &rows(&recipe_with_clean(), DAYS * 24 - 2, DAYS * 24)).await;
    let order = app.get_json(&at).await;
    assert_ne!(order["result"], Value::Null, "the verdict comes with the next hours: {order}");
    assert_eq!(order["result"]["verdict"], cleaning["verdict"]);
    let (detail, pointer) = no(&app, &path("verify"), &json!({"by": "shift C"}), 422).await;
    assert_eq!(pointer, "/integrity_test", "{detail}");
    let order = done(&app, &path("verify"), &verify, 200).await;
    assert_eq!((&order["state"], &order["actions"]), (&json!("verified"), &json!([])));
    let roles: Vec<&str> = order["sign_offs"]
        .as_array()
        .unwrap()
        .iter()
        .map(|s| s["role"].as_str().unwrap())
        .collect();
    let (engineer, operator) = ("shift_engineer", "operator");
    assert_eq!(roles, [engineer, engineer, operator, operator, operator, operator, "process"]);
    no(&app, &path("cancel"), &json!({"by": "shift A", "reason": "late"}), 409).await;

    // The journal holds every act once, with what it changed.
    let number = at.rsplit('/').next().unwrap();
    let plant = app.worker.plant();
    let acts = app.worker.store().acts_on(&plant.id, "work_order", number).await.unwrap();
    let told: Vec<(&str, &str, Option<&str>)> =
        acts.iter().map(|a| (a.what.as_str(), a.by.as_str(), a.after.as_deref())).collect();
    assert_eq!(
        told,
        [
            ("drafted", "shift A", Some("draft")),
            ("approved", "shift A", Some("approved")),
            ("scheduled", "shift A", Some("scheduled")),
            ("started", "shift B", Some("in_progress")),
            ("waits", "shift B", Some("waiting")),
            ("started", "shift B", Some("in_progress")),
            ("completed", "shift B", Some("done")),
            ("verified", "shift C", Some("verified")),
        ]
    );
    assert_eq!(acts[4].reason.as_deref(), Some("heater tripped"));
    assert_eq!(acts[4].before.as_deref(), Some("in_progress"));
}

#[tokio::test(flavor = "multi_thread")]
async fn a_plan_that_lets_chemicals_meet_is_not_approved() {
    let app = site(24).await;
    let plan = |steps: Value| json!({"train": "uf-1", "by": "shift A", "steps": steps});
    let bare = plan(json!([
        {"chemical": "sodium hypochlorite", "concentration": "400 mg/L"},
        {"chemical": "citric acid", "concentration": "1 %"},
        {"class": "rinse", "verified": {"ph": "6 .. 9", "free_chlorine_max": "0.5 mg/L"}}
    ]));
    let order = done(&app, LIST, &bare, 201).await;
    assert_eq!(order["steps"][0]["class"], "hypochlorite", "by its name");
    let path = format!("{LIST}/{}/approve", order["number"].as_str().unwrap());
    let got = post(&app, &path.replace(' ', "%20"), &json!({"by": "shift A"})).await;
    assert_eq!(got.status, 422, "{got:?}");
    let problem = got.json();
    assert_eq!(problem["errors"][0]["pointer"], "/steps/1");
    assert!(problem["detail"].as_str().unwrap().contains("must not meet"), "{problem}");

    // One open order a train; the same words are the same draft.
    assert_eq!(done(&app, LIST, &bare, 200).await, order);
    let (detail, pointer) = no(&app, LIST, &plan(json!([])), 409).await;
    assert_eq!(pointer, "/train");
    assert!(detail.contains(order["number"].as_str().unwrap()), "{detail}");
    let strong = json!({"train": "uf-2", "by": "shift A", "steps": [
        {"class": "hypochlorite", "concentration": "2 %"},
        {"class": "rinse", "verified": {"ph_range": [6, 9], "free_chlorine_max": 0.5}}
    ]});
    let order = done(&app, LIST, &strong, 201).await;
    let number = order["number"].as_str().unwrap().strip_prefix("WO ").unwrap().to_owned();
    let path = format!("{LIST}/{number}/approve");
    let (detail, pointer) = no(&app, &path, &json!({"by": "shift A"}), 422).await;
    assert_eq!(pointer, "/steps/0/concentration");
    assert!(detail.contains("step 1") && detail.contains("membrane"), "{detail}");

    for (body, status, pointer) in [
        (json!({"train": "uf-9", "by": "shift A"}), 422, "/train"),
        (json!({"train": "uf-1", "by": "shift A", "needed_by": "Monday"}), 422, "/needed_by"),
        (json!({"train": "uf-1", "by": "washbell"}), 422, "/by"),
        (json!({"train": "uf-1", "by": "shift A", "colour": "red"}), 422, "/colour"),
    ] {
        assert_eq!(no(&app, LIST, &body, status).await.1, pointer, "{body}");
    }
}

#[tokio::test(flavor = "multi_thread")]
async fn two_people_do_not_overwrite_each_other() {
    let app = site(24).await;
    let at = asked(&app).await;
    let approve = format!("{at}/approve");
    let people: Vec<Value> = (0..8).map(|i| json!({"by": format!("person {i}")})).collect();
    let all = people.iter().map(|body| post(&app, &approve, body));
    let statuses: Vec<u16> =
        futures_util::future::join_all(all).await.iter().map(|g| g.status).collect();
    assert_eq!(statuses.iter().filter(|s| **s == 200).count(), 1, "{statuses:?}");
    assert_eq!(statuses.iter().filter(|s| **s == 409).count(), 7, "{statuses:?}");
    let order = app.get_json(&at).await;
    assert_eq!(order["sign_offs"].as_array().unwrap().len(), 1);
}

#[tokio::test(flavor = "multi_thread")]
async fn orders_are_listed_by_state_and_named_in_the_other_system() {
    let app = site(24).await;
    let at = asked(&app).await;
    let second = json!({"train": "uf-2", "by": "shift A", "kind": "maintenance_clean"});
    done(&app, LIST, &second, 201).await;
    done(&app, &format!("{LIST}/2/cancel"), &json!({"by": "shift A", "reason": "no crew"}), 200)
        .await;
    let numbers = |list: Vec<Value>| -> Vec<String> {
        list.iter().map(|o| o["number"].as_str().unwrap().to_owned()).collect()
    };
    assert_eq!(numbers(items(&app, LIST).await), ["WO 2", "WO 1"]);
    assert_eq!(numbers(items(&app, &format!("{LIST}?state=open")).await), ["WO 1"]);
    assert_eq!(numbers(items(&app, &format!("{LIST}?state=cancelled")).await), ["WO 2"]);
    assert_eq!(numbers(items(&app, &format!("{LIST}?train=uf-1")).await), ["WO 1"]);
    assert_eq!(numbers(walk(&app, &format!("{LIST}?limit=1"), "items").await), ["WO 2", "WO 1"]);
    let later = format!("{LIST}?changed_since=2026-03-15T00:00:00Z");
    assert!(items(&app, &later).await.is_empty());
    assert_eq!(items(&app, &format!("{LIST}?changed_since=2026-03-13T00:00:00Z")).await.len(), 2);
    let detail = app.get(&format!("{LIST}?state=drafts")).await.problem(400, LIST);
    assert!(detail.contains("`draft`"), "{detail}");
    for number in ["WO%201", "wo-1", "1"] {
        assert_eq!(app.get_json(&format!("{LIST}/{number}")).await["number"], "WO 1");
    }
    app.get(&format!("{LIST}/9")).await.problem(404, &format!("{LIST}/9"));
    app.get(&format!("{LIST}/pump")).await.problem(404, &format!("{LIST}/pump"));

    let external = format!("{at}/external");
    let named = json!({"system": "maintenance", "number": 4711, "url": "https://wo.example/4711"});
    let got = put(&app, &external, &named).await;
    assert_eq!((got.status, &got.json()["external"]["number"]), (200, &json!("4711")));
    assert_eq!(put(&app, &external, &named).await.text, got.text);
    let wrong = json!({"system": "maintenance", "number": "1", "url": "javascript:alert(1)"});
    put(&app, &external, &wrong).await.problem(422, &external);
}

#[tokio::test(flavor = "multi_thread")]
async fn a_cleaning_that_names_an_order_completes_it() {
    let app = site(DAYS * 24).await;
    let at = asked(&app).await;
    let number = app.get_json(&at).await["number"].clone();
    let body = json!({
        "train": "uf-1", "start": "2026-03-10T07:00:00Z", "end": "2026-03-10T15:00:00Z",
        "kind": "clean_in_place", "work_order": number, "by": "shift A",
        "steps": [{"chemical": "citric acid", "concentration": "1 %"}, rinsed(7.0, "0.1 mg/L")]
    });
    let cleaning = done(&app, "/v1/cleanings", &body, 201).await;
    assert_eq!(cleaning["work_order"], number);
    let order = app.get_json(&at).await;
    assert_eq!((&order["state"], &order["cleaning"]), (&json!("done"), &cleaning["id"]));
    let notes = order["annotations"].to_string();
    assert!(notes.contains("before anybody had approved"), "{notes}");
    assert_eq!(done(&app, "/v1/cleanings", &body, 200).await["id"], cleaning["id"]);
    for (name, value) in [("work_order", json!("WO 77")), ("train", json!("uf-2"))] {
        let mut other = body.clone();
        other[name] = value;
        let (_, pointer) = no(&app, "/v1/cleanings", &other, 422).await;
        assert_eq!(pointer, "/work_order", "{other}");
    }
}

#[tokio::test(flavor = "multi_thread")]
async fn a_clean_told_before_its_order_is_done_stays_one_record() {
    let app = site(DAYS * 24).await;
    let at = asked(&app).await;
    let order = app.get_json(&at).await;
    let done_then = actuals(&order);
    let body = json!({"train": "uf-1", "start": done_then["start"], "end": done_then["end"],
                      "kind": "clean_in_place", "steps": done_then["steps"]});
    let cleaning = done(&app, "/v1/cleanings", &body, 201).await;
    assert_eq!(app.get_json(&at).await["state"], "draft", "it did not name the order");
    done(&app, &format!("{at}/approve"), &json!({"by": "shift A"}), 200).await;
    done(&app, &format!("{at}/start"), &json!({"by": "shift A"}), 200).await;
    let mut off = json!({"by": "shift A", "actuals": done_then});
    off["actuals"]["end"] = json!("2026-03-10T15:30:00Z");
    let complete = format!("{at}/complete");
    let (detail, pointer) = no(&app, &complete, &off, 409).await;
    assert_eq!(pointer, "/actuals/start");
    assert!(detail.contains(cleaning["id"].as_str().unwrap()), "{detail}");
    off["actuals"]["end"] = done_then["end"].clone();
    assert_eq!(done(&app, &complete, &off, 200).await["cleaning"], cleaning["id"]);
    assert_eq!(items(&app, "/v1/cleanings?train=uf-1").await.len(), 1);
}
