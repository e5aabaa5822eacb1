//! The unknown numbers of an installation, each with its path, prior and the value `predict` uses.

use std::collections::BTreeMap;

use crate::knowledge::Prior;

/// Index of a parameter in its table.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord)]
pub struct ParamId(pub usize);

/// One parameter.
#[derive(Clone, Debug, PartialEq)]
pub struct ParamSpec {
    /// Dotted path of contract §6 (`supply.network_ohms`, `kettle.watts`, `kettle.on`, …).
    pub path: String,
    /// Its distribution for belief, the site file's number already taken in.
    pub prior: Prior,
    /// What `predict` takes: the file's number, a range's geometric mean, or the prior median.
    pub point: f64,
}

/// All parameters of a site.
#[derive(Clone, Debug, Default, PartialEq)]
pub struct ParamTable {
    /// In order of index.
    pub specs: Vec<ParamSpec>,
    /// Index by path.
    pub by_path: BTreeMap<String, ParamId>,
}
