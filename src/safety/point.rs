//! A hold point: what it is, what withdraws it, and how its state names it.

use crate::knowledge::Setup;

/// A voltage that a hold point wants read.
#[derive(Clone, Debug, PartialEq, serde::Serialize)]
pub struct Want {
    /// Name under which its reading comes.
    pub name: String,
    /// Two terminals.
    pub between: [String; 2],
    /// Above this the point stays open, V.
    pub limit_volts: f64,
}

/// What a hold point is for; it decides what withdraws it.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord)]
pub enum Stage {
    /// People and supply made safe after a complaint that asks for it.
    MakeSafe,
    /// Every source found, occupants told.
    Identify,
    /// What was lifted is refitted.
    Restore,
    /// Another check's reading gives a proof.
    Proof,
    /// Tester proved before.
    TesterBefore,
    /// Opened, locked, tagged.
    Isolate,
    /// Proved dead.
    ProveDead,
    /// Tester proved after.
    TesterAfter,
    /// Lifted; and, where a neutral is parted, proved dead again.
    ProveDeadAgain,
    /// Tester proved after that.
    TesterAfterAgain,
    /// Closed again.
    Energise,
    /// Ready for work on live parts.
    Live,
    /// Asked for by knowledge or by a hazard.
    Extra,
}

impl Stage {
    /// Whether doing the point puts the installation into its setup.
    pub(super) fn moves(self) -> bool {
        matches!(
            self,
            Self::Restore
                | Self::Isolate
                | Self::ProveDead
                | Self::TesterAfter
                | Self::ProveDeadAgain
                | Self::TesterAfterAgain
                | Self::Energise
        )
    }

    /// Whether it stays done when the state changes.
    pub(super) fn outlives_state(self) -> bool {
        matches!(self, Self::MakeSafe | Self::Identify | Self::Live)
    }
}

/// A hold point (contract §6).
#[derive(Clone, Debug, PartialEq, serde::Serialize)]
pub struct HoldPoint {
    /// Short id, the same for every check that needs the point in the same state.
    pub point: String,
    /// What to do and see.
    pub text: String,
    /// State in which it is done.
    pub setup: Setup,
    /// Voltages wanted.
    pub wants: Vec<Want>,
    /// Done by this check's reading and by nothing else,
    #[serde(skip_serializing_if = "Option::is_none")]
    pub test: Option<String>,
    /// at this place.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub at: Option<String>,
    /// Whether it is done.
    pub done: bool,
    /// What it is for.
    #[serde(skip)]
    pub stage: Stage,
    /// The whole state behind the id.
    #[serde(skip)]
    pub key: String,
}

/// Canonical words of what is open, lifted and fed: equal states give equal keys.
pub(super) fn state_key(setup: &Setup) -> String {
    let sorted = |items: &[String]| {
        let mut items = items.to_vec();
        items.sort();
        items.dedup();
        items.join("+")
    };
    let sources: Vec<String> = setup
        .sources
        .iter()
        .map(|(id, mode)| format!("{id}={mode:?}"))
        .collect();
    format!(
        "{}|{}|{}",
        sorted(&setup.open),
        sorted(&setup.lift),
        sources.join("+")
    )
}

/// Six hexadecimal digits of a key (FNV-1a); the whole key is compared besides.
fn mark(key: &str) -> String {
    let hash = key.bytes().fold(0x811c_9dc5_u32, |hash, byte| {
        (hash ^ u32::from(byte)).wrapping_mul(0x0100_0193)
    });
    format!("{:06x}", hash & 0x00ff_ffff)
}

/// A name with a mark of its state, where it has one.
pub(super) fn marked(name: &str, key: &str) -> String {
    if key.is_empty() {
        name.to_owned()
    } else {
        format!("{name}-{}", mark(key))
    }
}
