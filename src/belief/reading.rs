//! A reading as taken: which test, in which setup, what it said, and how many repairs came before.

use crate::knowledge::{Hookup, Setup};
use crate::quantity::Parsed;

/// One reading.
#[derive(Clone, Debug, PartialEq)]
pub struct Reading {
    /// Log entry.
    pub entry: u64,
    /// Check id.
    pub test: String,
    /// Its place.
    pub at: String,
    /// State it was taken in.
    pub setup: Setup,
    /// Hookup.
    pub hookup: Hookup,
    /// What it said.
    pub parsed: Parsed,
    /// Repairs done before it.
    pub epoch: usize,
}

/// Readings of one test at one place: a slip of method is shared by repeats.
#[derive(Clone, Debug, Default, PartialEq)]
pub struct Group {
    /// In order of entry.
    pub readings: Vec<Reading>,
}

impl Group {
    /// Whether a reading belongs here: same test, place and circuit.
    pub fn takes(&self, reading: &Reading) -> bool {
        self.readings.first().is_some_and(|r| {
            r.test == reading.test && r.at == reading.at && r.epoch == reading.epoch
        })
    }
}
