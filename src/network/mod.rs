//! The installation as a circuit, and what every instrument reads on it.
//!
//! Nodal admittance, solved by star–mesh elimination on branch admittances: sums and products only,
//! so twelve decades of conductance cost no digits.

pub mod edit;
pub mod params;

pub use edit::Edit;
pub use params::{ParamId, ParamSpec, ParamTable};

use crate::quantity::{Unit, Word};

/// What an instrument shows.
#[derive(Clone, Copy, Debug, PartialEq)]
pub enum Outcome {
    /// A number in SI; infinite ohms are `f64::INFINITY`.
    Number(f64),
    /// A word.
    Word(Word),
}

/// A predicted reading (contract §6 `predict`).
#[derive(Clone, Debug, PartialEq)]
pub struct Prediction {
    /// What the instrument shows.
    pub outcome: Outcome,
    /// Its unit.
    pub unit: Unit,
    /// Devices that operated, in order.
    pub tripped: Vec<String>,
}

/// Why a network question has no answer.
#[derive(Clone, Debug, PartialEq, Eq, thiserror::Error)]
pub enum NetworkError {
    /// A terminal, device, end or branch that this site does not have.
    #[error("there is no {what} `{name}` here{}", near(.nearest))]
    UnknownPlace {
        /// `terminal`, `device`, `conductor end`, `equipment`, `branch`, `parameter`.
        what: &'static str,
        /// As asked.
        name: String,
        /// Nearest valid names.
        nearest: Vec<String>,
    },
    /// Two edits on one branch that cannot both be.
    #[error("two faults contradict each other on {branch}")]
    Conflict {
        /// Branch key.
        branch: String,
    },
    /// The request makes no sense on this site.
    #[error("{0}")]
    Bad(String),
}

fn near(names: &[String]) -> String {
    if names.is_empty() {
        String::new()
    } else {
        format!("; nearest: {}", names.join(", "))
    }
}
