//! Whose word counts as a person's.

/// The service's own name: what it does by itself is never signed as if a person had.
const SERVICE: &str = "washbell";

/// Whether `by` can name a person: not blank, and not the service itself.
pub fn names_a_person(by: &str) -> bool {
    let by = by.trim();
    !by.is_empty() && !by.eq_ignore_ascii_case(SERVICE)
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn neither_nobody_nor_the_service_is_a_person() {
        for by in ["", "  ", "washbell", " WashBell "] {
            assert!(!names_a_person(by), "{by:?}");
        }
        assert!(names_a_person("shift 2, J."));
    }
}
