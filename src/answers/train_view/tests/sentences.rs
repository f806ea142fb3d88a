use super::*;

#[test]
fn a_limit_ahead_names_the_latest_start() {
    let loss = "Lost 27.4 % of permeability against the last clean that restored it (baseline 231 \
                L/(m²·h·bar)); clean limit (30 %) ";
    Held::new().with_clean("2026-03-08T04:00").says(
        "clean_in_place",
        &format!(
            "{loss}most likely Thursday 12 March, one chance in ten before Tuesday 10 March: start \
             the clean now, the latest start was Sunday 8 March 04:00."
        ),
    );
    Held::new()
        .with_clean("2026-03-09T08:00")
        .with(|h| h.open[0].silent_until = Some(at("2026-03-08T14:00")))
        .with(|h| h.loss_dates(dates("2026-03-07", "2026-03-12", "")))
        .says(
            "clean_in_place",
            &format!(
                "{loss}most likely Thursday 12 March, one chance in ten already: start the clean \
                 by Monday 9 March 08:00 (deferred until Sunday 8 March 14:00)."
            ),
        );
    Held::new()
        .with_clean("2026-03-06T04:00")
        .with(|h| h.loss_dates(dates("2026-03-05", "2026-03-07", "2026-03-09")))
        .says(
            "clean_in_place",
            &format!(
                "{loss}most likely reached by now: start the clean now, the latest start was \
                 Friday 6 March 04:00."
            ),
        );
    // No recommendation, though the limit is near: never "no clean needed".
    Held::new().says(
        "cannot_advise",
        &format!(
            "{loss}most likely Thursday 12 March, one chance in ten before Tuesday 10 March. \
             Cannot advise: no recommendation to clean is open; see whether it was declined."
        ),
    );
}

#[test]
fn a_limit_far_off_says_that_no_clean_is_needed() {
    let loss = "Lost 12 % of permeability against the new membrane as the plant file states it \
                (baseline 231 L/(m²·h·bar)); ";
    let far = || {
        Held::new().with(|h| {
            h.loss_dates(dates("2026-06-03", "2026-06-20", ""));
            if let Some(l) = h.standing.loss.as_mut() {
                l.share = 0.12;
            }
            if let Some(b) = h.standing.baseline.as_mut() {
                b.kind = crate::analysis::BaselineKind::AsNew;
            }
        })
    };
    far().says(
        "no_clean_needed",
        &format!(
            "{loss}clean limit (30 %) most likely Saturday 20 June, one chance in ten before \
             Wednesday 3 June: no clean needed now."
        ),
    );
    far().with(|h| h.loss_dates(dates("2026-06-03", "", ""))).says(
        "no_clean_needed",
        &format!(
            "{loss}clean limit (30 %) more likely than not further off than 180 days, one chance \
             in ten before Wednesday 3 June: no clean needed now."
        ),
    );
    far().with(|h| h.loss_dates(dates("", "", ""))).says(
        "no_clean_needed",
        &format!("{loss}no clean limit is likely within 180 days: no clean needed now."),
    );
    far()
        .with(|h| h.hold(LimitKind::LossAdvisory, "2026-03-02T03:00", Some("2026-03-02T10:00")))
        .says(
            "no_clean_needed",
            &format!(
                "{loss}past the advisory limit (20 %) since Monday 2 March; clean limit (30 %) \
                 most likely Saturday 20 June, one chance in ten before Wednesday 3 June: no clean \
                 needed now."
            ),
        );
    far()
        .with(|h| {
            h.standing.loss = None;
            h.open.push(open(Action::CheckInstrument, Urgency::ThisWeek, None));
            h.standing.troubles = vec![Reason::NoPressure];
        })
        .says(
            "check_instrument",
            "Loss of permeability is not known now, for no start of a cycle was seen in the last \
             day; TMP at the end of a cycle is 0.412 bar; clean limit (30 %) most likely Saturday \
             20 June, one chance in ten before Wednesday 3 June. Check the instruments: hours of \
             filtration could not be used because of their readings. In the last day hours could \
             not be used: There is no usable reading of a pressure.",
        );
}

