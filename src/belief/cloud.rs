//! Draws of a hypothesis' unknowns and what each says of the readings so far.
//!
//! All unknowns are standard normal deviates: first the installation's parameters, shared by every
//! hypothesis (common random numbers), then the fault's own values. Evidence of the readings is the mean
//! of the draws' importance weight times likelihood.

use std::sync::Arc;

use super::model::Model;
use super::reading::{Group, Reading};
use super::sight::{Shown, core, slip, together, unit_coordinate};
use super::world::World;
use crate::faults::Telltale;
use crate::knowledge::{ErrorRow, Hookup};
use crate::network::params::at_normal;
use crate::network::{Outcome, Probe, QuickSolver, Switching, Unnamed, Values, read};
use crate::numeric::rng::{Stream, stratified};
use crate::numeric::special::{ln, log_sum_exp, normal_quantile, pow};
use crate::numeric::stats::{effective_size, normalise};
use crate::quantity::{Parsed, ParsedValue, Word};

/// Draws of the installation's parameters.
#[derive(Clone, Debug)]
pub struct Draws {
    /// How many.
    pub n: usize,
    /// Deviates, draw by draw.
    pub z: Vec<f64>,
    /// Parameter values, draw by draw.
    pub theta: Vec<f64>,
    /// Parameters.
    pub width: usize,
}

impl Draws {
    /// Values from deviates.
    pub fn from_z(model: &Model, z: Vec<f64>) -> Self {
        let specs = &model.network.params.specs;
        let width = specs.len();
        let n = z.len().checked_div(width).unwrap_or(0);
        let theta = (0..n * width)
            .map(|i| at_normal(&specs[i % width].prior, z[i]))
            .collect();
        Self { n, z, theta, width }
    }

    /// A stratified sample of the prior.
    pub fn prior(model: &Model, n: usize, seed: u64) -> Self {
        let width = model.network.params.specs.len();
        let mut stream = Stream::new(seed, "prior", 0);
        let z = stratified(n, width, &mut stream)
            .into_iter()
            .map(normal_quantile)
            .collect();
        Self::from_z(model, z)
    }

    /// Values of a draw.
    pub fn theta(&self, draw: usize) -> &[f64] {
        &self.theta[draw * self.width..(draw + 1) * self.width]
    }

    /// Deviates of a draw.
    pub fn z(&self, draw: usize) -> &[f64] {
        &self.z[draw * self.width..(draw + 1) * self.width]
    }
}

/// A hypothesis' draws with their weights.
#[derive(Clone, Debug)]
pub struct Cloud {
    /// Parameters.
    pub draws: Arc<Draws>,
    /// Deviates of the fault's own unknowns, draw by draw.
    pub own: Vec<f64>,
    /// Log of prior over proposal, per draw (0 for draws of the prior).
    pub ratio: Vec<f64>,
    /// Log likelihood of each group of readings, per draw.
    pub groups: Vec<Vec<f64>>,
    /// The same with spreads fourfold: a guide where draws miss sharp readings.
    pub soft: Vec<Vec<f64>>,
}

/// How many values a draw of the fault's own unknowns has.
fn own_of(world: &World) -> usize {
    world.unknowns.len()
}

impl Cloud {
    /// Draws of the prior.
    pub fn prior(draws: Arc<Draws>, world: &World, seed: u64) -> Self {
        let n = draws.n;
        let mut stream = Stream::new(seed, "fault", own_of(world) as u64);
        let own = stratified(n, own_of(world), &mut stream)
            .into_iter()
            .map(normal_quantile)
            .collect();
        Self {
            draws,
            own,
            ratio: vec![0.0; n],
            groups: Vec::new(),
            soft: Vec::new(),
        }
    }

    /// Number of draws.
    pub fn n(&self) -> usize {
        self.draws.n
    }

    /// The fault's own deviates of a draw.
    pub fn own(&self, draw: usize) -> &[f64] {
        let k = if self.n() == 0 {
            0
        } else {
            self.own.len() / self.n()
        };
        &self.own[draw * k..(draw + 1) * k]
    }

    fn log_weights(&self, groups: &[Vec<f64>]) -> Vec<f64> {
        (0..self.n())
            .map(|i| self.ratio[i] + groups.iter().map(|g| g[i]).sum::<f64>())
            .collect()
    }

