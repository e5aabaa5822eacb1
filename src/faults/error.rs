//! Why a fault cannot be taken as told.

/// Why a list of faults has no circuit on this site, or a kind of knowledge has no places.
#[derive(Clone, Debug, PartialEq, thiserror::Error)]
pub enum FaultError {
    /// A kind that knowledge does not have.
    #[error("there is no fault kind `{kind}`{}", nearest(.near))]
    UnknownKind {
        /// As asked.
        kind: String,
        /// Nearest kinds.
        near: Vec<String>,
    },
    /// A place that this site does not have, or that the kind cannot sit at.
    #[error("`{kind}` cannot be at `{place}`: {why}{}", nearest(.near))]
    UnknownPlace {
        /// Kind.
        kind: String,
        /// As asked.
        place: String,
        /// What is amiss.
        why: String,
        /// Nearest places that fit.
        near: Vec<String>,
    },
    /// A key that is missing, needless or out of range.
    #[error("`{kind}` at `{at}`: {why}")]
    Bad {
        /// Kind.
        kind: String,
        /// Place.
        at: String,
        /// What is amiss, and the cure.
        why: String,
    },
    /// Two faults that cannot both be.
    #[error("{first} and {second} contradict each other on {branch}")]
    Conflict {
        /// One.
        first: String,
        /// The other.
        second: String,
        /// The branch, end or property they both claim.
        branch: String,
    },
    /// A kind without an effect on the circuit.
    #[error("`{kind}` does not change the circuit: its readings are not predicted by solving it")]
    NotPredictable {
        /// Kind.
        kind: String,
    },
    /// A mistake of the knowledge files.
    #[error("fault kind `{kind}`: {why}")]
    Knowledge {
        /// Kind.
        kind: String,
        /// What is amiss, and the cure.
        why: String,
    },
}

impl FaultError {
    /// The error code of contract §6.
    pub fn code(&self) -> &'static str {
        match self {
            Self::UnknownKind { .. } => "unknown-word",
            Self::UnknownPlace { .. } => "unknown-place",
            Self::Bad { .. } => "bad-request",
            Self::Conflict { .. } => "conflict",
            Self::NotPredictable { .. } => "not-predictable",
            Self::Knowledge { .. } => "internal",
        }
    }
}

fn nearest(names: &[String]) -> String {
    if names.is_empty() {
        String::new()
    } else {
        format!("; nearest: {}", names.join(", "))
    }
}
