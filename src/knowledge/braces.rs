//! Names in braces of knowledge strings: found, and judged against the vocabulary that may stand there.

use super::parse::nearest;
use super::words::{ID_NAMES, LIST_NAMES, TEXT_NAMES, all, has};

/// Where a string stands, which decides the names it may hold.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Stands {
    /// An id: terminal, branch, device, end.
    Id,
    /// An element of a list of devices or equipment.
    Element,
    /// What a person reads.
    Text,
}

/// What is wrong with the braces of a string, and the cure; `None`: nothing.
pub fn fault(
    text: &str,
    stands: Stands,
    also: &[&str],
    never: &[&str],
) -> Option<(String, String)> {
    let mut rest = text;
    while let Some((before, after)) = rest.split_once('{') {
        if before.contains('}') {
            return Some(unpaired(text));
        }
        let Some((name, tail)) = after.split_once('}') else {
            return Some(unpaired(text));
        };
        let whole = before.is_empty() && tail.is_empty() && text.starts_with('{');
        let known = has(ID_NAMES, name)
            || also.contains(&name)
            || (stands == Stands::Text && has(TEXT_NAMES, name))
            || (stands == Stands::Element && whole && has(LIST_NAMES, name));
        if !known {
            return Some(unknown(name, stands));
        }
        if never.contains(&name) {
            return Some((
                format!("`{{{name}}}` has no meaning here"),
                "use a name that this place has, or another `each`, `to` or `conductors`".into(),
            ));
        }
        rest = tail;
    }
    rest.contains('}').then(|| unpaired(text))
}

fn unpaired(text: &str) -> (String, String) {
    (
        format!("a brace of `{text}` stands alone"),
        "write a name between { and }".into(),
    )
}

fn unknown(name: &str, stands: Stands) -> (String, String) {
    let mut names: Vec<&str> = all(ID_NAMES).collect();
    match stands {
        Stands::Id => {}
        Stands::Element => names.extend(all(LIST_NAMES)),
        Stands::Text => names.extend(all(TEXT_NAMES)),
    }
    let cure = format!("write {}", nearest(name, names.into_iter()));
    (format!("`{{{name}}}` is no name that is filled here"), cure)
}

/// A proof's name with what its braces say forgotten: `earth bar {at}` and `earth bar {board}` are one.
pub fn shape(text: &str) -> String {
    let mut out = String::new();
    let mut inside = false;
    for c in text.chars() {
        match c {
            '{' => inside = true,
            '}' => {
                inside = false;
                out.push_str("{}");
            }
            _ if !inside => out.push(c),
            _ => {}
        }
    }
    out
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn names_are_judged_by_where_they_stand() {
        assert_eq!(fault("{at}.L", Stands::Id, &[], &[]), None);
        assert!(fault("{at-name}", Stands::Id, &[], &[]).is_some());
        assert_eq!(fault("{at-name} and {line}", Stands::Text, &[], &[]), None);
        assert_eq!(fault("{mains}", Stands::Element, &[], &[]), None);
        assert!(fault("x{mains}", Stands::Element, &[], &[]).is_some());
        assert!(fault("{at", Stands::Id, &[], &[]).is_some());
        assert!(fault("at}", Stands::Id, &[], &[]).is_some());
        assert!(fault("{to}.N", Stands::Id, &[], &["to"]).is_some());
        assert_eq!(shape("earth bar {at} now"), "earth bar {} now");
    }
}
