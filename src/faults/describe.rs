//! A fault in the words of the site: what is wrong where, and what to repair.

use super::apply::kind_of;
use super::error::FaultError;
use super::fault::Fault;
use super::valid::{checked, filled};
use crate::knowledge::{FaultKind, Knowledge};
use crate::site::Site;

/// Faults as a person says them: `earth open at bench (kitchen sockets)`; several joined by `, and `.
///
/// A kind whose name does not say where has ` at ` and the place added.
///
/// # Errors
/// As [`super::edits`], contradictions apart.
pub fn describe(
    knowledge: &Knowledge,
    site: &Site,
    faults: &[Fault],
) -> Result<String, FaultError> {
    each(knowledge, site, faults, |kind| {
        let located = ["{at", "{circuit", "{board", "{point"]
            .iter()
            .any(|name| kind.name.contains(name));
        let nowhere = kind
            .at
            .iter()
            .all(|class| class == "service" || class == "network");
        if located || nowhere {
            kind.name.clone()
        } else {
            format!("{} at {{at-name}}", kind.name)
        }
    })
}

/// What to do about them.
///
/// # Errors
/// As [`describe`].
pub fn repair_text(
    knowledge: &Knowledge,
    site: &Site,
    faults: &[Fault],
) -> Result<String, FaultError> {
    each(knowledge, site, faults, |kind| kind.repair.text.clone())
}

fn each(
    knowledge: &Knowledge,
    site: &Site,
    faults: &[Fault],
    form: impl Fn(&FaultKind) -> String,
) -> Result<String, FaultError> {
    let mut said: Vec<String> = Vec::new();
    for fault in faults {
        let kind = kind_of(knowledge, &fault.kind)?;
        let (at, to) = checked(kind, site, fault)?;
        let text = filled(kind, site, fault, &at, to.as_ref(), &form(kind))?;
        if !said.contains(&text) {
            said.push(text);
        }
    }
    Ok(said.join(", and "))
}
