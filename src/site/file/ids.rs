//! Ids of a site file: their pattern, those reserved, and that each is used once.

use std::collections::BTreeMap;

use super::error::{SiteError, shorten};

/// Ids with a meaning of their own (contract §1).
pub const RESERVED: [&str; 4] = ["service", "network", "soil", "electrode"];

/// The ids seen so far and where.
#[derive(Debug, Default)]
pub struct Ids {
    seen: BTreeMap<String, String>,
}

impl Ids {
    /// Takes an id that must be unique over the file.
    pub fn take(&mut self, path: &str, id: &str) -> Result<(), SiteError> {
        pattern(path, id)?;
        if RESERVED.contains(&id) {
            return Err(SiteError::new(
                format!("{path}.id"),
                format!("`{id}` is a reserved id"),
                format!("choose another; reserved are {}", RESERVED.join(", ")),
            ));
        }
        if let Some(first) = self.seen.get(id) {
            return Err(SiteError::new(
                format!("{path}.id"),
                format!("id `{id}` is used twice: first at {first}"),
                "give each thing of the site its own id",
            ));
        }
        self.seen.insert(id.to_owned(), path.to_owned());
        Ok(())
    }

    /// Whether an id is taken.
    pub fn has(&self, id: &str) -> bool {
        self.seen.contains_key(id)
    }
}

/// Whether an id has the form `[a-z][a-z0-9-]*`.
pub fn pattern(path: &str, id: &str) -> Result<(), SiteError> {
    let good = id.chars().next().is_some_and(|c| c.is_ascii_lowercase())
        && id.len() <= 64
        && id
            .chars()
            .all(|c| c.is_ascii_lowercase() || c.is_ascii_digit() || c == '-');
    if good {
        return Ok(());
    }
    let mut cure: String = id
        .to_lowercase()
        .chars()
        .map(|c| if c.is_ascii_alphanumeric() { c } else { '-' })
        .take(64)
        .skip_while(|c| !c.is_ascii_lowercase())
        .collect();
    if cure.is_empty() {
        cure = "x1".into();
    }
    Err(SiteError::new(
        format!("{path}.id"),
        format!("`{}` is not an id", shorten(id)),
        format!(
            "ids are small letters, digits and hyphens, a letter first, at most 64: perhaps `{cure}`"
        ),
    ))
}
