//! What the odds rest on: bits of each reading, slips, and whether one reading carries the answer.

use super::state::{Belief, Candidate, Cause};
use crate::numeric::special::{exp, ln, log_sum_exp};

impl Belief {
    /// For a candidate, how likely each group of readings is a slip: last entry, test, place, probability.
    pub fn slips(&self, candidate: usize) -> Vec<(u64, String, String, f64)> {
        let c = &self.candidates[candidate];
        let weights = c.cloud.weights();
        let mut out = Vec::new();
        for (g, group) in self.groups.iter().enumerate() {
            let (Some(last), Some(lik)) = (group.readings.last(), c.cloud.groups.get(g)) else {
                continue;
            };
            let Some(row) = self.model.knowledge.error_of(&last.hookup) else {
                continue;
            };
            // Of the mixture ln[(1−ε)c + εs], the slip part is at least ε·(gross density).
            let floor: f64 = group
                .readings
                .iter()
                .map(|r| ln(row.slip.max(1e-9)) + super::sight::gross(row, &r.parsed))
                .sum();
            let share: f64 = weights
                .iter()
                .zip(lik)
                .map(|(w, l)| w * exp((floor - l).min(0.0)))
                .sum();
            out.push((last.entry, last.test.clone(), last.at.clone(), share));
        }
        out
    }

    /// Whether a group leads still when any one group of readings is left out.
    pub fn survives_any_one_left_out(&self, group: &str) -> bool {
        (0..self.groups.len()).all(|g| {
            let mut mass: Vec<(&str, f64)> = Vec::new();
            for c in &self.candidates {
                let base = c.log_prior + c.log_complaint + self.log_absent(c);
                let evidence = if c.cause == Cause::Unlisted {
                    self.unlisted.log_evidence_without(g)
                } else {
                    c.cloud.log_evidence_without(g)
                };
                let joint = base + evidence;
                match mass.iter_mut().find(|m| m.0 == c.group()) {
                    Some(m) => m.1 = log_sum_exp(&[m.1, joint]),
                    None => mass.push((c.group(), joint)),
                }
            }
            mass.iter()
                .max_by(|a, b| a.1.total_cmp(&b.1))
                .is_some_and(|m| m.0 == group)
        })
    }

    /// What each group of readings says for a candidate against the rest: last entry, test, place, bits.
    pub fn evidence(&self, candidate: usize) -> Vec<(u64, String, String, f64)> {
        let mut out = Vec::new();
        for (g, group) in self.groups.iter().enumerate() {
            let Some(last) = group.readings.last() else {
                continue;
            };
            let without = |c: &Candidate| -> (f64, f64) {
                if c.cause == Cause::Unlisted {
                    return (
                        self.unlisted.log_evidence(),
                        self.unlisted.log_evidence_without(g),
                    );
                }
                (c.cloud.log_evidence(), c.cloud.log_evidence_without(g))
            };
            let (mut ours, mut rest_full, mut rest_less) = (0.0, Vec::new(), Vec::new());
            for (i, c) in self.candidates.iter().enumerate() {
                let base = c.log_prior + c.log_complaint + self.log_absent(c);
                let (full, less) = without(c);
                if i == candidate {
                    ours = full - less;
                } else {
                    rest_full.push(base + full);
                    rest_less.push(base + less);
                }
            }
            let bits = (ours - (log_sum_exp(&rest_full) - log_sum_exp(&rest_less)))
                / std::f64::consts::LN_2;
            out.push((last.entry, last.test.clone(), last.at.clone(), bits));
        }
        out
    }
}
