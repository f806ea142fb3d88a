//! "Did you mean": the known word nearest to one that is not known.

/// The candidate nearest to `word` in spelling, without regard to case; `None` if none is near
/// enough to be meant. Of equally near ones, the first.
pub fn nearest<'a>(word: &str, candidates: impl IntoIterator<Item = &'a str>) -> Option<&'a str> {
    let word = word.to_lowercase();
    let length = word.chars().count();
    candidates
        .into_iter()
        .map(|c| (strsim::damerau_levenshtein(&word, &c.to_lowercase()), c))
        .filter(|(distance, _)| *distance < length && *distance <= (length / 3).max(1))
        .min_by_key(|(distance, _)| *distance)
        .map(|(_, c)| c)
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn near_words_are_found_and_far_ones_are_not() {
        let known = ["clean_duration", "clean_notice", "tmp_floor"];
        assert_eq!(nearest("clean_duraton", known), Some("clean_duration"));
        assert_eq!(nearest("TMP_FLOR", known), Some("tmp_floor"));
        assert_eq!(nearest("colour", known), None);
        assert_eq!(nearest("x", ["h", "s"]), None);
        assert_eq!(nearest("", known), None);
    }
}
