//! The log's vocabulary (contract §7): each event with its request's keys.

use serde::{Deserialize, Serialize};
use serde_json::Value;

use super::command;
use crate::knowledge::Setup;
use crate::quantity::Parsed;

/// Version of the log's words.
pub const SCHEMA: &str = "straypath-log/1";

/// Everything needed to replay.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct Opened {
    /// [`SCHEMA`].
    pub schema: String,
    /// The program's version.
    pub version: String,
    /// Digest of knowledge.
    pub knowledge: String,
    /// The site document as given.
    pub site: Value,
    /// Instruments.
    pub kit: Vec<String>,
    /// Seed.
    pub seed: u64,
}

/// A test at a place.
#[derive(Clone, Debug, PartialEq, Eq, PartialOrd, Ord, Serialize, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct TestAt {
    /// Test.
    pub test: String,
    /// Place.
    pub at: String,
}

/// Advice as given, so that a replay thinks as long.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct Advised {
    /// How many were asked for.
    pub count: usize,
    /// Time allowed.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub within_ms: Option<u64>,
    /// Passes of thinking made.
    pub passes: u64,
    /// What was advised, best first.
    pub advice: Vec<TestAt>,
}

/// A reading and how it was understood.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct ReadingTaken {
    /// Test.
    pub test: String,
    /// Place.
    pub at: String,
    /// As written.
    pub value: String,
    /// The setup it was taken in, if another than the test's.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub setup: Option<Setup>,
    /// Whether it was questioned and stands.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub confirm: Option<bool>,
    /// As understood.
    pub parsed: Parsed,
}

/// A verdict as it came to stand, or fell (`group` null).
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct VerdictStands {
    /// Repair group.
    pub group: Option<String>,
    /// Its probability.
    pub p: f64,
    /// `repair`, `call-network`, `isolate`, `refer`, `nothing-found`.
    pub action: String,
}

/// A re-test and its result.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct RecheckTaken {
    /// Test.
    pub test: String,
    /// Place.
    pub at: String,
    /// As written.
    pub value: String,
    /// As understood.
    pub parsed: Parsed,
    /// `within`, `outside`, `check-your-standard`.
    pub result: String,
}

/// The end.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct Closed {
    /// How it ends.
    pub outcome: command::CloseOutcome,
    /// In the person's words.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub note: Option<String>,
    /// Lines of the log, this one counted, so that a cut tail shows.
    pub lines: u64,
}

/// The visit goes on after an interruption.
#[derive(Clone, Debug, Default, PartialEq, Serialize, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct Resumed {
    /// The program's version.
    pub version: String,
    /// Bytes of a torn last line that this line takes the place of, as text.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub torn: Option<String>,
}

/// One event.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize)]
#[serde(tag = "event", rename_all = "kebab-case")]
pub enum Event {
    /// The visit begins.
    Opened(Opened),
    /// A complaint.
    Symptom(command::Symptom),
    /// Advice was given.
    Advised(Advised),
    /// A hold point done, or refused.
    HoldPoint(command::HoldPoint),
    /// A reading.
    Reading(ReadingTaken),
    /// A test that cannot be done.
    Cannot(command::Cannot),
    /// An entry that no longer counts.
    Retracted(command::Retract),
    /// Words.
    Note(command::Note),
    /// A verdict came to stand or fell.
    Verdict(VerdictStands),
    /// A repair, or a place looked at in vain.
    Repair(command::Repair),
    /// A re-test.
    Recheck(RecheckTaken),
    /// The end.
    Closed(Closed),
    /// The visit goes on.
    Resumed(Resumed),
}

impl Event {
    /// The word in the log.
    pub fn name(&self) -> &'static str {
        match self {
            Self::Opened(_) => "opened",
            Self::Symptom(_) => "symptom",
            Self::Advised(_) => "advised",
            Self::HoldPoint(_) => "hold-point",
            Self::Reading(_) => "reading",
            Self::Cannot(_) => "cannot",
            Self::Retracted(_) => "retracted",
            Self::Note(_) => "note",
            Self::Verdict(_) => "verdict",
            Self::Repair(_) => "repair",
            Self::Recheck(_) => "recheck",
            Self::Closed(_) => "closed",
            Self::Resumed(_) => "resumed",
        }
    }
}
