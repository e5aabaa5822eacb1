//! The nearest valid words to one that is not, for an error's cure.

/// The at most `n` candidates most like `name`, best first; none that is wholly unlike it.
///
/// Likeness is Jaro–Winkler, in lower case; equal likeness keeps alphabetical order.
pub fn nearest<I, S>(name: &str, candidates: I, n: usize) -> Vec<String>
where
    I: IntoIterator<Item = S>,
    S: AsRef<str>,
{
    /// Below this, two words have nothing in common that would help.
    const LEAST: f64 = 0.6;
    let wanted: String = name.to_lowercase().chars().take(80).collect();
    let mut scored: Vec<(f64, String)> = candidates
        .into_iter()
        .map(|c| {
            let word = c.as_ref();
            let like = strsim::jaro_winkler(&wanted, &word.to_lowercase());
            let edits = strsim::osa_distance(&wanted, &word.to_lowercase());
            // A single slip of the finger comes before anything that merely begins alike.
            (
                if edits <= 1 {
                    2.0 - edits as f64 * 0.5
                } else {
                    like
                },
                word.to_owned(),
            )
        })
        .filter(|(like, _)| *like >= LEAST)
        .collect();
    scored.sort_by(|a, b| b.0.total_cmp(&a.0).then_with(|| a.1.cmp(&b.1)));
    scored.dedup_by(|a, b| a.1 == b.1);
    scored.truncate(n);
    scored.into_iter().map(|(_, word)| word).collect()
}

/// ``; nearest: `a`, `b` `` for the end of a message, or nothing.
pub fn nearest_text(names: &[String]) -> String {
    if names.is_empty() {
        return String::new();
    }
    let quoted: Vec<String> = names.iter().map(|n| format!("`{n}`")).collect();
    format!("nearest: {}", quoted.join(", "))
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn a_slip_comes_first() {
        let words = ["metres", "metal", "mm2", "kind"];
        assert_eq!(nearest("meters", words, 1), ["metres"]);
        assert_eq!(nearest("mm3", words, 1), ["mm2"]);
        assert_eq!(nearest("C1.P1", ["c1.p2", "c1.p1"], 2), ["c1.p1", "c1.p2"]);
        assert!(nearest("zzzz", words, 3).is_empty());
        assert!(nearest("", Vec::<String>::new(), 3).is_empty());
    }
}
