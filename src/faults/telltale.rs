//! What faults show beside the circuit: looks, and outcomes of checks that no edit tells.

use super::apply::kind_of;
use super::error::FaultError;
use super::fault::Fault;
use super::valid::{checked, filled};
use crate::knowledge::Knowledge;
use crate::site::Site;

/// A look under a fault: place, what is looked for, probability that it is found.
#[derive(Clone, Debug, PartialEq)]
pub struct Telltale {
    /// Place.
    pub at: String,
    /// What (`burnt`, …), or the check id of an outcome.
    pub what: String,
    /// The word that is read: `yes` for a look.
    pub word: String,
    /// Its probability.
    pub p: f64,
}

/// Looks that may find a fault.
///
/// # Errors
/// An unknown kind or place; a template that fits nothing here is left out.
pub fn looks(
    knowledge: &Knowledge,
    site: &Site,
    faults: &[Fault],
) -> Result<Vec<Telltale>, FaultError> {
    let mut out = Vec::new();
    for fault in faults {
        let kind = kind_of(knowledge, &fault.kind)?;
        let (at, to) = checked(kind, site, fault)?;
        for look in &kind.looks {
            if let Ok(place) = filled(kind, site, fault, &at, to.as_ref(), &look.at) {
                out.push(Telltale {
                    at: place,
                    what: look.what.clone(),
                    word: "yes".to_owned(),
                    p: look.p,
                });
            }
        }
    }
    Ok(out)
}

/// Outcomes of checks under faults, in place of the circuit's.
///
/// # Errors
/// As [`looks`].
pub fn outcomes(
    knowledge: &Knowledge,
    site: &Site,
    faults: &[Fault],
) -> Result<Vec<Telltale>, FaultError> {
    let mut out = Vec::new();
    for fault in faults {
        let kind = kind_of(knowledge, &fault.kind)?;
        let (at, to) = checked(kind, site, fault)?;
        for outcome in &kind.outcomes {
            if let Ok(place) = filled(kind, site, fault, &at, to.as_ref(), &outcome.at) {
                out.push(Telltale {
                    at: place,
                    what: outcome.test.clone(),
                    word: outcome.word.clone(),
                    p: outcome.p,
                });
            }
        }
    }
    Ok(out)
}
