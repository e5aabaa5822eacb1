//! Odds over hypotheses, moved by complaints, readings and repairs.
//!
//! Long because it is the whole of what a reading, a complaint and a repair do to the odds.

use std::sync::Arc;

use rayon::prelude::*;

use super::cloud::{Cloud, Draws, likelihoods};
use super::complaint::{Complaint, log_probability, unlisted as unlisted_complaint};
use super::fit::{levers, refit};
use super::model::Model;
use super::odds::posterior;
use super::reading::{Group, Reading};
use super::unlisted::Unlisted;
use super::world::World;
use crate::faults::{Fault, Hypothesis, NOTHING_WRONG, UNLISTED};
use crate::numeric::special::ln;

/// Draws of the prior, common to all hypotheses.
pub const DRAWS: usize = 64;
/// Draws of a refit.
const REFIT: usize = 64;
/// Candidates refitted after a reading, at most: the likeliest by the softened guide.
const REFITTED: usize = 8;
/// Draws in which a complaint's signs are looked for.
const SIGN_DRAWS: usize = 24;
/// Log odds below the leader under which a hypothesis is not refitted.
const FAR: f64 = 7.0;
/// A second fault beside the cause, as a share of its presence among callers (guess).
pub(super) const BESIDE: f64 = 0.03;

/// What a hypothesis is.
#[derive(Clone, Debug, PartialEq)]
pub enum Cause {
    /// Nothing is wrong now.
    Nothing,
    /// A cause that no kind describes.
    Unlisted,
    /// Faults of the space: singles by index.
    Faults(Vec<usize>),
}

/// A hypothesis with its circuit, draws and evidence.
#[derive(Clone, Debug)]
pub struct Candidate {
    /// What it is.
    pub cause: Cause,
    /// Its description; absent for nothing and unlisted.
    pub hypothesis: Option<Hypothesis>,
    /// Circuits before each repair and now: by epoch.
    pub(super) worlds: Vec<World>,
    pub(super) cloud: Cloud,
    pub(super) log_prior: f64,
    pub(super) log_complaint: f64,
    /// Whether the draws were ever refitted.
    pub(super) fitted: bool,
    /// Whether it moves each group of readings off the sound installation's.
    pub(super) moved: Vec<bool>,
}

impl Candidate {
    /// Stable id.
    pub fn id(&self) -> &str {
        match (&self.cause, &self.hypothesis) {
            (Cause::Nothing, _) => NOTHING_WRONG,
            (_, Some(h)) => &h.id,
            _ => UNLISTED,
        }
    }

    /// Repair group.
    pub fn group(&self) -> &str {
        match (&self.cause, &self.hypothesis) {
            (Cause::Nothing, _) => NOTHING_WRONG,
            (_, Some(h)) => &h.group,
            _ => UNLISTED,
        }
    }

    /// Effective sample size of its draws.
    pub fn effective(&self) -> f64 {
        self.cloud.effective()
    }

    /// Its draws.
    pub fn cloud(&self) -> &Cloud {
        &self.cloud
    }

    /// Its circuit now.
    pub fn world(&self) -> &World {
        &self.worlds[self.worlds.len() - 1]
    }
}

/// Probability of everything, summing to one.
#[derive(Clone, Debug, Default, PartialEq)]
pub struct Odds {
    /// Index in [`Belief::candidates`] and probability, best first; nothing and unlisted apart.
    pub hypotheses: Vec<(usize, f64)>,
    /// Repair groups and their probability, best first; nothing and unlisted apart.
    pub groups: Vec<(String, f64)>,
    /// Nothing wrong now.
    pub nothing_wrong: f64,
    /// A cause not on the list.
    pub unlisted: f64,
    /// Bound on what was not examined.
    pub not_examined: f64,
}

/// The belief of a visit.
#[derive(Clone, Debug)]
pub struct Belief {
    pub(super) model: Arc<Model>,
    pub(super) seed: u64,
    pub(super) draws: Arc<Draws>,
    pub(super) candidates: Vec<Candidate>,
    pub(super) unlisted: Unlisted,
    pub(super) groups: Vec<Group>,
    pub(super) complaints: Vec<Complaint>,
    /// Faults known to have been there and repaired, by epoch.
    pub(super) repaired: Vec<Vec<usize>>,
    /// Groups looked for and not found.
    pub(super) absent: Vec<(u64, String)>,
    pub(super) not_examined: f64,
    odds: Odds,
    /// Log likelihoods of each group under the sound installation's draws of the prior.
    pub(super) reference: Vec<Vec<f64>>,
    /// Parameters that move each group of readings at the sound installation.
    pub(super) levers: Vec<Vec<usize>>,
}

