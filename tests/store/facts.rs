use std::collections::BTreeMap;

use washbell::base::{Counts, Outcome, Rejection, SourceId, Span, TrainId};
use washbell::plant::{Phase, Step, StepClass, VerifiedRinse};
use washbell::store::{
    Act, Cleaning, CleaningFilter, PlantFile, ReceiptFilter, StoreError, new_id,
};

use crate::{PLANT, at, given, receipt, source};

#[tokio::test]
async fn a_receipt_comes_back_whole() {
    let given = given().await;
    let mut told = receipt("a");
    told.outcome = Outcome::TakenWithFaults;
    told.readings =
        Counts { accepted: 1, repeated: 2, revised: 3, bad: 4, missing: 5, rejected: 6 };
    told.unmapped_columns = vec!["FT-900".into(), "a \"b\", é".into()];
    told.rejections = vec![Rejection {
        line: 14,
        column: "PT-101".into(),
        value: "1.2.3".into(),
        reason: "not a number".into(),
    }];
    told.rejections_total = 1500;
    told.repeated_hour_rows = 60;
    told.skipped_hour_rows = 1;
    told.earlier = Some("before".into());
    told.notes = vec!["The last line had no end.".into()];
    told.from = None;
    let intake = given.store.begin_intake(PLANT).await.unwrap();
    intake.commit(&told, "m1").await.unwrap();

    assert_eq!(given.store.receipt(PLANT, &told.id).await.unwrap().as_ref(), Some(&told));
    assert_eq!(given.store.receipt(PLANT, "none").await.unwrap(), None);
    assert_eq!(given.store.receipt("elsewhere", &told.id).await.unwrap(), None);
    assert_eq!(given.store.pending_receipts(PLANT).await.unwrap(), [told.id.clone()]);

    told.changed_from = BTreeMap::from([(TrainId::new("uf-1"), at(3))]);
    told.analysed = true;
    given.store.set_analysed(PLANT, &told.id, &told.changed_from, true).await.unwrap();
    assert_eq!(given.store.receipt(PLANT, &told.id).await.unwrap(), Some(told));
    assert!(given.store.pending_receipts(PLANT).await.unwrap().is_empty());
}

#[tokio::test]
async fn the_same_file_under_one_mapping_is_stored_once() {
    let given = given().await;
    let (first, second, other) = (receipt("same"), receipt("same"), receipt("same"));
    given.store.begin_intake(PLANT).await.unwrap().commit(&first, "m1").await.unwrap();
    let again = given.store.begin_intake(PLANT).await.unwrap().commit(&second, "m1").await;
    assert!(matches!(again, Err(StoreError::Exists(_))));
    given.store.begin_intake(PLANT).await.unwrap().commit(&other, "m2").await.unwrap();

    let find = |mapping: &'static str| {
        let (store, digest) = (given.store.clone(), first.digest.clone());
        async move { store.receipt_by_digest(PLANT, &source(), &digest, mapping).await.unwrap() }
    };
    assert_eq!(find("m1").await.unwrap().id, first.id);
    assert_eq!(find("m2").await.unwrap().id, other.id);
    assert_eq!(find("m3").await, None);
    let newest = given.store.newest_receipt_of(PLANT, &source(), &first.digest).await.unwrap();
    assert_eq!(newest.unwrap().id, other.id);
    let none = given.store.newest_receipt_of(PLANT, &source(), "sha256:none").await.unwrap();
    assert_eq!(none, None);
}

#[tokio::test]
async fn receipts_are_listed_newest_first_page_by_page() {
    let given = given().await;
    let mut ids = Vec::new();
    for i in 0..5 {
        let mut told = receipt(&i.to_string());
        told.received = at(i * 60);
        told.file = format!("{i}.csv");
        if i == 1 {
            told.source = SourceId::new("lab");
        }
        given.store.begin_intake(PLANT).await.unwrap().commit(&told, "m1").await.unwrap();
        ids.push(told.id);
    }
    let list = |filter: ReceiptFilter| {
        let store = given.store.clone();
        async move {
            let found = store.receipts(PLANT, &filter).await.unwrap();
            found.into_iter().map(|r| r.id).collect::<Vec<_>>()
        }
    };
    let all = ReceiptFilter { limit: 2, ..ReceiptFilter::default() };
    assert_eq!(list(all.clone()).await, [ids[4].clone(), ids[3].clone()]);
    let next = ReceiptFilter { after: Some(ids[3].clone()), ..all.clone() };
    assert_eq!(list(next).await, [ids[2].clone(), ids[1].clone()]);
    let lab = ReceiptFilter { source: Some(SourceId::new("lab")), ..all.clone() };
    assert_eq!(list(lab).await, [ids[1].clone()]);
    let file = ReceiptFilter { file: Some("2.csv".into()), ..all.clone() };
    assert_eq!(list(file).await, [ids[2].clone()]);
    let since = ReceiptFilter { since: Some(at(240)), ..all };
    assert_eq!(list(since).await, [ids[4].clone()]);
}

