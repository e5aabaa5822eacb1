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

    /// Estimates of the log joint of every pair that moves a reading: of each reading, what
    /// either fault alone explains of it on average.
    fn pair_bounds(&self) -> Vec<(f64, Vec<usize>)> {
        let groups = self.groups.len();
        if groups == 0 || !self.repaired.is_empty() {
            return Vec::new();
        }
        let mean = |g: &[f64]| log_sum_exp(g) - ln(g.len().max(1) as f64);
        let sound: Vec<f64> = self.reference.iter().map(|g| mean(g)).collect();
        struct Single {
            index: usize,
            prior: f64,
            complaint: f64,
            best: Vec<f64>,
            moved: Vec<bool>,
        }
        let singles: Vec<Single> = self
            .candidates
            .iter()
            .filter_map(|c| match &c.cause {
                Cause::Faults(list) if list.len() == 1 => {
                    let tops: Vec<f64> = c.cloud.groups.iter().map(|g| mean(g)).collect();
                    let moved = c.moved.clone();
                    Some(Single {
                        index: list[0],
                        prior: c.log_prior,
                        complaint: c.log_complaint,
                        best: tops,
                        moved,
                    })
                }
                _ => None,
            })
            .collect();
        let floor = log_sum_exp(
            &self
                .candidates
                .iter()
                .map(|c| self.log_joint(c))
                .collect::<Vec<_>>(),
        ) + ln(1e-7);
        let mut out = Vec::new();
        for (i, a) in singles.iter().enumerate() {
            if !a.moved.iter().any(|m| *m) {
                continue;
            }
            for b in &singles[i + 1..] {
                if !b.moved.iter().any(|m| *m) {
                    continue;
                }
                let complaint = log_sum_exp(&[a.complaint, b.complaint]).min(0.0);
                let mut bound = a.prior + b.prior + ln(BESIDE) + complaint;
                if bound < floor - 60.0 {
                    continue;
                }
                bound += (0..groups)
                    .map(|g| match (a.moved[g], b.moved[g]) {
                        (true, true) => a.best[g].max(b.best[g]),
                        (true, false) => a.best[g],
                        (false, true) => b.best[g],
                        (false, false) => sound[g],
                    })
                    .sum::<f64>();
                if bound > floor && self.model.space.compatible(a.index, b.index) {
                    out.push((bound, vec![a.index.min(b.index), a.index.max(b.index)]));
                }
            }
        }
        out
    }
}