impl Belief {
    /// The prior at an installation that calls.
    pub fn new(model: Arc<Model>, seed: u64) -> Self {
        let draws = Arc::new(Draws::prior(&model, DRAWS, seed));
        let unlisted = Unlisted::new(&model, DRAWS, seed);
        let mut belief = Self {
            seed,
            draws,
            candidates: Vec::new(),
            unlisted,
            groups: Vec::new(),
            complaints: Vec::new(),
            repaired: Vec::new(),
            absent: Vec::new(),
            not_examined: 0.0,
            odds: Odds::default(),
            reference: Vec::new(),
            levers: Vec::new(),
            model,
        };
        belief.lay_out();
        belief.weigh();
        belief
    }

    /// The model reasoned about.
    pub fn model(&self) -> &Arc<Model> {
        &self.model
    }

    /// Hypotheses: nothing, unlisted, singles, then pairs as they were added.
    pub fn candidates(&self) -> &[Candidate] {
        &self.candidates
    }

    /// The odds now.
    pub fn odds(&self) -> &Odds {
        &self.odds
    }

    /// Readings so far, by test and place.
    pub fn readings(&self) -> &[Group] {
        &self.groups
    }

    /// Repairs done so far.
    pub fn epoch(&self) -> usize {
        self.repaired.len()
    }

    /// Seed of the visit.
    pub fn seed(&self) -> u64 {
        self.seed
    }

    /// A candidate by id.
    pub fn find(&self, id: &str) -> Option<usize> {
        self.candidates.iter().position(|c| c.id() == id)
    }

    fn known(&self) -> Vec<usize> {
        self.repaired.iter().flatten().copied().collect()
    }

    /// The circuits of a set of singles, one per epoch.
    fn worlds(&self, singles: &[usize]) -> Option<Vec<World>> {
        let mut out = Vec::with_capacity(self.repaired.len() + 1);
        for epoch in 0..=self.repaired.len() {
            let gone: Vec<usize> = self.repaired[..epoch].iter().flatten().copied().collect();
            let faults: Vec<Fault> = singles
                .iter()
                .filter(|s| !gone.contains(s))
                .flat_map(|&s| self.model.space.singles[s].faults.iter().cloned())
                .collect();
            let world = if faults.is_empty() {
                World::sound(&self.model)
            } else {
                World::new(&self.model, &faults).ok()?
            };
            out.push(world);
        }
        Some(out)
    }

    fn hypothesis_of(&self, singles: &[usize]) -> Option<Hypothesis> {
        match singles {
            [] => None,
            [a] => Some(self.model.space.singles[*a].clone()),
            [a, b, ..] => Some(self.model.space.pair(*a.min(b), *a.max(b))),
        }
    }

    /// A candidate of known (repaired) singles and new ones.
    pub(super) fn candidate(&self, cause: Cause) -> Option<Candidate> {
        let known = self.known();
        let own: Vec<usize> = match &cause {
            Cause::Faults(list) => list.clone(),
            _ => Vec::new(),
        };
        let mut all = known;
        all.extend(own.iter().copied().filter(|s| !self.known().contains(s)));
        let worlds = self.worlds(&all)?;
        let beside = &self.model.knowledge.beside;
        let log_prior = match &cause {
            Cause::Nothing => ln(beside.nothing_wrong.max(1e-12)),
            Cause::Unlisted => ln(beside.unlisted.max(1e-12)),
            Cause::Faults(list) => {
                let product: f64 = list
                    .iter()
                    .map(|&s| ln(self.model.space.singles[s].prior.max(1e-300)))
                    .sum();
                // Presence is a share of calls; beside another cause a fault is there more seldom.
                product + ln(BESIDE) * (list.len().saturating_sub(1)) as f64
            }
        };
        // After a repair that was found, nothing more being wrong is the usual case.
        let log_prior = if matches!(cause, Cause::Nothing) && !self.repaired.is_empty() {
            0.0
        } else {
            log_prior
        };
        let cloud = Cloud::prior(self.draws.clone(), &worlds[0], self.seed);
        Some(Candidate {
            hypothesis: self.hypothesis_of(&own),
            cause,
            worlds,
            cloud,
            log_prior,
            log_complaint: 0.0,
            fitted: false,
            moved: Vec::new(),
        })
    }

