//! A check at a place: setup, hookup, minutes, instruments.

use crate::knowledge::{HoldForm, Hookup, Proof, Setup};

/// A check at a place; `test` and `at` are unique together.
#[derive(Clone, Debug, PartialEq)]
pub struct Check {
    /// Check id in knowledge.
    pub test: String,
    /// Place, or two joined by `+`; opaque.
    pub at: String,
    /// Row in `Knowledge::checks`.
    pub form: usize,
    /// What a person reads, words and places filled.
    pub name: String,
    /// How to connect, filled.
    pub text: String,
    /// Setup, filled.
    pub setup: Setup,
    /// Hookup, filled.
    pub hookup: Hookup,
    /// Unit of a bare number.
    pub unit: String,
    /// Minutes of the measurement alone.
    pub minutes: f64,
    /// Whether anything that is touched may be live: the supply is on at the hookup.
    pub energised: bool,
    /// Instruments: each entry one need, alternatives parted by `|`.
    pub kit: Vec<String>,
    /// Extra hold points, filled.
    pub hold: Vec<HoldForm>,
    /// Proofs needed, filled.
    pub needs: Vec<String>,
    /// Proofs given, filled.
    pub proves: Vec<Proof>,
    /// Hazard text, filled.
    pub hazard: Option<String>,
    /// Limit rows.
    pub limits: Vec<String>,
    /// Never advised.
    pub recheck_only: bool,
    /// A stage of the procedure that proves the supply neutral: its own `needs` stand in place of that proof.
    pub staged: bool,
    /// Place where the person stands, for walking.
    pub place: String,
}

impl Check {
    /// Its key: test and place, unique together.
    pub fn key(&self) -> (&str, &str) {
        (&self.test, &self.at)
    }
}