    /// Log evidence of the readings.
    pub fn log_evidence(&self) -> f64 {
        let w = self.log_weights(&self.groups);
        let true_one = log_sum_exp(&w) - ln(w.len().max(1) as f64);
        if self.effective() >= 6.0 {
            true_one
        } else {
            true_one.max(self.soft_evidence() - 1.0)
        }
    }

    /// Log evidence with one group left out.
    pub fn log_evidence_without(&self, group: usize) -> f64 {
        let sum = |all: &[Vec<f64>]| -> Vec<f64> {
            (0..self.n())
                .map(|i| {
                    self.ratio[i]
                        + all
                            .iter()
                            .enumerate()
                            .filter(|(g, _)| *g != group)
                            .map(|(_, l)| l[i])
                            .sum::<f64>()
                })
                .collect()
        };
        let w = sum(&self.groups);
        let n = ln(w.len().max(1) as f64);
        let true_one = log_sum_exp(&w) - n;
        let (normal, _) = normalise(&w);
        if effective_size(&normal) >= 6.0 {
            true_one
        } else {
            true_one.max(log_sum_exp(&sum(&self.soft)) - n - 1.0)
        }
    }

    /// The same with spreads fourfold.
    pub fn soft_evidence(&self) -> f64 {
        let w = self.log_weights(&self.soft);
        log_sum_exp(&w) - ln(w.len().max(1) as f64)
    }

    /// Normalised weights.
    pub fn weights(&self) -> Vec<f64> {
        normalise(&self.log_weights(&self.groups)).0
    }

    /// Effective sample size.
    pub fn effective(&self) -> f64 {
        effective_size(&self.weights())
    }
}

/// The state and probe of a reading on one circuit.
pub struct Aim {
    /// Switching state.
    pub sw: Switching,
    /// Instrument.
    pub probe: Option<Probe>,
}

/// Resolves a setup and a hookup on a world's circuit.
pub fn aim(world: &World, setup: &crate::knowledge::Setup, hookup: &Hookup) -> Option<Aim> {
    let circuit = &world.wiring.circuit;
    let sw = circuit.switching(setup, Unnamed::AsFound).ok()?;
    let probe = match hookup {
        Hookup::Seen { .. } => None,
        _ => Some(circuit.probe(hookup, &setup.on).ok()?),
    };
    Some(Aim { sw, probe })
}

/// What an aimed instrument shows.
pub fn shown(solver: &QuickSolver<'_>, aim: &Aim) -> Shown {
    match &aim.probe {
        Some(probe) => {
            let p = read(solver, probe, &aim.sw, true);
            Shown {
                outcome: p.outcome,
                enclosed: p.enclosed,
            }
        }
        None => Shown {
            outcome: Outcome::Word(Word::No),
            enclosed: 0.0,
        },
    }
}

/// What a look or an uncircuited outcome says: probability of the word read, if it is about this reading.
pub fn told(world: &World, reading: &Reading) -> Option<f64> {
    told_by(
        world,
        &reading.test,
        &reading.at,
        &reading.hookup,
        &reading.parsed,
    )
}

fn told_by(
    world: &World,
    test: &str,
    place: &str,
    hookup: &Hookup,
    parsed: &Parsed,
) -> Option<f64> {
    let word = |t: &Telltale| match parsed.value {
        ParsedValue::Word { word } => serde_json::to_value(word)
            .ok()
            .and_then(|v| v.as_str().map(|w| w == t.word)),
        _ => Some(false),
    };
    if let Hookup::Seen { at, what } = hookup {
        // A look that no fault here speaks of finds something by chance.
        let p = world
            .looks
            .iter()
            .filter(|t| t.at == *at && t.what == *what)
            .fold(1.0 - BY_CHANCE, |miss, t| miss * (1.0 - t.p));
        let yes = matches!(parsed.value, ParsedValue::Word { word: Word::Yes });
        return Some(if yes { 1.0 - p } else { p });
    }
    let t = world
        .outcomes
        .iter()
        .find(|t| t.what == test && t.at == place)?;
    let same = word(t)?;
    Some(if same { t.p } else { 1.0 - t.p })
}

/// Probability that a look finds what no fault explains.
pub const BY_CHANCE: f64 = 0.03;

