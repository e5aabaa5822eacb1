//! The cause that no kind describes: the sound circuit with one random branch changed or one random
//! admittance added, and a broad density as last resort (design §3).
//!
//! A flat density would make the odds depend on the range typed (Bartlett–Lindley paradox); a structured
//! one predicts like a fault.

use super::cloud::{Draws, aim, shown};
use super::model::Model;
use super::reading::Group;
use super::sight::{core, gross, slip, together};
use super::world::World;
use crate::network::{Circuit, Outcome, QuickSolver, Values};
use crate::numeric::rng::Stream;
use crate::numeric::special::{exp, ln, log_add_exp};

/// Share of readings that even the structured unknown does not predict.
const BROAD: f64 = 0.15;

/// Random single changes of the sound circuit.
#[derive(Clone, Debug)]
pub struct Unlisted {
    worlds: Vec<World>,
    /// Log likelihood of each group, per draw.
    pub groups: Vec<Vec<f64>>,
}

impl Unlisted {
    /// `n` random changes.
    pub fn new(model: &Model, n: usize, seed: u64) -> Self {
        let mut stream = Stream::new(seed, "unlisted", 0);
        let worlds = (0..n)
            .map(|_| World::of_circuit(change(&model.network.circuit, &mut stream)))
            .collect();
        Self {
            worlds,
            groups: Vec::new(),
        }
    }

    /// Log evidence of the groups so far.
    pub fn log_evidence(&self) -> f64 {
        let n = self.worlds.len();
        let w: Vec<f64> = (0..n)
            .map(|i| self.groups.iter().map(|g| g[i]).sum())
            .collect();
        crate::numeric::special::log_sum_exp(&w) - ln(n.max(1) as f64)
    }

    /// The same with one group left out.
    pub fn log_evidence_without(&self, group: usize) -> f64 {
        let n = self.worlds.len();
        let w: Vec<f64> = (0..n)
            .map(|i| {
                self.groups
                    .iter()
                    .enumerate()
                    .filter(|(g, _)| *g != group)
                    .map(|(_, l)| l[i])
                    .sum()
            })
            .collect();
        crate::numeric::special::log_sum_exp(&w) - ln(n.max(1) as f64)
    }

    /// Adds (or replaces, at `index`) a group of readings.
    pub fn take(&mut self, model: &Model, draws: &Draws, group: &Group, index: usize) {
        let lik = self.likelihood(model, draws, group);
        if index < self.groups.len() {
            self.groups[index] = lik;
        } else {
            self.groups.push(lik);
        }
    }

    fn likelihood(&self, model: &Model, draws: &Draws, group: &Group) -> Vec<f64> {
        let n = self.worlds.len();
        let mut cores = vec![0.0; n];
        let mut slips = vec![0.0; n];
        let Some(row) = group
            .readings
            .first()
            .and_then(|r| model.knowledge.error_of(&r.hookup))
        else {
            return vec![0.0; n];
        };
        for reading in &group.readings {
            for (i, world) in self.worlds.iter().enumerate() {
                let broad = ln(BROAD) + gross(row, &reading.parsed);
                let Some(aim) = aim(world, &reading.setup, &reading.hookup) else {
                    continue;
                };
                let (c, s) = match super::cloud::told(world, reading) {
                    Some(p) => (ln(p.max(1e-6)), ln(0.3)),
                    None => {
                        let values = Values {
                            theta: draws.theta(i % draws.n),
                            common: &model.network.common,
                        };
                        let seen = shown(&QuickSolver::new(&world.wiring, values), &aim);
                        // A structured guess hits the size, seldom the digits: its spread is widened.
                        let wide = match seen.outcome {
                            Outcome::Number(_) => 6.0,
                            Outcome::Word(_) => 1.0,
                        };
                        (
                            core(row, seen, &reading.parsed, wide, 0.0),
                            slip(row, seen, &reading.parsed, wide),
                        )
                    }
                };
                cores[i] += log_add_exp(ln(1.0 - BROAD) + c, broad);
                slips[i] += s;
            }
        }
        (0..n).map(|i| together(row, cores[i], slips[i])).collect()
    }
}

/// One branch put in series or opened, or one resistance added between two terminals.
fn change(sound: &Circuit, stream: &mut Stream) -> Circuit {
    let mut circuit = sound.clone();
    let ohms = exp(stream.uniform(ln(0.2), ln(2e5)));
    if stream.chance(0.5) {
        let keyed: Vec<usize> = circuit.keys.values().copied().collect();
        if let Some(&b) = keyed.get(stream.below(keyed.len().max(1))) {
            circuit.branches[b].series = if stream.chance(0.4) {
                f64::INFINITY
            } else {
                ohms
            };
        }
    } else {
        let shown: Vec<usize> = circuit
            .terminals
            .iter()
            .filter(|(name, _)| !name.starts_with("network.") && !name.starts_with("street."))
            .map(|(_, &n)| n)
            .collect();
        if shown.len() > 1 {
            let (a, b) = (
                shown[stream.below(shown.len())],
                shown[stream.below(shown.len())],
            );
            if a != b {
                circuit.bridge(a, b, ohms);
            }
        }
    }
    circuit
}
