//! What a face may see of a visit: the answers of contract §6, ready to be written as JSON.

use std::collections::BTreeMap;

use serde::Serialize;

use super::event::TestAt;
use crate::faults::Fault;
use crate::knowledge::{Hookup, Setup};
use crate::quantity::Parsed;
use crate::safety::HoldPoint;

pub use crate::safety::Warning;

/// A hypothesis in the ranking.
#[derive(Clone, Debug, PartialEq, Serialize)]
pub struct RankRow {
    /// Its id, stable within a visit and its replay.
    pub hypothesis: String,
    /// Repair group.
    pub group: String,
    /// What is wrong under it.
    pub faults: Vec<Fault>,
    /// Probability.
    pub p: f64,
}

/// A repair group.
#[derive(Clone, Debug, PartialEq, Serialize)]
pub struct GroupRow {
    /// Its id.
    pub group: String,
    /// Probability.
    pub p: f64,
    /// What to do about it.
    pub repair: String,
}

/// The odds (contract §6 `ranking`): all `p` of the full list and the three beside it sum to 1.
#[derive(Clone, Debug, Default, PartialEq, Serialize)]
pub struct OddsView {
    /// Hypotheses, best first.
    pub ranking: Vec<RankRow>,
    /// Repair groups, best first.
    pub groups: Vec<GroupRow>,
    /// Nothing is wrong.
    #[serde(rename = "nothing-wrong")]
    pub nothing_wrong: f64,
    /// Something that is not on the list.
    pub unlisted: f64,
    /// Bound on what was not looked at.
    #[serde(rename = "not-examined")]
    pub not_examined: f64,
}

/// A group that a verdict could be mistaken for.
#[derive(Clone, Debug, PartialEq, Serialize)]
pub struct CouldBe {
    /// Repair group, or `nothing-wrong`, `unlisted`.
    pub group: String,
    /// Probability.
    pub p: f64,
}

/// What to do now instead of another test.
#[derive(Clone, Debug, PartialEq, Serialize)]
pub struct VerdictView {
    /// Repair group.
    pub group: String,
    /// The likeliest faults in it.
    pub faults: Vec<Fault>,
    /// Probability of the group.
    pub p: f64,
    /// `repair`, `call-network`, `isolate`, `refer`, `nothing-found`.
    pub action: String,
    /// Why now.
    pub why: String,
    /// The look or test that would confirm it.
    pub confirm: Option<TestAt>,
    /// What else it could be.
    pub could_also_be: Vec<CouldBe>,
}

/// A test at a place.
#[derive(Clone, Debug, PartialEq, Serialize)]
pub struct TestView {
    /// Test.
    pub test: String,
    /// Place, opaque.
    pub at: String,
    /// What a person calls it.
    pub name: String,
    /// How to connect and what to watch.
    pub text: String,
    /// State it is taken in.
    pub setup: Setup,
    /// What is connected where.
    pub hookup: Hookup,
    /// Unit of a bare number.
    pub unit: String,
    /// Minutes.
    pub minutes: f64,
    /// Whether anything that is touched may be live.
    pub energised: bool,
    /// Whether it can be done.
    pub available: bool,
    /// Why not.
    pub why_not: Option<String>,
}

/// What a test would read under a hypothesis.
#[derive(Clone, Debug, PartialEq, Serialize)]
#[serde(untagged)]
pub enum ExpectView {
    /// A number, SI.
    Number {
        /// Hypothesis, or `nothing-wrong`.
        hypothesis: String,
        /// One in twenty reads less.
        p05: f64,
        /// Median.
        p50: f64,
        /// One in twenty reads more.
        p95: f64,
    },
    /// A word.
    Words {
        /// Hypothesis, or `nothing-wrong`.
        hypothesis: String,
        /// Probability of each word.
        outcomes: BTreeMap<String, f64>,
    },
}

/// A test worth doing.
#[derive(Clone, Debug, PartialEq, Serialize)]
pub struct AdviceView {
    /// The test; minutes from the state of the last reading.
    #[serde(flatten)]
    pub test: TestView,
    /// Information about the repair group.
    pub bits: f64,
    /// The same per minute.
    pub bits_per_minute: f64,
    /// What must be done first.
    pub hold_points: Vec<HoldPoint>,
    /// What may bite.
    pub hazard: Option<String>,
    /// What the leading hypotheses would read.
    pub expects: Vec<ExpectView>,
    /// Why this one.
    pub why: String,
}

/// A re-test owed after a repair.
#[derive(Clone, Debug, PartialEq, Serialize)]
pub struct CheckOwed {
    /// The test.
    #[serde(flatten)]
    pub test: TestView,
    /// What must be done first.
    pub hold_points: Vec<HoldPoint>,
    /// What may bite.
    pub hazard: Option<String>,
    /// What is acceptable, as text; null where knowledge has none.
    pub limit: Option<String>,
    /// Where the limit is from.
    pub source: Option<String>,
    /// How well it is known: `seen`, `memory`, `guess`, …
    pub marker: Option<String>,
}