/// Log likelihoods of a group of readings for every draw of a cloud: true spread, and fourfold.
pub fn likelihoods(
    model: &Model,
    worlds: &mut [World],
    sound: &World,
    cloud: &Cloud,
    group: &Group,
) -> (Vec<f64>, Vec<f64>) {
    let n = cloud.n();
    let mut cores = vec![(0.0, 0.0); n];
    let mut slips = vec![(0.0, 0.0); n];
    let Some(first) = group.readings.first() else {
        return (vec![0.0; n], vec![0.0; n]);
    };
    let Some(row) = model.knowledge.error_of(&first.hookup) else {
        return (vec![0.0; n], vec![0.0; n]);
    };
    for reading in &group.readings {
        let epoch = reading.epoch.min(worlds.len().saturating_sub(1));
        let Some(world) = worlds.get_mut(epoch) else {
            continue;
        };
        add_reading(
            model, world, sound, cloud, reading, row, &mut cores, &mut slips,
        );
    }
    let sum = |soft: bool| {
        (0..n)
            .map(|i| {
                let (c, s) = if soft {
                    (cores[i].1, slips[i].1)
                } else {
                    (cores[i].0, slips[i].0)
                };
                together(row, c, s)
            })
            .collect()
    };
    (sum(false), sum(true))
}

#[allow(clippy::too_many_arguments)]
fn add_reading(
    model: &Model,
    world: &mut World,
    sound: &World,
    cloud: &Cloud,
    reading: &Reading,
    row: &ErrorRow,
    cores: &mut [(f64, f64)],
    slips: &mut [(f64, f64)],
) {
    if let Some(p) = told(world, reading) {
        for (c, s) in cores.iter_mut().zip(slips.iter_mut()) {
            let l = ln(p.max(1e-6));
            c.0 += l;
            c.1 += l;
            s.0 += ln(0.3);
            s.1 += ln(0.3);
        }
        return;
    }
    let shows = world.shows(reading.setup.provoke);
    let at = aim(world, &reading.setup, &reading.hookup);
    let at_sound = if shows < 1.0 && world.edited {
        aim(sound, &reading.setup, &reading.hookup)
    } else {
        None
    };
    let Some(at) = at else { return };
    let mut seen = Vec::with_capacity(cloud.n());
    for i in 0..cloud.n() {
        world.set(cloud.own(i));
        let values = Values {
            theta: cloud.draws.theta(i),
            common: &model.network.common,
        };
        let own = shown(&QuickSolver::new(&world.wiring, values), &at);
        let clear = at_sound
            .as_ref()
            .map(|a| shown(&QuickSolver::new(&sound.wiring, values), a));
        seen.push((own, clear));
    }
    let smooth = bandwidth(row, &seen, &cloud.weights());
    for (i, &(seen, clear)) in seen.iter().enumerate() {
        for (soften, pick) in [(1.0, false), (SOFT, true)] {
            let mut c = core(row, seen, &reading.parsed, soften, smooth);
            if let Some(clear) = clear {
                // The fault shows in this reading, or it does not.
                let hidden = core(row, clear, &reading.parsed, soften, smooth);
                c = log_sum_exp(&[
                    ln(shows.max(1e-9)) + c,
                    ln((1.0 - shows).max(1e-9)) + hidden,
                ]);
            }
            let s = slip(row, seen, &reading.parsed, soften);
            if pick {
                cores[i].1 += c;
                slips[i].1 += s;
            } else {
                cores[i].0 += c;
                slips[i].0 += s;
            }
        }
    }
}

/// Smoothing of a handful of weighted draws, in the coordinate of unit error: a kernel estimate in place of
/// spikes (regularised particles, Musso et al. 2001; Silverman's rule at half, for spreads of several modes).
fn bandwidth(row: &ErrorRow, seen: &[(Shown, Option<Shown>)], weights: &[f64]) -> f64 {
    let mut sums = (0.0, 0.0, 0.0, 0.0);
    for ((shown, _), w) in seen.iter().zip(weights) {
        if let Outcome::Number(y) = shown.outcome
            && y < row.over
        {
            let u = unit_coordinate(row, y);
            sums.0 += w;
            sums.1 += w * u;
            sums.2 += w * u * u;
            sums.3 += w * w;
        }
    }
    if sums.0 <= 0.0 {
        return 0.0;
    }
    let mean = sums.1 / sums.0;
    let sd = (sums.2 / sums.0 - mean * mean).max(0.0).sqrt();
    let draws = sums.0 * sums.0 / sums.3;
    0.53 * sd * pow(draws.max(2.0), -0.2)
}

/// Widening of the spreads in the guide.
pub const SOFT: f64 = 4.0;
