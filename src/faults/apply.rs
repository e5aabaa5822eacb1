//! Faults as edits of the circuit: templates filled, values set, contradictions refused.

use std::collections::BTreeMap;

use super::build::{Claim, build, claims};
use super::error::FaultError;
use super::fault::Fault;
use super::valid::checked;
use crate::knowledge::{FaultKind, Knowledge, Manner, Prior};
use crate::network::Edit;
use crate::quantity::suggest::nearest;
use crate::site::Site;

/// The edits that a list of faults makes on a site.
///
/// # Errors
/// An unknown kind or place, a missing or needless `to`, `conductor`, `value` or `position`, two
/// faults that contradict each other, a kind that does not change the circuit: see [`FaultError`].
pub fn edits(
    knowledge: &Knowledge,
    site: &Site,
    faults: &[Fault],
) -> Result<Vec<Edit>, FaultError> {
    let mut out = Vec::new();
    let mut claimed: BTreeMap<String, usize> = BTreeMap::new();
    for (index, fault) in faults.iter().enumerate() {
        let kind = kind_of(knowledge, &fault.kind)?;
        let (place, to) = checked(kind, site, fault)?;
        if kind.edits.is_empty() {
            return Err(FaultError::NotPredictable {
                kind: kind.kind.clone(),
            });
        }
        let conflict = |other: usize, branch: &str| FaultError::Conflict {
            first: said(&faults[other]),
            second: said(fault),
            branch: branch.to_owned(),
        };
        if let Some(other) = faults[..index].iter().position(|f| same_thing(f, fault)) {
            return Err(conflict(other, &fault.at));
        }
        for edit in build(kind, site, fault, &place, to.as_ref())? {
            for (branch, claim) in claims(&edit) {
                match claimed.get(&branch) {
                    Some(&other) if other != index && claim == Claim::Sole => {
                        return Err(conflict(other, &branch));
                    }
                    Some(_) => {}
                    None => {
                        claimed.insert(branch, index);
                    }
                }
            }
            out.push(edit);
        }
    }
    Ok(out)
}

/// The row of a kind.
///
/// # Errors
/// [`FaultError::UnknownKind`] with the nearest kinds.
pub fn kind_of<'a>(knowledge: &'a Knowledge, word: &str) -> Result<&'a FaultKind, FaultError> {
    knowledge
        .faults
        .iter()
        .find(|k| k.kind == word)
        .ok_or_else(|| FaultError::UnknownKind {
            kind: word.to_owned(),
            near: nearest(word, knowledge.faults.iter().map(|k| k.kind.as_str()), 3),
        })
}

/// The distribution of a kind's value, if it has one.
pub fn value_prior(kind: &FaultKind) -> Option<&Prior> {
    kind.value.as_ref().map(|value| &value.prior)
}

/// How a kind comes and goes; `None`: steady.
pub fn manner(kind: &FaultKind) -> Option<&Manner> {
    kind.manner.as_ref()
}

/// A fault as `kind@at`.
fn said(fault: &Fault) -> String {
    format!("`{}` at `{}`", fault.kind, fault.at)
}

/// The same kind at the same place twice, in the same conductor and to the same other place.
fn same_thing(a: &Fault, b: &Fault) -> bool {
    a.kind == b.kind && a.at == b.at && a.conductor == b.conductor && a.to == b.to
}