fn cleaning(train: &str, start: i64, reference: Option<&str>) -> Cleaning {
    Cleaning {
        id: new_id(),
        train: TrainId::new(train),
        span: Span::new(at(start), at(start + 240)),
        kind: Phase::CleanInPlace,
        steps: vec![Step {
            class: StepClass::Alkali,
            chemical: Some("sodium hydroxide".into()),
            concentration: Some("0.1 %".into()),
            ph: Some(11.5),
            temperature_degc: Some(35.0),
            duration_us: Some(14_400_000_000),
            volume_m3: None,
            verified: Some(VerifiedRinse {
                ph_range: Some((6.0, 9.0)),
                free_chlorine_max_mg_l: Some(0.5),
                ph: Some(7.25),
                free_chlorine_mg_l: None,
                by: Some("shift B".into()),
            }),
        }],
        work_order: Some("WO 41".into()),
        reference: reference.map(str::to_owned),
        recorded: at(start + 300),
        by: None,
    }
}

#[tokio::test]
async fn cleanings_are_kept_found_and_mark_their_days() {
    let given = given().await;
    let store = &given.store;
    let (a, b, c) =
        (cleaning("uf-1", 0, Some("x1")), cleaning("uf-2", 0, None), cleaning("uf-1", 5000, None));
    store.save_cleaning(PLANT, &a, &[(a.train.clone(), at(0))]).await.unwrap();
    store.save_cleaning(PLANT, &b, &[]).await.unwrap();
    store.save_cleaning(PLANT, &c, &[]).await.unwrap();
    assert_eq!(store.dirty_days(PLANT).await.unwrap().len(), 1);
    let twice = cleaning("uf-2", 9, Some("x1"));
    let taken = store.save_cleaning(PLANT, &twice, &[(b.train.clone(), at(0))]).await;
    assert!(matches!(taken, Err(StoreError::Exists(_))));
    assert_eq!(store.dirty_days(PLANT).await.unwrap().len(), 1, "a refused fact marks nothing");

    assert_eq!(store.cleaning(PLANT, &a.id).await.unwrap().as_ref(), Some(&a));
    assert_eq!(store.cleaning_by_reference(PLANT, "x1").await.unwrap().as_ref(), Some(&a));
    assert_eq!(store.cleaning_by_reference(PLANT, "x2").await.unwrap(), None);
    let list =
        |filter: CleaningFilter| async move { store.cleanings(PLANT, &filter).await.unwrap() };
    let all = CleaningFilter { limit: 2, ..CleaningFilter::default() };
    assert_eq!(list(all.clone()).await, [c.clone(), b.clone()]);
    let after = Some((b.span.from, b.id.clone()));
    assert_eq!(list(CleaningFilter { after, ..all.clone() }).await, std::slice::from_ref(&a));
    let train = Some(TrainId::new("uf-1"));
    assert_eq!(list(CleaningFilter { train, ..all.clone() }).await, [c.clone(), a.clone()]);
    let span = Some(Span::new(at(5239), at(5300)));
    assert_eq!(list(CleaningFilter { span, ..all.clone() }).await, [c]);
    let span = Some(Span::new(at(240), at(5000)));
    assert_eq!(list(CleaningFilter { span, ..all }).await, []);
}

#[tokio::test]
async fn acts_are_kept_in_order() {
    let given = given().await;
    let act = |subject: &str, what: &str| Act {
        id: new_id(),
        at: at(5),
        by: "shift B".into(),
        what: what.into(),
        subject_kind: "recommendation".into(),
        subject: subject.into(),
        reason: Some("spare pump is out".into()),
        before: Some("open".into()),
        after: None,
    };
    let acts = [act("r1", "defer"), act("r2", "accept"), act("r1", "decline")];
    for act in &acts {
        given.store.save_act(PLANT, act).await.unwrap();
    }
    let on = given.store.acts_on(PLANT, "recommendation", "r1").await.unwrap();
    assert_eq!(on, [acts[0].clone(), acts[2].clone()]);
    assert_eq!(given.store.acts_on(PLANT, "alarm", "r1").await.unwrap(), []);
    let newest = given.store.acts(PLANT, None, 2).await.unwrap();
    assert_eq!(newest, [acts[2].clone(), acts[1].clone()]);
    let rest = given.store.acts(PLANT, Some(&acts[1].id), 2).await.unwrap();
    assert_eq!(rest, [acts[0].clone()]);
}

#[tokio::test]
async fn a_plant_file_is_kept_each_time_it_means_something_else() {
    let given = given().await;
    let file = |revision: &str, minute| PlantFile {
        revision: revision.into(),
        mapping: "m".into(),
        content: format!("# {minute}\n[plant]\n"),
        seen: at(minute),
    };
    assert_eq!(given.store.latest_plant_file(PLANT).await.unwrap(), None);
    for (revision, minute, another) in
        [("a", 0, true), ("a", 1, false), ("b", 2, true), ("a", 3, true)]
    {
        let saved = given.store.save_plant_file(PLANT, &file(revision, minute)).await.unwrap();
        assert_eq!(saved, another, "{minute}");
    }
    assert!(given.store.save_plant_file("elsewhere", &file("a", 9)).await.unwrap());
    assert_eq!(given.store.latest_plant_file(PLANT).await.unwrap(), Some(file("a", 3)));
    assert_eq!(given.store.plant_file(PLANT, "b").await.unwrap(), Some(file("b", 2)));
    assert_eq!(given.store.plant_file(PLANT, "c").await.unwrap(), None);
}
