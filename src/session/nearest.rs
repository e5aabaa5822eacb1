//! The valid words nearest to one that is not valid.

/// Up to three candidates that look most like `given`, best first; ties in the candidates' order.
/// Nothing that shares no likeness at all is offered, unless nothing else is there.
pub fn nearest<'a>(given: &str, candidates: impl IntoIterator<Item = &'a str>) -> Vec<String> {
    let wanted = given.to_lowercase();
    let mut scored: Vec<(f64, &str)> = candidates
        .into_iter()
        .map(|word| (strsim::jaro_winkler(&wanted, &word.to_lowercase()), word))
        .collect();
    scored.sort_by(|a, b| b.0.total_cmp(&a.0));
    let close = scored
        .iter()
        .take(3)
        .filter(|(score, _)| *score >= 0.7)
        .count()
        .max(1);
    scored
        .into_iter()
        .take(close)
        .map(|(_, word)| word.to_owned())
        .collect()
}

#[cfg(test)]
mod tests {
    use super::nearest;

    #[test]
    fn a_slip_of_the_finger_finds_its_word_first() {
        assert_eq!(
            nearest("vlaue", ["test", "at", "value", "setup"])[0],
            "value"
        );
        assert!(nearest("x", []).is_empty());
    }

    #[test]
    fn something_is_always_offered() {
        assert_eq!(nearest("zzz", ["reading", "advise"]).len(), 1);
    }
}
