//! What may be done now: proofs, hold points, hazards, and the gate that alone clears a check.
//!
//! The rules are generic: they look at setups, hookups and the site, never at the name of a check or a
//! fault. Numbers come from [`crate::knowledge::SafetyRow`]. A guessed number may stop work sooner; none
//! may pass anything that the rules refuse.

pub mod body;
mod book;
mod event;
mod exposure;
mod gate;
mod hazard;
mod hold;
mod isolate;
mod makesafe;
mod needs;
pub mod places;
mod point;
mod profile;
mod proof;
mod rules;
mod simulate;
mod state;
mod wants;
mod words;
mod world;

#[cfg(test)]
mod tests;

pub use body::{Body, BodyError, Touch};
pub use book::HazardBook;
pub use event::{DeadProof, NotDead, StateEvent};
pub use gate::{Cleared, Gate, ReadingStop, Verdict};
pub use hazard::Hazards;
pub use makesafe::{Warning, is_standing, warnings};
pub use point::{HoldPoint, Stage, Want};
pub use rules::Refusal;
pub use simulate::{CircuitSimulator, Drawn};
pub use state::State;
pub use world::{Assessment, Raised, Simulator, World};

use crate::checks::Check;
use crate::knowledge::SafetyRow;
use crate::site::Site;

/// What every rule stands on: the site, the numbers, and the checks that can be made here and now.
#[derive(Clone, Copy, Debug)]
pub struct Ground<'a> {
    /// The installation.
    pub site: &'a Site,
    /// Numbers of the rules.
    pub numbers: &'a SafetyRow,
    /// Available checks: those that may gain a proof.
    pub catalogue: &'a [Check],
}
