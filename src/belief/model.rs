//! What belief reasons about: site, knowledge, circuit, hypotheses, checks, held together for a visit.

use crate::checks::{Check, CheckError, catalogue};
use crate::faults::{FaultError, Space, enumerate};
use crate::knowledge::Knowledge;
use crate::network::{Network, NetworkError, Wiring};
use crate::site::Site;

/// Everything that stays the same through a visit.
#[derive(Debug)]
pub struct Model {
    /// Knowledge.
    pub knowledge: Knowledge,
    /// Site.
    pub site: Site,
    /// Sound circuit and parameters.
    pub network: Network,
    /// Single hypotheses.
    pub space: Space,
    /// Checks at places.
    pub checks: Vec<Check>,
    /// The sound circuit, planned.
    pub sound: Wiring,
}

/// Why a model could not be made.
#[derive(Debug, thiserror::Error)]
pub enum ModelError {
    /// The circuit.
    #[error(transparent)]
    Network(#[from] NetworkError),
    /// The hypotheses.
    #[error(transparent)]
    Faults(#[from] FaultError),
    /// The checks.
    #[error(transparent)]
    Checks(#[from] CheckError),
}

impl Model {
    /// Enumerates hypotheses and checks of a site.
    ///
    /// # Errors
    /// Knowledge that does not fit together on this site.
    pub fn new(knowledge: Knowledge, site: Site) -> Result<Self, ModelError> {
        let network = Network::new(&site, &knowledge)?;
        let space = enumerate(&knowledge, &site)?;
        let checks = catalogue(&knowledge, &network, &site)?;
        let sound = Wiring::new(network.circuit.clone());
        Ok(Self {
            knowledge,
            site,
            network,
            space,
            checks,
            sound,
        })
    }

    /// Index of a check by test and place.
    pub fn check(&self, test: &str, at: &str) -> Option<usize> {
        self.checks
            .iter()
            .position(|c| c.test == test && c.at == at)
    }
}
