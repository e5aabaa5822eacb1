//! The solver behind the hazards: each hypothesis' draws as edited circuits, every reading of a state from one solution.

use std::collections::BTreeMap;

use super::world::{Simulator, World};
use crate::knowledge::{Hookup, Meter, Setup};
use crate::network::law::Values;
use crate::network::solve::{Extra, Phasors, QuickSolver, Wiring};
use crate::network::state::{Switching, Unnamed};
use crate::network::{Edit, Network, protect};
use crate::numeric::special;
use num_complex::Complex64;

/// One draw of a hypothesis: its edits with their values, and the values of all parameters.
#[derive(Clone, Debug, PartialEq)]
pub struct Drawn {
    /// Edits.
    pub edits: Vec<Edit>,
    /// Values, in the order of the network's parameters.
    pub theta: Vec<f64>,
}

/// Nodes kept wired at once; beyond, wirings are made anew (some hundred megabytes otherwise).
const MOST_NODES: usize = 60_000;

/// A [`Simulator`] on the network, for the draws of hypotheses by their id.
#[derive(Debug)]
pub struct CircuitSimulator<'a> {
    network: &'a Network,
    draws: BTreeMap<String, Vec<Drawn>>,
    wired: BTreeMap<(String, usize), Option<Wiring>>,
    nodes: usize,
}

impl<'a> CircuitSimulator<'a> {
    /// On a network, with no hypothesis yet.
    pub fn new(network: &'a Network) -> Self {
        Self {
            network,
            draws: BTreeMap::new(),
            wired: BTreeMap::new(),
            nodes: 0,
        }
    }

    /// Whether a hypothesis has draws.
    pub fn has(&self, world: &str) -> bool {
        self.draws.contains_key(world)
    }

    /// Gives a hypothesis its draws, in place of earlier ones.
    pub fn set(&mut self, world: &str, draws: Vec<Drawn>) {
        self.wired.retain(|(id, _), _| id != world);
        self.draws.insert(world.to_owned(), draws);
    }

    fn wire(&mut self, world: &str, draw: usize) {
        let key = (world.to_owned(), draw);
        if self.wired.contains_key(&key) {
            return;
        }
        if self.nodes > MOST_NODES {
            self.wired.clear();
            self.nodes = 0;
        }
        let drawn = self.draws.get(world).and_then(|draws| draws.get(draw));
        let wiring = drawn
            .and_then(|d| self.network.edited(&d.edits).ok())
            .map(Wiring::new);
        self.nodes += wiring.as_ref().map_or(0, |w| w.circuit.nodes.len());
        self.wired.insert(key, wiring);
    }
}

impl Simulator for CircuitSimulator<'_> {
    fn read_each(
        &mut self,
        world: &World,
        draw: usize,
        setup: &Setup,
        tests: &[Vec<Edit>],
        hookups: &[Hookup],
    ) -> Vec<Vec<Option<f64>>> {
        let nothing = || vec![vec![None; hookups.len()]; tests.len()];
        self.wire(&world.id, draw);
        let wiring = self
            .wired
            .get(&(world.id.clone(), draw))
            .and_then(Option::as_ref);
        let drawn = self.draws.get(&world.id).and_then(|draws| draws.get(draw));
        let (Some(wiring), Some(drawn)) = (wiring, drawn) else {
            return nothing();
        };
        let values = Values {
            theta: &drawn.theta,
            common: &self.network.common,
        };
        let solver = QuickSolver::new(wiring, values);
        let Ok(sw) = wiring.circuit.switching(setup, Unnamed::AsFound) else {
            return nothing();
        };
        let shown = |test: &Vec<Edit>| {
            let extra: Vec<Extra> = test
                .iter()
                .filter_map(|edit| burden(wiring, edit))
                .collect();
            let mut running = sw.clone();
            let phasors = protect::solve(&solver, &mut running, &extra);
            hookups
                .iter()
                .map(|hookup| one(&solver, wiring, &running, &extra, &phasors, hookup))
                .collect()
        };
        tests.iter().map(shown).collect()
    }
}

/// The instrument's path as a further branch.
fn burden(wiring: &Wiring, edit: &Edit) -> Option<Extra> {
    let Edit::Shunt {
        between: [a, b],
        ohms,
        ..
    } = edit
    else {
        return None;
    };
    let a = wiring.circuit.terminal(a).ok()?;
    let b = wiring.circuit.terminal(b).ok()?;
    (*ohms > 0.0).then(|| Extra {
        a,
        b,
        y: Complex64::new(1.0 / ohms, 0.0),
    })
}

fn one(
    solver: &QuickSolver<'_>,
    wiring: &Wiring,
    sw: &Switching,
    extra: &[Extra],
    phasors: &Phasors,
    hookup: &Hookup,
) -> Option<f64> {
    match hookup {
        Hookup::Volts {
            between: [a, b],
            meter,
        } => {
            let a = wiring.circuit.terminal(a).ok()?;
            let b = wiring.circuit.terminal(b).ok()?;
            let across = |p: &Phasors| Some(special::abs(p.volts.get(a)? - p.volts.get(b)?));
            let Some(Meter::Ohms(ohms)) = meter else {
                return across(phasors);
            };
            let mut loaded = extra.to_vec();
            loaded.push(Extra {
                a,
                b,
                y: Complex64::new(1.0 / ohms.max(1e-3), 0.0),
            });
            let mut sw = sw.clone();
            across(&protect::solve(solver, &mut sw, &loaded))
        }
        Hookup::Amps { around } => {
            let mut sum = Complex64::new(0.0, 0.0);
            for name in around {
                sum += *phasors.amps.get(wiring.circuit.clamp(name).ok()?)?;
            }
            Some(special::abs(sum))
        }
        _ => None,
    }
}
