//! What became of a delivery, in one word and in one sentence.

use super::Summary;
use crate::base::{Counts, Instant, Outcome, Zone};

/// The outcome in one word.
pub fn outcome(counts: &Counts) -> Outcome {
    if counts.accepted + counts.revised > 0 {
        if counts.bad + counts.missing + counts.rejected > 0 {
            Outcome::TakenWithFaults
        } else {
            Outcome::Taken
        }
    } else if counts.repeated > 0 {
        Outcome::NothingNew
    } else {
        Outcome::NothingUsable
    }
}

/// The receipt's one sentence, times in the plant's zone: `351 of 360 readings taken, 05:00 to
/// 06:00; 4 bad, 3 missing, 2 rejected, first at line 14, PT-101.`
pub fn message(counts: &Counts, summary: &Summary, zone: &Zone) -> String {
    let cells = counts.cells();
    let taken = counts.accepted + counts.revised;
    let mut sentence = match outcome(counts) {
        Outcome::NothingNew => {
            format!("Nothing new: {} of {cells} readings were stored already", counts.repeated)
        }
        Outcome::NothingUsable => format!("Nothing usable: none of {cells} readings taken"),
        Outcome::Taken | Outcome::TakenWithFaults => format!("{taken} of {cells} readings taken"),
    };
    if let (Some(from), Some(to)) = (summary.from, summary.to) {
        sentence.push_str(&format!(", {}", span_words(from, to, zone)));
    }
    let mut faults = Vec::new();
    let mut say = |count: u64, word: &str| {
        if count > 0 {
            faults.push(format!("{count} {word}"));
        }
    };
    say(counts.revised, "revised");
    if taken > 0 {
        say(counts.repeated, "stored already");
    }
    say(counts.bad, "bad");
    say(counts.missing, "missing");
    say(counts.rejected, "rejected");
    if let Some(first) = summary.rejections.first().filter(|_| counts.rejected > 0) {
        faults.push(format!("first at line {}", first.line));
        if !first.column.is_empty() {
            faults.push(first.column.clone());
        }
    }
    if !faults.is_empty() {
        sentence.push_str(&format!("; {}", faults.join(", ")));
    }
    sentence.push('.');
    sentence
}

/// `05:00 to 06:00`, with dates where it spans several.
fn span_words(from: Instant, to: Instant, zone: &Zone) -> String {
    let (from_date, to_date) = (zone.date_text(from), zone.date_text(to));
    let (from_clock, to_clock) = (zone.clock_text(from), zone.clock_text(to));
    if from_date != to_date {
        format!("{from_date} {from_clock} to {to_date} {to_clock}")
    } else if from_clock != to_clock || zone.offset_s(from) != zone.offset_s(to) {
        format!("{from_clock} to {to_clock}")
    } else {
        from_clock
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::base::Rejection;

    fn check(counts: [u64; 6], from: &str, to: &str, word: Outcome, expected: &str) {
        let [accepted, repeated, revised, bad, missing, rejected] = counts;
        let counts = Counts { accepted, repeated, revised, bad, missing, rejected };
        let rejection = Rejection {
            line: 14,
            column: "PT-101".into(),
            value: "1.2.3".into(),
            reason: "not a number".into(),
        };
        let summary = Summary {
            from: Instant::parse(from).ok(),
            to: Instant::parse(to).ok(),
            rejections: if rejected > 0 { vec![rejection] } else { Vec::new() },
            ..Summary::default()
        };
        let zone = Zone::named("Europe/London").unwrap();
        assert_eq!(outcome(&counts), word);
        assert_eq!(message(&counts, &summary, &zone), expected);
    }

    #[test]
    fn the_sentence_of_a_receipt() {
        let (five, six) = ("2026-03-02T05:00:00Z", "2026-03-02T06:00:00Z");
        check(
            [351, 0, 0, 4, 3, 2],
            five,
            six,
            Outcome::TakenWithFaults,
            "351 of 360 readings taken, 05:00 to 06:00; 4 bad, 3 missing, 2 rejected, first at line 14, PT-101.",
        );
        check(
            [360, 0, 0, 0, 0, 0],
            five,
            six,
            Outcome::Taken,
            "360 of 360 readings taken, 05:00 to 06:00.",
        );
        check(
            [100, 20, 5, 0, 0, 0],
            "2026-07-01T22:00:00Z",
            "2026-07-01T23:30:00Z",
            Outcome::Taken,
            "105 of 125 readings taken, 2026-07-01 23:00 to 2026-07-02 00:30; 5 revised, 20 stored already.",
        );
        check(
            [0, 360, 0, 0, 0, 0],
            five,
            six,
            Outcome::NothingNew,
            "Nothing new: 360 of 360 readings were stored already, 05:00 to 06:00.",
        );
        check(
            [0, 0, 0, 0, 0, 6],
            "",
            "",
            Outcome::NothingUsable,
            "Nothing usable: none of 6 readings taken; 6 rejected, first at line 14, PT-101.",
        );
        check([1, 0, 0, 0, 0, 0], five, five, Outcome::Taken, "1 of 1 readings taken, 05:00.");
    }
}
