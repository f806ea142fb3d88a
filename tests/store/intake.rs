use washbell::base::{CellValue, Counts, Span, Tag, TrainId};
use washbell::store::{StoreError, StoredValue};

use crate::{PLANT, at, column, days, deliver, given, merge, minutes, receipt, source, tag};
use CellValue::{Bad, Number, Word};

fn counts(accepted: u64, repeated: u64, revised: u64) -> Counts {
    Counts { accepted, repeated, revised, ..Counts::default() }
}

#[tokio::test]
async fn readings_over_midnight_come_back_as_delivered() {
    let given = given().await;
    let delivered = minutes(1430, 1450, 1);
    let receipt = receipt("a");
    let mut intake = given.store.begin_intake(PLANT).await.unwrap();
    let outcome = merge(&mut intake, "PT-101", &delivered, &receipt.id).await;
    assert_eq!(outcome.counts, counts(20, 0, 0));
    let end = |m| at(m).plus(1);
    assert_eq!(outcome.changed, [Span::new(at(1430), end(1439)), Span::new(at(1440), end(1449))]);
    assert_eq!(intake.newest(&source()).await.unwrap(), Some(at(1449)));
    intake.commit(&receipt, "m1").await.unwrap();

    let span = Span::new(at(1435), at(1445));
    let read = given.store.readings(PLANT, &[tag("FT-1"), tag("PT-101")], span).await.unwrap();
    assert!(read[0].is_empty());
    assert_eq!(read[1].times, delivered.times[5..15]);
    assert_eq!(read[1].values, delivered.values[5..15]);
    let other = given.store.readings("elsewhere", &[tag("PT-101")], span).await.unwrap();
    assert!(other[0].is_empty(), "another plant's readings");
    let none = given.store.readings(PLANT, &[tag("PT-101")], Span::new(at(9), at(9))).await;
    assert!(none.unwrap()[0].is_empty());
}

#[tokio::test]
async fn what_is_not_committed_is_undone() {
    let given = given().await;
    let receipt = receipt("a");
    let mut intake = given.store.begin_intake(PLANT).await.unwrap();
    merge(&mut intake, "PT-101", &minutes(0, 10, 1), &receipt.id).await;
    intake.mark_dirty(&[(TrainId::new("uf-1"), at(0))]).await.unwrap();
    drop(intake);
    let read = given.store.readings(PLANT, &[tag("PT-101")], days(0, 1)).await.unwrap();
    assert!(read[0].is_empty());
    assert_eq!(given.store.dirty_days(PLANT).await.unwrap(), []);
    // And the writer is free again.
    deliver(&given.store, "PT-101", &minutes(0, 10, 1)).await;
}

#[tokio::test]
async fn the_same_again_changes_nothing_and_another_value_is_kept_beside_the_old() {
    let given = given().await;
    let first = deliver(
        &given.store,
        "XS-1",
        &column(&[(0, Number(1.0)), (1, Word(0)), (2, Bad(1)), (3, Number(0.1))], &["RUN", "Bad"]),
    )
    .await;
    let later = column(
        &[(3, Number(0.3)), (0, Number(1.0)), (1, Word(1)), (2, Number(-0.0)), (0, Bad(2))],
        &["RUN", "STOP", "No reply"],
    );
    let receipt = receipt("b");
    let (source, name) = tag("XS-1");
    let mut intake = given.store.begin_intake(PLANT).await.unwrap();
    let outcome = merge(&mut intake, "XS-1", &later, &receipt.id).await;
    assert_eq!(outcome.counts, counts(1, 1, 2));
    assert_eq!(outcome.changed, [Span::new(at(1), at(3).plus(1))]);
    let again = merge(&mut intake, "XS-1", &later, &receipt.id).await;
    assert_eq!((again.counts, again.changed.len()), (counts(0, 4, 0), 0));
    intake.commit(&receipt, "m1").await.unwrap();

    let kept = given.store.revisions(PLANT, &source, &name, days(0, 1)).await.unwrap();
    let told: Vec<_> = kept.iter().map(|r| (r.time, r.old.clone(), r.new.clone())).collect();
    assert_eq!(
        told,
        [
            (at(1), StoredValue::Word("RUN".into()), StoredValue::Word("STOP".into())),
            (at(2), StoredValue::Bad("Bad".into()), StoredValue::Number(-0.0)),
            (at(3), StoredValue::Number(0.1), StoredValue::Number(0.3)),
        ]
    );
    assert!(kept.iter().all(|r| r.receipt == receipt.id && r.tag == name));
    let of = |id: String, after| {
        let store = given.store.clone();
        async move { store.revisions_by_receipt(PLANT, &id, after, 2).await.unwrap() }
    };
    assert_eq!(of(first, 0).await, []);
    assert_eq!(of(receipt.id.clone(), 0).await, kept[..2]);
    assert_eq!(of(receipt.id.clone(), kept[1].seq).await, kept[2..]);
}