    /// Lays out nothing, unlisted and every single anew.
    fn lay_out(&mut self) {
        let known = self.known();
        let n = self.model.space.singles.len();
        let mut causes = vec![Cause::Nothing, Cause::Unlisted];
        causes.extend(
            (0..n)
                .filter(|s| !known.contains(s))
                .map(|s| Cause::Faults(vec![s])),
        );
        let this = &*self;
        self.candidates = causes
            .into_par_iter()
            .filter_map(|c| this.candidate(c))
            .collect();
    }

    /// Takes a complaint in.
    pub fn complain(&mut self, complaint: Complaint) {
        self.complaints.push(complaint);
        self.hear();
        self.weigh();
    }

    /// Complaints of each candidate, from scratch.
    fn hear(&mut self) {
        let (model, draws, complaints) = (&self.model, &self.draws, &self.complaints);
        let after_repair = !self.repaired.is_empty();
        self.candidates
            .par_iter_mut()
            .for_each(|c| c.hear(model, complaints, draws, after_repair));
    }

    /// Takes a reading in.
    pub fn observe(&mut self, reading: Reading) {
        let mut reading = reading;
        reading.epoch = self.repaired.len();
        let index = match self.groups.iter().position(|g| g.takes(&reading)) {
            Some(i) => i,
            None => {
                self.groups.push(Group::default());
                self.groups.len() - 1
            }
        };
        self.groups[index].readings.push(reading);
        self.evaluate(index);
        self.settle();
    }

    /// Takes a reading out again.
    pub fn retract(&mut self, entry: u64) {
        for group in &mut self.groups {
            group.readings.retain(|r| r.entry != entry);
        }
        self.groups.retain(|g| !g.readings.is_empty());
        self.complaints.retain(|c| c.entry != entry);
        self.absent.retain(|a| a.0 != entry);
        self.rebuild();
    }

    /// A repair: the faults were found there (and are mended if `done`), or looked for and not there.
    pub fn repair(&mut self, entry: u64, singles: &[usize], found: bool, done: bool) {
        if !found {
            for &s in singles {
                if let Some(h) = self.model.space.singles.get(s) {
                    self.absent.push((entry, h.group.clone()));
                }
            }
            self.weigh();
            return;
        }
        if done {
            self.repaired.push(singles.to_vec());
            self.rebuild();
        }
    }

    /// Everything anew from complaints, readings and repairs.
    fn rebuild(&mut self) {
        self.lay_out();
        self.unlisted.groups.clear();
        self.reference.clear();
        self.levers.clear();
        self.not_examined = 0.0;
        self.hear();
        for index in 0..self.groups.len() {
            self.evaluate(index);
        }
        self.settle();
    }

    /// Likelihoods of group `index` under every candidate.
    fn evaluate(&mut self, index: usize) {
        let model = &self.model;
        let group = &self.groups[index];
        let sound = World::sound(model);
        let plain = Cloud::prior(self.draws.clone(), &sound, self.seed);
        let mut epochs = vec![sound.clone(); self.repaired.len() + 1];
        let (reference, _) = likelihoods(model, &mut epochs, &sound, &plain, group);
        let levers = levers(model, &mut epochs, group);
        self.candidates.par_iter_mut().for_each(|c| {
            if c.cause == Cause::Unlisted {
                return;
            }
            let (l, s) = likelihoods(model, &mut c.worlds, &sound, &c.cloud, group);
            let moved = c.fitted || l.iter().zip(&reference).any(|(x, y)| (x - y).abs() > 0.1);
            if index < c.cloud.groups.len() {
                c.cloud.groups[index] = l;
                c.cloud.soft[index] = s;
                c.moved[index] = moved;
            } else {
                c.cloud.groups.push(l);
                c.cloud.soft.push(s);
                c.moved.push(moved);
            }
        });
        if index < self.reference.len() {
            self.reference[index] = reference;
            self.levers[index] = levers;
        } else {
            self.reference.push(reference);
            self.levers.push(levers);
        }
        self.unlisted.take(model, &self.draws, group, index);
    }

    /// Refits what matters, adds pairs, weighs.
    fn settle(&mut self) {
        self.refit_leaders();
        self.weigh();
        if self.add_pairs() {
            self.refit_leaders();
            self.weigh();
        }
    }