/// Answer to `open` and `resume`.
#[derive(Clone, Debug, PartialEq, Serialize)]
pub struct OpenAnswer {
    /// Name of the visit: the start of the digest of what was opened.
    pub session: String,
    /// How many single and paired hypotheses.
    pub hypotheses: usize,
    /// How many tests at places.
    pub tests: usize,
    /// Lines of the log so far (`resume`).
    #[serde(skip_serializing_if = "Option::is_none")]
    pub entries: Option<u64>,
    /// What the site left open, what was assumed.
    pub warnings: Vec<Warning>,
}

/// Answer to what moved the odds.
#[derive(Clone, Debug, PartialEq, Serialize)]
pub struct MovedAnswer {
    /// Line of the log.
    pub entry: u64,
    /// The odds now.
    #[serde(flatten)]
    pub odds: OddsView,
    /// What to do now instead of another test.
    pub verdict: Option<VerdictView>,
    /// Orders.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub warnings: Option<Vec<Warning>>,
    /// As understood (`reading`).
    #[serde(skip_serializing_if = "Option::is_none")]
    pub parsed: Option<Parsed>,
    /// Tail probability of the reading under the mixture (`reading`).
    #[serde(skip_serializing_if = "Option::is_none")]
    pub surprise: Option<f64>,
    /// Re-tests owed (`repair`).
    #[serde(skip_serializing_if = "Option::is_none")]
    pub checks: Option<Vec<CheckOwed>>,
}

/// Answer to `ranking` and `whatif`.
#[derive(Clone, Debug, PartialEq, Serialize)]
pub struct RankingAnswer {
    /// The odds.
    #[serde(flatten)]
    pub odds: OddsView,
    /// What to do now instead of another test.
    pub verdict: Option<VerdictView>,
}

/// Answer to `advise`.
#[derive(Clone, Debug, PartialEq, Serialize)]
pub struct AdviseAnswer {
    /// Line of the log.
    pub entry: u64,
    /// Best first.
    pub advice: Vec<AdviceView>,
    /// What to do now instead.
    pub verdict: Option<VerdictView>,
    /// Why this, or why nothing.
    pub why: String,
}

/// Answer to `hold-point`.
#[derive(Clone, Debug, PartialEq, Serialize)]
pub struct PointAnswer {
    /// Line of the log.
    pub entry: u64,
    /// Points of the same test that are still open.
    pub open_points: Vec<HoldPoint>,
    /// What to do now instead of another test.
    pub verdict: Option<VerdictView>,
}

/// Answer to `note`, `close`.
#[derive(Clone, Debug, PartialEq, Serialize)]
pub struct EntryAnswer {
    /// Line of the log.
    pub entry: u64,
}

/// Answer to `cannot`.
#[derive(Clone, Debug, PartialEq, Serialize)]
pub struct CannotAnswer {
    /// Line of the log.
    pub entry: u64,
    /// What to do now instead of another test.
    pub verdict: Option<VerdictView>,
}

/// What one entry says for a hypothesis.
#[derive(Clone, Debug, PartialEq, Serialize)]
pub struct EvidenceRow {
    /// Entry.
    pub entry: u64,
    /// Test; a complaint's kind.
    pub test: String,
    /// Place.
    pub at: String,
    /// Bits for it against the rest.
    pub bits: f64,
}

/// Answer to `evidence`.
#[derive(Clone, Debug, PartialEq, Serialize)]
pub struct EvidenceAnswer {
    /// In order of entries.
    pub evidence: Vec<EvidenceRow>,
}

/// Answer to `tests`.
#[derive(Clone, Debug, PartialEq, Serialize)]
pub struct TestsAnswer {
    /// Every test at every place.
    pub tests: Vec<TestView>,
}

/// Answer to `recheck`.
#[derive(Clone, Debug, PartialEq, Serialize)]
pub struct RecheckAnswer {
    /// Line of the log.
    pub entry: u64,
    /// As understood.
    pub parsed: Parsed,
    /// `within`, `outside`, `check-your-standard`.
    pub result: String,
}

/// A conductor proved dead.
#[derive(Clone, Debug, PartialEq, Eq, Serialize)]
pub struct ProvedView {
    /// Where.
    pub at: String,
    /// Against what.
    pub against: Vec<String>,
    /// By which line of the log.
    pub entry: u64,
}

/// Answer to `state`.
#[derive(Clone, Debug, PartialEq, Serialize)]
pub struct StateAnswer {
    /// Devices open.
    pub open: Vec<String>,
    /// Ends lifted.
    pub lifted: Vec<String>,
    /// Proved dead.
    pub proved: Vec<ProvedView>,
    /// Boards and circuits that may be live.
    pub live: Vec<String>,
    /// Re-tests still owed.
    pub checks: Vec<TestAt>,
}
