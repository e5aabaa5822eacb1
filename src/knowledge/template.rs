//! Strings with places in braces, `{at}`, filled from a table of names.

/// A name in braces that nothing fills, or a brace that does not close.
#[derive(Clone, Debug, PartialEq, Eq, thiserror::Error)]
#[error("`{{{name}}}` in `{text}` is not a name that is filled here")]
pub struct Unfilled {
    /// The name without braces.
    pub name: String,
    /// The whole text.
    pub text: String,
}

/// Fills every `{name}` of `text` by `lookup`.
///
/// # Errors
/// [`Unfilled`] names the first name that `lookup` does not know, or the rest of the text behind a
/// brace that does not close.
pub fn fill(
    text: &str,
    mut lookup: impl FnMut(&str) -> Option<String>,
) -> Result<String, Unfilled> {
    let mut out = String::with_capacity(text.len());
    let mut rest = text;
    while let Some((before, after)) = rest.split_once('{') {
        out.push_str(before);
        let unfilled = |name: &str| Unfilled {
            name: name.to_owned(),
            text: text.to_owned(),
        };
        let (name, tail) = after.split_once('}').ok_or_else(|| unfilled(after))?;
        out.push_str(&lookup(name).ok_or_else(|| unfilled(name))?);
        rest = tail;
    }
    out.push_str(rest);
    Ok(out)
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn fills_and_names_what_it_cannot() {
        let table = |name: &str| (name == "at").then(|| "c1.p1".to_owned());
        assert_eq!(
            fill("{at}.L to {at}.PE", table).as_deref(),
            Ok("c1.p1.L to c1.p1.PE")
        );
        assert_eq!(
            fill("{bus}.N", table).map_err(|e| e.name),
            Err("bus".to_owned())
        );
        assert_eq!(
            fill("open {at", table).map_err(|e| e.name),
            Err("at".to_owned())
        );
    }
}