    pub(super) fn log_joint(&self, c: &Candidate) -> f64 {
        let evidence = if c.cause == Cause::Unlisted {
            self.unlisted.log_evidence()
        } else {
            c.cloud.log_evidence()
        };
        c.log_prior + c.log_complaint + evidence + self.log_absent(c)
    }

    /// A look that did not find a fault leaves little of it.
    pub(super) fn log_absent(&self, c: &Candidate) -> f64 {
        let misses = self
            .absent
            .iter()
            .filter(|(_, g)| c.group() == g || c.group().split(" + ").any(|part| part == g))
            .count();
        misses as f64 * ln(0.04)
    }

    fn potential(&self, c: &Candidate) -> f64 {
        if c.cause == Cause::Unlisted {
            return f64::NEG_INFINITY;
        }
        let soft = c.cloud.soft_evidence();
        c.log_prior + c.log_complaint + soft.max(c.cloud.log_evidence()) + self.log_absent(c)
    }

    /// Refits candidates that may matter and have few effective draws.
    fn refit_leaders(&mut self) {
        if self.groups.is_empty() {
            return;
        }
        let potentials: Vec<f64> = self.candidates.iter().map(|c| self.potential(c)).collect();
        let best = potentials.iter().copied().fold(f64::NEG_INFINITY, f64::max);
        let mut chosen: Vec<usize> = (0..self.candidates.len())
            .filter(|&i| potentials[i] > best - FAR && self.candidates[i].cloud.effective() < 24.0)
            .collect();
        chosen.sort_by(|&a, &b| potentials[b].total_cmp(&potentials[a]).then(a.cmp(&b)));
        chosen.truncate(REFITTED);
        let (model, groups, seed) = (&self.model, &self.groups, self.seed);
        let sound = World::sound(model);
        let mut levers: Vec<usize> = self.levers.iter().flatten().copied().collect();
        levers.sort_unstable();
        levers.dedup();
        let fitted: Vec<(usize, Cloud)> = chosen
            .into_par_iter()
            .map(|i| {
                let c = &self.candidates[i];
                let mut worlds = c.worlds.clone();
                (
                    i,
                    refit(
                        model,
                        &mut worlds,
                        &sound,
                        &c.cloud,
                        groups,
                        &levers,
                        REFIT,
                        seed,
                    ),
                )
            })
            .collect();
        for (i, cloud) in fitted {
            let c = &mut self.candidates[i];
            if cloud.effective() >= c.cloud.effective() {
                c.cloud = cloud;
                c.fitted = true;
            }
        }
    }

    /// Probabilities from evidence.
    fn weigh(&mut self) {
        let joint: Vec<f64> = self.candidates.iter().map(|c| self.log_joint(c)).collect();
        let (p, _) = posterior(&vec![0.0; joint.len()], &joint);
        let left = 1.0 - self.not_examined;
        let mut odds = Odds {
            not_examined: self.not_examined,
            ..Odds::default()
        };
        let mut groups: Vec<(String, f64)> = Vec::new();
        for (i, (c, p)) in self.candidates.iter().zip(&p).enumerate() {
            let p = p * left;
            match c.cause {
                Cause::Nothing => odds.nothing_wrong = p,
                Cause::Unlisted => odds.unlisted = p,
                Cause::Faults(_) => {
                    odds.hypotheses.push((i, p));
                    match groups.iter_mut().find(|g| g.0 == c.group()) {
                        Some(g) => g.1 += p,
                        None => groups.push((c.group().to_owned(), p)),
                    }
                }
            }
        }
        odds.hypotheses
            .sort_by(|a, b| b.1.total_cmp(&a.1).then(a.0.cmp(&b.0)));
        groups.sort_by(|a, b| b.1.total_cmp(&a.1).then_with(|| a.0.cmp(&b.0)));
        odds.groups = groups;
        self.odds = odds;
    }
}

impl Candidate {
    pub(super) fn hear(
        &mut self,
        model: &Model,
        complaints: &[Complaint],
        draws: &Draws,
        after_repair: bool,
    ) {
        self.log_complaint = complaints
            .iter()
            .map(|complaint| match self.cause {
                // What was complained of is explained by what was repaired.
                _ if after_repair => 0.0,
                Cause::Unlisted => unlisted_complaint(model, complaint),
                _ => log_probability(
                    model,
                    &mut self.worlds[0],
                    self.hypothesis.as_ref(),
                    complaint,
                    draws,
                    SIGN_DRAWS,
                ),
            })
            .sum();
    }
}
