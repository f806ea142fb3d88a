//! What a plant file may say and this version does not work. Each is refused as a mistake, so
//! that nobody takes silence for an answer; with the line below deleted it is taken.

use super::read::Value;

/// Key, value (empty: any), and why it is refused.
const REFUSED: &[(&str, &str, &str)] = &[
    ("filtration", "cross-flow", "cross-flow trains are not worked by this version"),
    ("drive", "submerged", "submerged membranes are not worked by this version"),
    ("layout", "long", "the long layout is not read by this version"),
    ("values", "mean", "exports of means are not worked by this version"),
    ("between", "hold", "exports of changes only are not worked by this version"),
    ("max_hold", "", "held values are not worked by this version"),
    ("like", "", "a format by example is not read by this version; write it as `format`"),
];

/// A meter that serves several trains is refused: its flow is not apportioned, and divided by
/// one train's area it would be a number that nobody could trust.
pub(super) const SHARED_METERS: &str =
    "a flow meter that serves several trains is not worked by this version";

/// Trains whose state has to be inferred are refused.
pub(super) const STATE_IS_NEEDED: bool = true;

/// Refuses a value of a key if this version does not work it.
pub(super) fn refuse(key: &str, word: &str, value: &Value<'_>) {
    for (_, _, why) in REFUSED.iter().filter(|(k, w, _)| *k == key && (*w == word || w.is_empty()))
    {
        value.report.mistake(&value.span, *why);
    }
}
