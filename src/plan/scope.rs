//! Which hypotheses can move which check at all: a cheap order in which to look at checks.
//!
//! A check tells at most the binary entropy of the mass that can move it. That mass is estimated by
//! place: what is measured on one circuit is moved by faults of that circuit, its RCD and its board.

use std::collections::BTreeSet;

use crate::belief::{Belief, Cause};
use crate::checks::Check;
use crate::knowledge::{Hookup, UnplugSet};
use crate::numeric::special::log2;
use crate::site::Site;

/// Where something is: circuits it touches, RCDs, or the whole site.
#[derive(Clone, Debug, Default, PartialEq)]
pub struct Scope {
    /// Circuit ids.
    pub circuits: BTreeSet<String>,
    /// Points (`c1.p1`) within them.
    pub points: BTreeSet<String>,
    /// RCD ids.
    pub rcds: BTreeSet<String>,
    /// Concerns service, boards, bonds or electrodes.
    pub common: bool,
}

fn place(site: &Site, id: &str, scope: &mut Scope) {
    let id = id.split('@').next().unwrap_or(id);
    let parts: Vec<&str> = id.split('.').collect();
    for part in &parts {
        for board in &site.boards {
            if let Some(circuit) = board.circuits.iter().find(|c| c.id == *part) {
                scope.circuits.insert(circuit.id.clone());
                if let Some(point) = parts.get(1)
                    && circuit.points.iter().any(|p| p.id == *point)
                {
                    scope.points.insert(format!("{}.{point}", circuit.id));
                }
                return;
            }
            if board.rcds.iter().any(|r| r.id == *part) {
                scope.rcds.insert((*part).to_owned());
                return;
            }
        }
        if let Some(eq) = site.equipment.iter().find(|e| e.id == *part) {
            let circuit = &site.boards[eq.at.board].circuits[eq.at.circuit];
            scope.circuits.insert(circuit.id.clone());
            scope
                .points
                .insert(format!("{}.{}", circuit.id, circuit.points[eq.at.point].id));
            return;
        }
    }
    scope.common = true;
}

/// Terminals and devices that a hookup touches.
fn touched(hookup: &Hookup) -> Vec<&String> {
    match hookup {
        Hookup::Volts { between, .. }
        | Hookup::Continuity { between }
        | Hookup::Loop { between, .. } => between.iter().collect(),
        Hookup::Amps { around } => around.iter().collect(),
        Hookup::Insulation { between, .. } => between.iter().flatten().collect(),
        Hookup::TripTime { rcd, at, .. } | Hookup::Ramp { rcd, at } => match at {
            Some(at) => vec![rcd, at],
            None => vec![rcd],
        },
        Hookup::Holds { device } => vec![device],
        Hookup::Lamp { at } | Hookup::Seen { at, .. } => vec![at],
    }
}

/// Scope of a check. Of terminals, the most particular counts: a point against the earth bar is about
/// the point.
pub fn of_check(site: &Site, check: &Check) -> Scope {
    let mut scope = Scope::default();
    for id in touched(&check.hookup) {
        place(site, id, &mut scope);
    }
    if !scope.circuits.is_empty() || !scope.rcds.is_empty() {
        scope.common = false;
    }
    scope
}

/// Scope of places of a hypothesis.
pub fn of_places(site: &Site, places: &[String]) -> Scope {
    let mut scope = Scope::default();
    for id in places {
        place(site, id, &mut scope);
    }
    scope
}

/// Whether a fault there can be expected to move a check here.
pub fn meets(site: &Site, check: &Scope, fault: &Scope) -> bool {
    if check.common {
        return true;
    }
    if !check.rcds.is_empty() {
        // An RCD is moved by itself and by the circuits that hang on it.
        let on = |c: &String| {
            site.boards
                .iter()
                .flat_map(|b| &b.circuits)
                .any(|x| x.id == *c && x.rcd.as_ref().is_some_and(|r| check.rcds.contains(r)))
        };
        return fault.rcds.iter().any(|r| check.rcds.contains(r))
            || fault.circuits.iter().any(on)
            || fault.common;
    }
    if !check.points.is_empty() && !fault.points.is_empty() && check.circuits == fault.circuits {
        return true;
    }
    fault.circuits.iter().any(|c| check.circuits.contains(c))
}

fn binary_entropy(p: f64) -> f64 {
    let p = p.clamp(1e-9, 1.0 - 1e-9);
    -(p * log2(p) + (1.0 - p) * log2(1.0 - p))
}

/// The `most` checks that may tell most a minute, best first, by mass that can move them.
/// `minutes[k]` belongs to `checks[k]`; the answer holds indices into `checks`.
pub fn shortlist(belief: &Belief, checks: &[&Check], minutes: &[f64], most: usize) -> Vec<usize> {
    let site = &belief.model().site;
    let mass: Vec<(Scope, f64)> = belief
        .odds()
        .hypotheses
        .iter()
        .take(200)
        .filter_map(|&(i, p)| {
            let c = &belief.candidates()[i];
            match (&c.cause, &c.hypothesis) {
                (Cause::Faults(_), Some(h)) => Some((of_places(site, &h.places), p)),
                _ => None,
            }
        })
        .collect();
    let mut scored: Vec<(f64, usize)> = checks
        .iter()
        .enumerate()
        .map(|(k, check)| {
            let scope = of_check(site, check);
            let mut moved: f64 = mass
                .iter()
                .filter(|(fault, _)| meets(site, &scope, fault))
                .map(|(_, p)| p)
                .sum();
            // A look finds only what is at its own place.
            if let Hookup::Seen { at, .. } = &check.hookup {
                moved = mass
                    .iter()
                    .filter(|(fault, _)| {
                        let own = of_places(site, std::slice::from_ref(at));
                        own.common && fault.common
                            || own.points.iter().any(|p| fault.points.contains(p))
                    })
                    .map(|(_, p)| p)
                    .sum::<f64>()
                    * 0.5;
            }
            let effort = minutes.get(k).copied().unwrap_or(1.0).max(0.25);
            let unplugs = !matches!(&check.setup.unplug, UnplugSet::These(list) if list.is_empty());
            let bits = binary_entropy(moved.min(0.5)) * if unplugs { 1.0 } else { 0.999 };
            (bits / effort, k)
        })
        .collect();
    scored.sort_by(|a, b| b.0.total_cmp(&a.0).then(a.1.cmp(&b.1)));
    scored.into_iter().take(most).map(|s| s.1).collect()
}