#[tokio::test]
async fn one_intake_sees_its_own_earlier_and_later_days() {
    let given = given().await;
    deliver(&given.store, "PT-1", &minutes(5 * 1440, 5 * 1440 + 10, 1)).await;
    let receipt = receipt("b");
    let mut intake = given.store.begin_intake(PLANT).await.unwrap();
    for (from, to, want) in [
        (0, 100, counts(100, 0, 0)),
        (100, 3000, counts(2900, 0, 0)),
        (2990, 3010, counts(10, 10, 0)),
        (5 * 1440, 5 * 1440 + 20, counts(10, 10, 0)),
        (9 * 1440, 9 * 1440 + 20, counts(20, 0, 0)),
        (7 * 1440, 7 * 1440 + 20, counts(20, 0, 0)),
        (7 * 1440, 7 * 1440 + 20, counts(0, 20, 0)),
        (9 * 1440, 9 * 1440 + 20, counts(0, 20, 0)),
    ] {
        let outcome = merge(&mut intake, "PT-1", &minutes(from, to, 1), &receipt.id).await;
        assert_eq!(outcome.counts, want, "{from}..{to}");
    }
    intake.commit(&receipt, "m1").await.unwrap();
    let read = given.store.readings(PLANT, &[tag("PT-1")], days(0, 30)).await.unwrap();
    assert_eq!(read[0].len(), 3010 + 20 * 3);
    assert!(read[0].times.windows(2).all(|w| w[0] < w[1]));
}

#[tokio::test]
async fn many_tags_at_once_and_one_twice_are_merged_as_one_by_one() {
    let given = given().await;
    deliver(&given.store, "PT-7", &minutes(1400, 1500, 7)).await;
    let receipt = receipt("b");
    let mut block: Vec<_> =
        (0..20).map(|t| (source(), Tag::new(&format!("PT-{t}")), minutes(1430, 1450, t))).collect();
    block.push((source(), Tag::new("PT-3"), minutes(1445, 1460, 3)));
    block.push((source(), Tag::new("PT-30"), column(&[], &[])));
    let mut intake = given.store.begin_intake(PLANT).await.unwrap();
    let outcomes = intake.merge(&block, &receipt.id).await.unwrap();
    intake.commit(&receipt, "m1").await.unwrap();
    let told: Vec<_> = outcomes.iter().map(|o| (o.counts.accepted, o.counts.repeated)).collect();
    let mut want = vec![(20, 0); 20];
    want[7] = (0, 20);
    want.extend([(10, 5), (0, 0)]);
    assert_eq!(told, want);
    let tags: Vec<_> = (0..20).map(|t| tag(&format!("PT-{t}"))).collect();
    let read = given.store.readings(PLANT, &tags, days(0, 2)).await.unwrap();
    for (t, read) in read.iter().enumerate() {
        let (from, to) =
            if t == 7 { (1400, 1500) } else { (1430, if t == 3 { 1460 } else { 1450 }) };
        assert_eq!(read.values, minutes(from, to, t as i64).values, "PT-{t}");
    }
}

