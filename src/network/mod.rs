//! The installation as a circuit, and what every instrument reads on it.
//!
//! Nodal admittance, solved by star–mesh elimination on branch admittances: sums and products only,
//! so twelve decades of conductance cost no digits. Reference directions: every branch runs away from
//! the supply, an earth outward from its bar, a link from N to PE.

pub mod circuit;
pub mod edit;
pub mod law;
pub mod params;
pub mod protect;
pub mod read;
pub mod solve;
pub mod state;

mod build;
mod rework;

use std::collections::BTreeMap;

pub use circuit::Circuit;
pub use edit::Edit;
pub use law::Values;
pub use params::{Common, ParamId, ParamSpec, ParamTable};
pub use read::{Probe, read};
pub use solve::{ExactSolver, Phasors, QuickSolver, Solver, Wiring};
pub use state::{Switching, Unnamed};

use crate::knowledge::{Hookup, Knowledge, Setup};
use crate::quantity::{Unit, Word};
use crate::site::Site;

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
    /// A, the magnitudes inside a clamp summed, of which some leaks into its reading; else 0.
    pub enclosed: f64,
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

/// A site's sound circuit with its parameters.
#[derive(Clone, Debug)]
pub struct Network {
    /// Sound circuit.
    pub circuit: Circuit,
    /// Parameters.
    pub params: ParamTable,
    /// Those used by name.
    pub common: Common,
}

impl Network {
    /// Builds the circuit of a site.
    ///
    /// # Errors
    /// A row that knowledge lacks; RCDs that feed each other.
    pub fn new(site: &Site, knowledge: &Knowledge) -> Result<Self, NetworkError> {
        let (circuit, params, common) = build::build(site, knowledge)?;
        Ok(Self {
            circuit,
            params,
            common,
        })
    }

    /// The circuit under edits.
    ///
    /// # Errors
    /// Places that are not here; contradictions.
    pub fn edited(&self, edits: &[Edit]) -> Result<Circuit, NetworkError> {
        let mut circuit = self.circuit.clone();
        circuit.rework(edits)?;
        Ok(circuit)
    }

    /// The values of `predict`, with overrides by dotted path (contract §6 `parameters`);
    /// `None` for insulation is perfect.
    ///
    /// # Errors
    /// A path that this site does not have; a value that is negative or not a number.
    pub fn point_values(
        &self,
        overrides: &BTreeMap<String, Option<f64>>,
    ) -> Result<Vec<f64>, NetworkError> {
        let mut theta = self.params.points();
        for (path, value) in overrides {
            let id = self
                .params
                .id(path)
                .ok_or_else(|| NetworkError::UnknownPlace {
                    what: "parameter",
                    name: path.clone(),
                    nearest: crate::quantity::suggest::nearest(
                        path,
                        self.params.by_path.keys().map(String::as_str),
                        3,
                    ),
                })?;
            let value = value.unwrap_or(f64::INFINITY);
            if value.is_nan() || (value < 0.0 && path != "cable.celsius") {
                return Err(NetworkError::Bad(format!(
                    "{path} of {value}: give a number from zero up"
                )));
            }
            theta[id.0] = value;
        }
        Ok(theta)
    }

    /// What an instrument would show, exactly, in a circuit as told (contract §6 `predict`):
    /// equipment is off unless the setup has it on.
    ///
    /// # Errors
    /// As [`Network::edited`], [`Network::point_values`], [`Circuit::switching`] and [`Circuit::probe`].
    pub fn predict(
        &self,
        edits: &[Edit],
        setup: &Setup,
        hookup: &Hookup,
        overrides: &BTreeMap<String, Option<f64>>,
        protection: bool,
    ) -> Result<Prediction, NetworkError> {
        let circuit = self.edited(edits)?;
        let theta = self.point_values(overrides)?;
        let sw = circuit.switching(setup, Unnamed::Off)?;
        let probe = circuit.probe(hookup, &setup.on)?;
        let values = Values {
            theta: &theta,
            common: &self.common,
        };
        let solver = ExactSolver {
            circuit: &circuit,
            values,
        };
        Ok(read(&solver, &probe, &sw, protection))
    }
}

#[cfg(test)]
mod tests;
