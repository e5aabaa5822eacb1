//! Odds and plan of a visit: the only place that asks belief and plan.

use std::sync::Arc;

use super::command;
use super::engine::Engine;
use super::error::{ErrorCode, SessionError};
use super::view::{AdviceView, OddsView, VerdictView};
use crate::checks::Check;
use crate::faults::Fault;
use crate::knowledge::{Hookup, Setup};
use crate::network::Edit;
use crate::quantity::Parsed;
use crate::safety::{Body, Cleared, HazardBook, Hazards, World};

/// Skin is taken to be wet: nobody asks the occupant to dry it.
const SKIN: &str = "wet";

/// One body in twenty lets more current through.
const PERCENTILE: f64 = 5.0;

/// Odds and plan.
#[derive(Debug)]
pub struct Mind {
    engine: Arc<Engine>,
    book: HazardBook,
    body: Body,
}

impl Mind {
    pub fn new(engine: Arc<Engine>, _seed: u64) -> Result<Self, SessionError> {
        let body = Body::from_rows(&engine.knowledge.bodies, SKIN, PERCENTILE).map_err(|e| {
            SessionError::new(
                ErrorCode::Internal,
                e.to_string(),
                "mend the knowledge files",
            )
        })?;
        Ok(Self {
            engine,
            book: HazardBook::new(),
            body,
        })
    }
    pub fn hypotheses(&self) -> usize {
        0
    }
    pub fn ids(&self) -> Vec<String> {
        Vec::new()
    }
    pub fn symptom(&mut self, _entry: u64, _symptom: &command::Symptom) {}
    pub fn observe(&mut self, _entry: u64, _check: &Check, _parsed: &Parsed) {}
    pub fn retract(&mut self, _entry: u64) {}
    pub fn repair(&mut self, _entry: u64, _faults: &[Fault], _found: bool, _done: bool) {}
    pub fn refine(&mut self, _passes: u64) {}
    pub fn think(&mut self, _go_on: &mut dyn FnMut() -> bool) -> u64 {
        0
    }
    pub fn surprise(&self, _check: &Check, _parsed: &Parsed) -> f64 {
        1.0
    }
    pub fn odds(&self, _count: usize) -> OddsView {
        OddsView {
            unlisted: 1.0,
            ..OddsView::default()
        }
    }
    pub fn whatif(&self, _check: &Check, _parsed: &Parsed, count: usize) -> OddsView {
        self.odds(count)
    }
    pub fn evidence(&self, _hypothesis: &str) -> Option<Vec<(u64, f64)>> {
        None
    }
    pub fn advise(
        &mut self,
        _cleared: &[Cleared<Check>],
        _setup: &Setup,
        _place: &str,
        _count: usize,
    ) -> Vec<AdviceView> {
        let _ = &self.engine;
        Vec::new()
    }
    pub fn verdict(
        &mut self,
        _cleared: &[Cleared<Check>],
        _setup: &Setup,
        _place: &str,
    ) -> Option<VerdictView> {
        None
    }
    pub fn with_hazards<R>(&mut self, f: impl FnOnce(&mut Hazards<'_>) -> R) -> R {
        let mut simulator = |_: &World, _: usize, _: &Setup, _: &[Edit], hookups: &[Hookup]| {
            vec![None; hookups.len()]
        };
        let mut hazards = Hazards::new(&mut self.book, &[], &self.body, &mut simulator);
        f(&mut hazards)
    }
}
