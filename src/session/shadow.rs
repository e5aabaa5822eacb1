//! Tests simulated under the hypotheses still credible, for the gate of safety.

use std::collections::BTreeMap;
use std::sync::Arc;

use super::engine::Engine;
use super::error::{ErrorCode, SessionError};
use super::explain::faults_of;
use crate::belief::cloud::Draws;
use crate::belief::{Belief, Candidate};
use crate::faults::{NOTHING_WRONG, describe, edits};
use crate::numeric::stats::systematic;
use crate::safety::{Body, CircuitSimulator, Drawn, HazardBook, Hazards, World};

/// Skin is taken to be wet: nobody asks the occupant to dry it.
const SKIN: &str = "wet";

/// One body in twenty lets more current through.
const PERCENTILE: f64 = 5.0;

/// Draws of each hypothesis' unknowns under which a test is simulated.
const DRAWS: usize = 4;

/// The draws of a hypothesis that are simulated.
#[derive(Clone, Debug)]
struct Picked {
    of: Arc<Draws>,
    picks: Vec<usize>,
    drawn: Vec<Drawn>,
}

/// What simulation has shown so far.
#[derive(Debug)]
pub struct Shadow {
    book: HazardBook,
    body: Body,
    picked: BTreeMap<String, Picked>,
}

impl Shadow {
    /// Nothing simulated yet.
    ///
    /// # Errors
    /// `internal`: knowledge without the body's row.
    pub fn new(engine: &Engine) -> Result<Self, SessionError> {
        let body = Body::from_rows(&engine.knowledge().bodies, SKIN, PERCENTILE).map_err(|e| {
            SessionError::new(
                ErrorCode::Internal,
                e.to_string(),
                "mend the knowledge files",
            )
        })?;
        Ok(Self {
            book: HazardBook::new(),
            body,
            picked: BTreeMap::new(),
        })
    }

    /// Forgets everything: the circuit was changed by a repair, or history was.
    pub fn clear(&mut self) {
        self.book.clear();
        self.picked.clear();
    }

    /// Lets the gate simulate under what is credible now.
    pub fn with<R>(
        &mut self,
        engine: &Engine,
        belief: &Belief,
        ask: impl FnOnce(&mut Hazards<'_>) -> R,
    ) -> R {
        let worlds = self.worlds(engine, belief);
        let mut simulator = CircuitSimulator::new(&engine.model.network);
        for world in &worlds {
            if let Some(picked) = self.picked.get(&world.id) {
                simulator.set(&world.id, picked.drawn.clone());
            }
        }
        let mut hazards = Hazards::new(&mut self.book, &worlds, &self.body, &mut simulator);
        ask(&mut hazards)
    }

    /// The credible hypotheses; findings about one whose likely draws are others now are forgotten.
    fn worlds(&mut self, engine: &Engine, belief: &Belief) -> Vec<World> {
        let least = engine.knowledge().safety.credible;
        let odds = belief.odds();
        let nothing = belief
            .find(NOTHING_WRONG)
            .map(|index| (index, odds.nothing_wrong));
        let credible = odds
            .hypotheses
            .iter()
            .copied()
            .chain(nothing)
            .filter(|(_, p)| *p >= least);
        credible
            .filter_map(|(index, p)| {
                let candidate = belief.candidates().get(index)?;
                let (id, draws) = (candidate.id().to_owned(), self.pick(engine, candidate));
                let faults = faults_of(candidate);
                let says = match describe(engine.knowledge(), engine.site(), faults) {
                    Ok(text) if !text.is_empty() => text,
                    _ => "nothing is wrong".to_owned(),
                };
                Some(World { id, says, p, draws })
            })
            .collect()
    }

    /// Picks the draws of a candidate by their weights; how many.
    fn pick(&mut self, engine: &Engine, candidate: &Candidate) -> usize {
        let cloud = candidate.cloud();
        let picks = systematic(&cloud.weights(), DRAWS, 0.5);
        let count = picks.len();
        let known = self.picked.get(candidate.id());
        if known.is_some_and(|known| known.picks == picks && Arc::ptr_eq(&known.of, &cloud.draws)) {
            return count;
        }
        self.book.forget(candidate.id());
        let drawn = picks
            .iter()
            .map(|&pick| drawn(engine, candidate, pick))
            .collect();
        self.picked.insert(
            candidate.id().to_owned(),
            Picked {
                of: Arc::clone(&cloud.draws),
                picks,
                drawn,
            },
        );
        count
    }
}

/// One draw as edits with their values; a fault without an edit leaves the circuit as it is.
fn drawn(engine: &Engine, candidate: &Candidate, pick: usize) -> Drawn {
    let mut values = candidate
        .world()
        .values(candidate.cloud().own(pick))
        .into_iter();
    let mut all = Vec::new();
    for fault in faults_of(candidate) {
        let Some(kind) = engine
            .knowledge()
            .fault(&fault.kind)
            .filter(|kind| !kind.edits.is_empty())
        else {
            continue;
        };
        let mut fault = fault.clone();
        // In the order of belief's unknowns: of each fault its value, then its position.
        if kind.value.is_some() && fault.value.is_none() {
            fault.value = values.next();
        }
        if kind.position && fault.position.is_none() {
            fault.position = values.next();
        }
        all.push(fault);
    }
    let edits = edits(engine.knowledge(), engine.site(), &all).unwrap_or_default();
    Drawn {
        edits,
        theta: candidate.cloud().draws.theta(pick).to_vec(),
    }
}
