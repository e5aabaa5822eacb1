//! A reading once understood: a value with its unit, or a word.

use serde::{Deserialize, Serialize};

/// SI unit of a reading.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord, Serialize, Deserialize)]
pub enum Unit {
    /// Volt.
    #[serde(rename = "V")]
    Volt,
    /// Ampere.
    #[serde(rename = "A")]
    Ampere,
    /// Ohm.
    #[serde(rename = "Ω")]
    Ohm,
    /// Second.
    #[serde(rename = "s")]
    Second,
    /// Watt.
    #[serde(rename = "W")]
    Watt,
    /// A word or a pure number.
    #[serde(rename = "")]
    None,
}

/// A reading that is a word (contract §3, §4).
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord, Serialize, Deserialize)]
pub enum Word {
    /// The device stays in.
    #[serde(rename = "holds")]
    Holds,
    /// The device operated.
    #[serde(rename = "trips")]
    Trips,
    /// An RCD test that ended without operation.
    #[serde(rename = "no trip")]
    NoTrip,
    /// Seen.
    #[serde(rename = "yes")]
    Yes,
    /// Looked for and not seen.
    #[serde(rename = "no")]
    No,
    /// A lamp dims.
    #[serde(rename = "dims")]
    Dims,
    /// A lamp brightens.
    #[serde(rename = "brightens")]
    Brightens,
    /// A lamp does not change.
    #[serde(rename = "none")]
    None,
    /// Infinite ohms.
    #[serde(rename = "open")]
    Open,
    /// Not known; taken as `cannot`.
    #[serde(rename = "unknown")]
    Unknown,
}

/// What a reading says, in SI.
#[derive(Clone, Copy, Debug, PartialEq, Serialize, Deserialize)]
#[serde(untagged)]
pub enum ParsedValue {
    /// A single value.
    Value {
        /// SI value.
        value: f64,
    },
    /// Unsteady: it moved between two values.
    Range {
        /// Lower end, SI.
        low: f64,
        /// Upper end, SI.
        high: f64,
    },
    /// Above this (over the instrument's range).
    Over {
        /// SI value.
        over: f64,
    },
    /// Below this.
    Under {
        /// SI value.
        under: f64,
    },
    /// A word.
    Word {
        /// The word.
        word: Word,
    },
}

/// A reading as understood (`parsed` of contract §6).
#[derive(Clone, Copy, Debug, PartialEq, Serialize, Deserialize)]
pub struct Parsed {
    /// The value or word.
    #[serde(flatten)]
    pub value: ParsedValue,
    /// Its SI unit.
    pub unit: Unit,
    /// Written with `~`: four times the usual spread.
    pub rough: bool,
}