#[tokio::test]
async fn newest_and_last_readings_are_found() {
    let given = given().await;
    let (source, name) = tag("XS-1");
    assert_eq!(given.store.newest_reading(PLANT, &source).await.unwrap(), None);
    deliver(
        &given.store,
        "XS-1",
        &column(&[(7, Word(0)), (4 * 1440 + 5, Word(1))], &["RUN", "STOP"]),
    )
    .await;
    deliver(&given.store, "PT-1", &minutes(100, 200, 1)).await;
    let tags = [tag("PT-1"), tag("none"), (source.clone(), name)];
    let newest = given.store.newest_readings(PLANT, &tags).await.unwrap();
    assert_eq!(newest, [Some(at(199)), None, Some(at(4 * 1440 + 5))]);
    let newest = given.store.newest_reading(PLANT, &source).await.unwrap();
    assert_eq!(newest, Some(at(4 * 1440 + 5)));
    assert_eq!(given.store.newest_reading(PLANT, &crate::SourceId::new("x")).await.unwrap(), None);

    // The state of three days ago still holds early on day 4, though that day has its own.
    let held = given.store.last_before(PLANT, &tags, at(4 * 1440 + 5)).await.unwrap();
    assert_eq!((held[0].times[0], held[1].len()), (at(199), 0));
    assert_eq!((held[2].times.as_slice(), held[2].word(0)), (&[at(7)][..], "RUN"));
    let held = given.store.last_before(PLANT, &tags[2..], at(4 * 1440 + 6)).await.unwrap();
    assert_eq!((held[0].values.len(), held[0].words.last().unwrap().as_str()), (1, "STOP"));
    assert!(given.store.last_before(PLANT, &tags[2..], at(7)).await.unwrap()[0].is_empty());
}

#[tokio::test]
async fn a_day_marked_again_while_it_was_worked_stays_dirty() {
    let given = given().await;
    let (a, b) = (TrainId::new("uf-1"), TrainId::new("uf-2"));
    let receipt = receipt("a");
    let mut intake = given.store.begin_intake(PLANT).await.unwrap();
    intake
        .mark_dirty(&[(b.clone(), at(0)), (a.clone(), at(0)), (a.clone(), at(1440))])
        .await
        .unwrap();
    intake.mark_dirty(&[]).await.unwrap();
    intake.commit(&receipt, "m1").await.unwrap();
    let seen = given.store.dirty_days(PLANT).await.unwrap();
    let keys: Vec<_> = seen.iter().map(|d| (d.day_start, d.train.clone())).collect();
    assert_eq!(keys, [(at(0), a.clone()), (at(0), b), (at(1440), a.clone())]);
    given.store.mark_dirty(PLANT, &[(a.clone(), at(0))]).await.unwrap();
    given.store.clear_dirty("elsewhere", &seen).await.unwrap();
    given.store.clear_dirty(PLANT, &seen).await.unwrap();
    let left = given.store.dirty_days(PLANT).await.unwrap();
    assert_eq!(
        left.iter().map(|d| (d.day_start, d.train.clone())).collect::<Vec<_>>(),
        [(at(0), a)]
    );
}

#[tokio::test]
async fn what_no_chunk_can_hold_is_refused_with_its_tag() {
    let given = given().await;
    let (source, name) = tag("PT-1");
    let mut intake = given.store.begin_intake(PLANT).await.unwrap();
    let nan = column(&[(0, Number(f64::NAN))], &[]);
    let refused = intake.merge(&[(source, name, nan)], "r").await;
    assert!(matches!(refused, Err(StoreError::Chunk { tag, .. }) if tag == "PT-1"));
}
