//! Two faults at once: which pairs may reach the odds, and what of them was not examined.

use rayon::prelude::*;

use super::cloud::likelihoods;
use super::state::{BESIDE, Belief, Candidate, Cause};
use super::world::World;
use crate::numeric::special::{exp, ln, log_sum_exp};

/// Pairs added after a reading, at most.
const NEW_PAIRS: usize = 12;

impl Belief {
    /// Adds pairs whose bound may reach the odds; true if any was added.
    pub(super) fn add_pairs(&mut self) -> bool {
        let bounds = self.pair_bounds();
        let total = log_sum_exp(
            &self
                .candidates
                .iter()
                .map(|c| self.log_joint(c))
                .collect::<Vec<_>>(),
        );
        let mut fresh: Vec<(f64, Vec<usize>)> = bounds
            .into_iter()
            .filter(|(_, pair)| {
                !self
                    .candidates
                    .iter()
                    .any(|c| c.cause == Cause::Faults(pair.clone()))
            })
            .collect();
        fresh.sort_by(|a, b| b.0.total_cmp(&a.0).then_with(|| a.1.cmp(&b.1)));
        let worth = fresh
            .iter()
            .take_while(|(b, _)| *b > total + ln(1e-3))
            .count()
            .min(NEW_PAIRS);
        let rest: Vec<f64> = fresh[worth..].iter().map(|f| f.0).collect();
        let left = log_sum_exp(&rest);
        self.not_examined = if left.is_finite() {
            exp(left - log_sum_exp(&[left, total]))
        } else {
            0.0
        };
        let chosen: Vec<Vec<usize>> = fresh.into_iter().take(worth).map(|f| f.1).collect();
        if chosen.is_empty() {
            return false;
        }
        let this = &*self;
        let sound = World::sound(&this.model);
        let made: Vec<Candidate> = chosen
            .into_par_iter()
            .filter_map(|pair| {
                let mut c = this.candidate(Cause::Faults(pair))?;
                c.hear(
                    &this.model,
                    &this.complaints,
                    &this.draws,
                    !this.repaired.is_empty(),
                );
                for group in &this.groups {
                    let (l, s) = likelihoods(&this.model, &mut c.worlds, &sound, &c.cloud, group);
                    c.cloud.groups.push(l);
                    c.cloud.soft.push(s);
                    c.moved.push(true);
                }
                Some(c)
            })
            .collect();
        let any = !made.is_empty();
        self.candidates.extend(made);
        any
    }

    /// Estimates of the log joint of every pair in which the second fault helps: the first fault's own
    /// joint, times the second's presence beside it, times what the second explains better of each
    /// reading that it moves. A second fault that moves no reading is a copy of the first alone.
    ///
    /// It starts from the first's joint evidence, not from a product over readings: readings of one
    /// installation lean on the same unknowns, and a product would count them as strangers.
    fn pair_bounds(&self) -> Vec<(f64, Vec<usize>)> {
        if self.groups.is_empty() || !self.repaired.is_empty() {
            return Vec::new();
        }
        let mean = |g: &Vec<f64>| log_sum_exp(g) - ln(g.len().max(1) as f64);
        struct Single {
            index: usize,
            prior: f64,
            joint: f64,
            mean: Vec<f64>,
            moved: Vec<bool>,
        }
        let singles: Vec<Single> = self
            .candidates
            .iter()
            .filter_map(|c| match &c.cause {
                Cause::Faults(list) if list.len() == 1 => Some(Single {
                    index: list[0],
                    prior: c.log_prior,
                    joint: self.log_joint(c),
                    mean: c.cloud.groups.iter().map(mean).collect(),
                    moved: c.moved.clone(),
                }),
                _ => None,
            })
            .collect();
        let joints: Vec<f64> = self.candidates.iter().map(|c| self.log_joint(c)).collect();
        let floor = log_sum_exp(&joints) + ln(1e-7);
        let beside = |first: &Single, second: &Single| {
            let gain: f64 = (0..first.mean.len())
                .filter(|&g| second.moved[g])
                .map(|g| (second.mean[g] - first.mean[g]).max(0.0))
                .sum();
            first.joint + second.prior + ln(BESIDE) + gain
        };
        let moves = |s: &Single| s.moved.iter().any(|m| *m);
        let mut out = Vec::new();
        for (i, a) in singles.iter().enumerate() {
            for b in &singles[i + 1..] {
                let ab = if moves(b) {
                    beside(a, b)
                } else {
                    f64::NEG_INFINITY
                };
                let ba = if moves(a) {
                    beside(b, a)
                } else {
                    f64::NEG_INFINITY
                };
                let bound = ab.max(ba);
                if bound > floor && self.model.space.compatible(a.index, b.index) {
                    out.push((bound, vec![a.index.min(b.index), a.index.max(b.index)]));
                }
            }
        }
        out
    }
}
