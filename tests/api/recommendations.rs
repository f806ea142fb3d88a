use serde_json::{Value, json};
use washbell::work;

use crate::site::{DAYS, done, items, no, site};

const LIST: &str = "/v1/recommendations";

#[tokio::test(flavor = "multi_thread")]
async fn a_recommendation_is_accepted_deferred_and_declined() {
    let app = site(DAYS * 24).await;
    let open = items(&app, LIST).await;
    let due = open.iter().find(|r| r["action"] == "clean_in_place").unwrap();
    assert_eq!(due["train"], "uf-2");
    let path = format!("{LIST}/{}", due["id"].as_str().unwrap());
    assert_eq!(app.get_json(&path).await, *due);
    let order = due["work_order"].as_str().unwrap().replace("WO ", "/v1/work-orders/");
    assert_eq!(app.get_json(&order).await["recommendation"], due["id"]);

    let accept = format!("{path}/accept");
    let accepted = done(&app, &accept, &json!({"by": "shift A"}), 200).await;
    assert_eq!(
        (&accepted["state"], accepted["decisions"].as_array().unwrap().len()),
        (&json!("open"), 1)
    );
    assert_eq!(done(&app, &accept, &json!({"by": "shift A"}), 200).await, accepted);
    assert_eq!(app.get_json(&order).await["state"], "draft", "accepting approves nothing");

    let defer = format!("{path}/defer");
    let until = "2026-03-16T06:00:00+00:00";
    for (body, pointer) in [
        (json!({"by": "shift A", "reason": "no crew"}), "/until"),
        (json!({"by": "shift A", "reason": "no crew", "until": "2026-03-01T00:00:00Z"}), "/until"),
        (json!({"by": "shift A", "until": until}), "/reason"),
        (json!({"by": "washbell", "reason": "no crew", "until": until}), "/by"),
    ] {
        assert_eq!(no(&app, &defer, &body, 422).await.1, pointer, "{body}");
    }
    let body = json!({"by": "shift A", "reason": "no crew", "until": until});
    let deferred = done(&app, &defer, &body, 200).await;
    assert_eq!((&deferred["state"], &deferred["silent_until"]), (&json!("open"), &json!(until)));

    let decline = format!("{path}/decline");
    let body = json!({"by": "shift B", "reason": "membranes are replaced next week"});
    let declined = done(&app, &decline, &body, 200).await;
    assert_eq!(
        (&declined["state"], &declined["closed"]["why"]),
        (&json!("closed"), &json!("declined"))
    );
    assert_eq!(done(&app, &decline, &body, 200).await, declined);
    no(&app, &accept, &json!({"by": "shift A"}), 409).await;
    let order = app.get_json(&order).await;
    assert_eq!(
        (&order["state"], &order["cancelled"]["why"]),
        (&json!("cancelled"), &json!("declined"))
    );

    assert!(items(&app, LIST).await.iter().all(|r| r["id"] != due["id"]));
    assert!(items(&app, &format!("{LIST}?state=closed")).await.contains(&declined));
    let all = items(&app, &format!("{LIST}?state=all&train=uf-2")).await;
    assert!(all.contains(&declined));
    app.get(&format!("{LIST}/none")).await.problem(404, &format!("{LIST}/none"));
}

#[tokio::test(flavor = "multi_thread")]
async fn data_that_are_too_old_raise_one_alarm() {
    let app = site(DAYS * 24 - 8).await;
    let (store, plant) = (app.worker.store(), app.worker.plant());
    let now = app.worker.clock().now();
    assert_eq!(work::watch(store, &plant, now).await.unwrap(), 1);
    assert_eq!(work::watch(store, &plant, now).await.unwrap(), 0, "said once");
    let alarms = items(&app, "/v1/alarms?state=unacknowledged").await;
    let stale: Vec<&Value> = alarms.iter().filter(|a| a["kind"] == "data_stale").collect();
    assert_eq!(stale.len(), 1);
    assert_eq!((&stale[0]["source"], &stale[0]["train"]), (&json!("scada"), &Value::Null));
    assert!(stale[0]["detail"].as_str().unwrap().contains("Friday 13 March 15:59"), "{stale:?}");
}
