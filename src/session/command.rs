//! What can be asked of a visit: the requests of contract §6, typed.

use std::collections::BTreeMap;

use serde::{Deserialize, Serialize};
use serde_json::Value;

use crate::faults::Fault;
use crate::knowledge::{Hookup, Setup};

/// `open`: a site, a kit, a seed.
#[derive(Clone, Debug, Default, PartialEq, Serialize, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct Open {
    /// The site document.
    #[serde(default)]
    pub site: Option<Value>,
    /// Or the file that holds it.
    #[serde(default)]
    pub path: Option<String>,
    /// Instruments in the van.
    #[serde(default)]
    pub kit: Option<Vec<String>>,
    /// Seed of the streams of randomness.
    #[serde(default)]
    pub seed: Option<u64>,
}

/// When a complaint shows.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord, Serialize, Deserialize)]
#[serde(rename_all = "kebab-case")]
pub enum When {
    /// At any time.
    Always,
    /// At once when closed.
    AtOnce,
    /// While something is used.
    InUse,
    /// When something is switched on.
    SwitchingOn,
    /// Now and then.
    NowAndThen,
    /// In rain.
    Rain,
    /// It happened once.
    Once,
}

impl When {
    /// The word of the contract.
    pub fn as_str(self) -> &'static str {
        match self {
            Self::Always => "always",
            Self::AtOnce => "at-once",
            Self::InUse => "in-use",
            Self::SwitchingOn => "switching-on",
            Self::NowAndThen => "now-and-then",
            Self::Rain => "rain",
            Self::Once => "once",
        }
    }
}

/// What more is known of a complaint.
#[derive(Clone, Debug, Default, PartialEq, Serialize, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct Detail {
    /// When it shows.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub when: Option<When>,
    /// Equipment it shows with.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub with: Option<String>,
    /// In the person's words.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub text: Option<String>,
}

/// `symptom`: a complaint.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct Symptom {
    /// Kind.
    pub kind: String,
    /// Place, where known.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub at: Option<String>,
    /// More.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub detail: Option<Detail>,
}

/// `advise`: what to do next.
#[derive(Clone, Debug, Default, PartialEq, Serialize, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct Advise {
    /// How many, best first.
    #[serde(default)]
    pub count: Option<usize>,
    /// When to stop thinking.
    #[serde(default)]
    pub within_ms: Option<u64>,
}

/// `hold-point`: what was done before a test, and seen.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct HoldPoint {
    /// The point's id.
    pub point: String,
    /// Whether it was done.
    pub done: bool,
    /// Its readings by name.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub readings: Option<BTreeMap<String, String>>,
    /// Why not.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub why: Option<String>,
    /// Who did it.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub by: Option<String>,
}

/// `reading`: what an instrument showed.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct Reading {
    /// Test.
    pub test: String,
    /// Place.
    pub at: String,
    /// As written.
    pub value: String,
    /// The setup it was taken in, if another than the test's.
    #[serde(default)]
    pub setup: Option<Setup>,
    /// Whether it was questioned and stands.
    #[serde(default)]
    pub confirm: Option<bool>,
}

/// `cannot`: a test that cannot be done here.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct Cannot {
    /// Test.
    pub test: String,
    /// Place.
    pub at: String,
    /// Why.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub why: Option<String>,
    /// It can be done after all.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub undo: Option<bool>,
}

/// `ranking`: the odds.
#[derive(Clone, Debug, Default, PartialEq, Serialize, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct Ranking {
    /// How many hypotheses.
    #[serde(default)]
    pub count: Option<usize>,
}

/// `evidence`: what speaks for a hypothesis.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct Evidence {
    /// Its id in the ranking.
    pub hypothesis: String,
}

/// `predict`: one reading of the circuit as told.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct Predict {
    /// Faults present.
    #[serde(default)]
    pub faults: Vec<Fault>,
    /// State.
    #[serde(default)]
    pub setup: Option<Setup>,
    /// Instrument.
    pub hookup: Hookup,
    /// Overrides by dotted path; null only where the contract gives it a meaning.
    #[serde(default)]
    pub parameters: BTreeMap<String, Option<f64>>,
    /// Whether protective devices act.
    #[serde(default)]
    pub protection: Option<bool>,
}

/// `whatif`: the odds as a reading would leave them.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct WhatIf {
    /// Test.
    pub test: String,
    /// Place.
    pub at: String,
    /// As it might be written.
    pub value: String,
}

/// `retract`: an entry that should not count.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct Retract {
    /// The entry.
    pub entry: u64,
}

/// `repair`: what was found and done.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct Repair {
    /// The faults looked for.
    pub faults: Vec<Fault>,
    /// Whether they were there.
    pub found: bool,
    /// Whether they are put right.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub done: Option<bool>,
    /// In the person's words.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub note: Option<String>,
}

/// `recheck`: a re-test after a repair.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct Recheck {
    /// Test.
    pub test: String,
    /// Place.
    pub at: String,
    /// As written.
    pub value: String,
}

/// `note`: words for the log.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct Note {
    /// The words.
    pub text: String,
}

/// How a visit ends.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Serialize, Deserialize)]
#[serde(rename_all = "kebab-case")]
pub enum CloseOutcome {
    /// The cause was found and put right.
    Repaired,
    /// Left without danger, not repaired.
    MadeSafe,
    /// Handed to another.
    Referred,
    /// No cause found.
    NothingFound,
}

/// `close`: the end of the visit.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct Close {
    /// How it ends.
    pub outcome: CloseOutcome,
    /// In the person's words.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub note: Option<String>,
}