#[test]
fn a_limit_that_has_held_asks_for_a_clean() {
    let loss = "Lost 31.5 % of permeability against the last clean that restored it (baseline 231 \
                L/(m²·h·bar)); past the clean limit (30 %) since Saturday 7 March 22:00";
    let over = || {
        Held::new().with(|h| {
            if let Some(l) = h.standing.loss.as_mut() {
                l.share = 0.315;
            }
        })
    };
    over()
        .with(|h| h.hold(LimitKind::LossClean, "2026-03-07T22:00", Some("2026-03-08T05:00")))
        .with_clean("2026-03-06T21:00")
        .says(
            "clean_in_place",
            &format!("{loss}: clean it as soon as a window, the crew and the other trains allow."),
        );
    // Past the limit but not for the on-delay, and nothing open yet.
    over().with(|h| h.hold(LimitKind::LossClean, "2026-03-07T22:00", None)).says(
        "cannot_advise",
        &format!(
            "{loss}, not yet long enough to count. Cannot advise yet: the limit counts once it has \
             been past for the whole on-delay."
        ),
    );
    Held::new()
        .with(|h| {
            h.units = UnitSystem::Us;
            h.hold(LimitKind::TmpClean, "2026-03-07T22:00", Some("2026-03-08T05:00"));
            h.standing.end_tmp_pa = Some((1.25e5, at("2026-03-08T05:00")));
            h.standing.baseline = None;
            h.standing.loss = None;
        })
        .with_clean("2026-03-06T21:00")
        .says(
            "clean_in_place",
            "Loss of permeability cannot be told without a baseline; TMP at the end of a cycle is \
             18.13 psi; past the clean limit of TMP (17.4 psi) since Saturday 7 March 22:00: clean \
             it as soon as a window, the crew and the other trains allow.",
        );
}

#[test]
fn what_cannot_be_told_is_said_with_its_reason() {
    let young = || {
        Held::new().with(|h| {
            h.no_dates(NoDates::YoungRun);
            if let Some(l) = h.standing.loss.as_mut() {
                l.share = -0.012;
            }
        })
    };
    young().says(
        "no_clean_needed",
        "Permeability is 1.2 % up against the last clean that restored it (baseline 231 \
         L/(m²·h·bar)); limits have not been reached: no clean needed now. It cannot be told yet \
         when limits will be reached, because five whole days of filtration are needed for a trend \
         and have not passed.",
    );
    // Nothing read since the clean: not even that can be said.
    young()
        .with(|h| {
            h.standing.loss = None;
            h.standing.end_tmp_pa = None;
        })
        .says(
            "cannot_advise",
            "Loss of permeability is not known now, for no start of a cycle was seen in the last \
             day. Cannot advise: five whole days of filtration are needed for a trend and have not \
             passed.",
        );
    // Young, but no clean began it.
    young()
        .with(|h| {
            h.standing.run_start = None;
            if let Some(l) = h.standing.loss.as_mut() {
                l.share = 0.0001;
            }
        })
        .says(
            "cannot_advise",
            "Permeability is unchanged against the last clean that restored it (baseline 231 \
             L/(m²·h·bar)); limits have not been reached. Cannot advise: five whole days of \
             filtration are needed for a trend and have not passed.",
        );
    Held::new()
        .with(|h| {
            h.no_dates(NoDates::NothingToHoldAgainst);
            h.standing.baseline = None;
            h.standing.loss = None;
            h.standing.end_tmp_pa = None;
        })
        .says(
            "cannot_advise",
            "Loss of permeability cannot be told without a baseline. Cannot advise: there is \
             neither a baseline for the permeability nor a limit of TMP; state \
             after_clean_permeability or as_new_permeability in the plant file.",
        );
    Held::new()
        .with_clean("2026-03-09T08:00")
        .with(|h| {
            h.no_dates(NoDates::InClean);
            h.standing.in_clean = Some(at("2026-03-08T01:00"));
            h.now.phase = Phase::CleanInPlace;
        })
        .says(
            "clean_in_place",
            "Being cleaned since Sunday 8 March 01:00; its limits are looked at again once it has \
             filtered.",
        );
}

#[test]
fn old_data_give_no_advice() {
    Held::new().with_clean("2026-03-09T08:00").with(|h| h.wall = at("2026-03-08T13:14")).says(
        "cannot_advise",
        "Cannot advise: the newest reading is 7 hours old, of Sunday 8 March 05:59. As of \
             Sunday 8 March 06:00: Lost 27.4 % of permeability against the last clean that \
             restored it (baseline 231 L/(m²·h·bar)); clean limit (30 %) most likely Thursday 12 \
             March, one chance in ten before Tuesday 10 March: start the clean by Monday 9 March \
             08:00.",
    );
    // What would be no clean needed is not said of old data.
    let far = Held::new().with(|h| {
        h.loss_dates(dates("2026-06-03", "2026-06-20", ""));
        h.wall = at("2027-03-08T06:00");
    });
    let standing = far.view().standing;
    assert_eq!((standing.advice.as_str(), standing.stale), ("cannot_advise", true));
    assert_eq!(standing.data_age.as_deref(), Some("P365DT1M"));
    assert!(standing.sentence.contains("of Sunday 8 March 2026 05:59"), "{}", standing.sentence);
    assert!(!standing.sentence.contains("no clean needed"), "{}", standing.sentence);
    // Three hours exactly are not yet too old.
    let edge = Held::new().with_clean("2026-03-09T08:00").with(|h| h.wall = at("2026-03-08T08:59"));
    assert_eq!(edge.view().standing.advice, "clean_in_place");
}
