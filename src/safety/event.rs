//! What changes the state of a visit, and what a proof of dead says.

use std::collections::BTreeMap;

use super::point::HoldPoint;
use crate::checks::Check;
use crate::knowledge::Setup;
use crate::quantity::ParsedValue;

/// A pair of terminals proved dead in the present state.
#[derive(Clone, Debug, PartialEq, serde::Serialize)]
pub struct DeadProof {
    /// First terminal.
    pub at: String,
    /// Second terminal.
    pub against: String,
    /// What was read, V.
    pub volts: f64,
    /// Log entry.
    pub entry: u64,
}

/// A reading that a hold point wants, and that is over its limit.
#[derive(Clone, Debug, PartialEq, thiserror::Error)]
#[error(
    "{name} reads {volts} V, over {limit} V: not dead; leave it alone, find what feeds it, and prove again"
)]
pub struct NotDead {
    /// Name of the want.
    pub name: String,
    /// Its terminals.
    pub between: [String; 2],
    /// As read, V.
    pub volts: f64,
    /// Its limit, V.
    pub limit: f64,
}

/// What changes the state.
#[derive(Clone, Debug, PartialEq)]
pub enum StateEvent<'a> {
    /// The installation is in this setup now.
    Arranged(&'a Setup),
    /// A hold point was done, its readings (V, by the want's name) all within their limits.
    PointDone {
        /// The point as it was given out.
        point: &'a HoldPoint,
        /// Volts by name of the want.
        volts: &'a BTreeMap<String, f64>,
        /// Log entry.
        entry: u64,
    },
    /// A hold point cannot be done: its tests stay closed.
    PointCannot {
        /// Its id.
        point: &'a str,
        /// Why.
        why: &'a str,
        /// Log entry.
        entry: u64,
    },
    /// A reading was accepted, taken in the check's setup.
    Reading {
        /// The check, its setup the one it was taken in.
        check: &'a Check,
        /// What was read.
        value: &'a ParsedValue,
        /// Log entry.
        entry: u64,
    },
    /// A device was found open that nobody opened.
    FoundTripped {
        /// Device.
        device: &'a str,
        /// Log entry.
        entry: u64,
    },
    /// Something was repaired or replaced at these places (or, by the network operator, outside).
    Repaired {
        /// Places as contract §5 writes them.
        places: &'a [String],
        /// The network operator has attended.
        by_network: bool,
    },
    /// A complaint that makes every metal part live until shown otherwise.
    Standing,
    /// The visit goes on after a break: nobody knows what was switched meanwhile.
    Resumed,
    /// An entry was taken back.
    Retracted(u64),
}
