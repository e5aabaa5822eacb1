//! The readings expected under all hypotheses as one weighted mixture, and the integrand of its information.

use std::collections::BTreeMap;

use crate::numeric::special::{LN_SQRT_2PI, exp, ln};

use super::information::{Question, Shape};
use super::panels::Bell;

/// How finely the integral is done.
pub(super) struct Fineness {
    /// A kernel ends this many standard deviations from its mean.
    pub(super) reach: f64,
    /// A panel is at most this many standard deviations of the narrowest kernel on it.
    pub(super) panel: f64,
    /// Quadrature nodes on a panel.
    pub(super) nodes: usize,
    /// Kernels of a group nearer than this many standard deviations, and as wide to 3 %, are joined, mean and
    /// variance kept; wider unlike ones would lose their tails.
    pub(super) join: f64,
    /// Panels are halved until this changes nothing by more, in nat.
    pub(super) tolerance: Option<f64>,
}

/// A kernel with its joint weight; a group of `None` belongs to all (a gross error).
pub(super) struct Weighted {
    pub(super) group: Option<usize>,
    weight: f64,
    pub(super) bell: Bell,
}

/// All kernels of a question, weighted by the odds and sorted by group.
pub(super) struct Mixture {
    /// Probability of each group.
    groups: Vec<f64>,
    pub(super) bells: Vec<Weighted>,
    /// Words: joint weight by group; the gross weight last.
    words: BTreeMap<u32, Vec<f64>>,
}

impl Mixture {
    pub(super) fn new(question: &Question, fineness: &Fineness) -> Self {
        let total: f64 = question.prior.iter().sum();
        let count = question.group.iter().map(|g| g + 1).max().unwrap_or(0);
        let share = question.gross.map_or(0.0, |g| g.share);
        let mut mixture = Self {
            groups: vec![0.0; count],
            bells: Vec::new(),
            words: BTreeMap::new(),
        };
        if !(total > 0.0 && total.is_finite()) {
            return mixture;
        }
        let hypotheses = question
            .prior
            .iter()
            .zip(question.group)
            .zip(question.forecasts);
        for ((&p, &group), forecast) in hypotheses {
            mixture.groups[group] += p / total;
            for kernel in forecast.iter() {
                mixture.add(
                    Some(group),
                    p / total * (1.0 - share) * kernel.weight,
                    kernel.shape,
                );
            }
        }
        mixture.join(fineness.join);
        if let Some(gross) = question.gross {
            for kernel in gross.forecast {
                mixture.add(None, share * kernel.weight, kernel.shape);
            }
        }
        mixture
    }

    fn add(&mut self, group: Option<usize>, weight: f64, shape: Shape) {
        if weight <= 0.0 {
            return;
        }
        match shape {
            Shape::Bell { mean, sd } if mean.is_finite() && sd.is_finite() => {
                self.bells.push(Weighted {
                    group,
                    weight,
                    bell: Bell::new(mean, sd),
                });
            }
            Shape::Bell { .. } => {}
            Shape::Word(word) => {
                let last = self.groups.len();
                let row = self
                    .words
                    .entry(word)
                    .or_insert_with(|| vec![0.0; last + 1]);
                row[group.unwrap_or(last)] += weight;
            }
        }
    }

    /// Sorts by group and mean, and joins neighbours closer than `within` standard deviations.
    fn join(&mut self, within: f64) {
        self.bells.sort_by(|a, b| {
            a.group
                .cmp(&b.group)
                .then(a.bell.mean.total_cmp(&b.bell.mean))
        });
        if within <= 0.0 {
            return;
        }
        let mut joined: Vec<Weighted> = Vec::new();
        // Where the last joined kernel began: it may not creep along a long row of neighbours.
        let mut start = 0.0;
        for next in std::mem::take(&mut self.bells) {
            match joined.last_mut() {
                Some(last)
                    if last.group == next.group
                        && next.bell.mean - start < within * next.bell.sd.min(last.bell.sd)
                        && (next.bell.sd / last.bell.sd - 1.0).abs() < 0.03 =>
                {
                    let sum = last.weight + next.weight;
                    let (a, b) = (last.weight / sum, next.weight / sum);
                    let apart = next.bell.mean - last.bell.mean;
                    let variance = a * last.bell.sd * last.bell.sd
                        + b * next.bell.sd * next.bell.sd
                        + a * b * apart * apart;
                    last.bell = Bell::new(last.bell.mean + b * apart, variance.sqrt());
                    last.weight = sum;
                }
                _ => {
                    start = next.bell.mean;
                    joined.push(next);
                }
            }
        }
        self.bells = joined;
    }

    /// Information of the words, nat.
    pub(super) fn words(&self) -> f64 {
        let last = self.groups.len();
        self.words
            .values()
            .map(|row| {
                let joint: Vec<f64> = (0..last)
                    .map(|g| row[g] + self.groups[g] * row[last])
                    .collect();
                told(&joint, &self.groups)
            })
            .sum()
    }

    /// Integral over one panel, nat; `here` are the kernels that reach it, sorted by group.
    pub(super) fn panel(&self, from: f64, to: f64, here: &[usize], rule: &[(f64, f64)]) -> f64 {
        let half = 0.5 * (to - from);
        let middle = 0.5 * (to + from);
        rule.iter()
            .map(|&(x, w)| w * half * self.integrand(middle + half * x, here))
            .sum()
    }

    /// Σ_g J_g ln [J_g / (P_g f)] at `y`, where J_g = P_g f_g and groups with no kernel here have the gross part alone.
    fn integrand(&self, y: f64, here: &[usize]) -> f64 {
        let (mut sum, mut total, mut reached) = (0.0, 0.0, 0.0);
        // Gross kernels follow the others, so their density is summed first.
        let gross: f64 = here
            .iter()
            .rev()
            .map(|&i| &self.bells[i])
            .take_while(|b| b.group.is_none())
            .map(|b| b.weight * b.bell.density(y))
            .sum();
        let mut at = 0;
        while let Some(group) = here.get(at).and_then(|&i| self.bells[i].group) {
            let mut joint = self.groups[group] * gross;
            while let Some(kernel) = here.get(at).map(|&i| &self.bells[i]) {
                if kernel.group != Some(group) {
                    break;
                }
                joint += kernel.weight * kernel.bell.density(y);
                at += 1;
            }
            reached += self.groups[group];
            total += joint;
            if joint > 0.0 {
                sum += joint * ln(joint / self.groups[group]);
            }
        }
        let rest = (1.0 - reached).max(0.0) * gross;
        total += rest;
        if rest > 0.0 {
            sum += rest * ln(gross);
        }
        if total > 0.0 {
            sum - total * ln(total)
        } else {
            0.0
        }
    }

    /// Halves a panel until its integral stands still.
    pub(super) fn refine(
        &self,
        (from, to): (f64, f64),
        here: &[usize],
        rule: &[(f64, f64)],
        whole: f64,
        tolerance: f64,
        depth: usize,
    ) -> f64 {
        let middle = 0.5 * (from + to);
        let left = self.panel(from, middle, here, rule);
        let right = self.panel(middle, to, here, rule);
        if depth == 0 || (left + right - whole).abs() <= tolerance {
            return left + right;
        }
        self.refine((from, middle), here, rule, left, tolerance, depth - 1)
            + self.refine((middle, to), here, rule, right, tolerance, depth - 1)
    }
}

impl Bell {
    /// Density at `y`.
    fn density(&self, y: f64) -> f64 {
        let z = (y - self.mean) / self.sd;
        exp(-0.5 * z * z - LN_SQRT_2PI) / self.sd
    }
}

/// Σ J ln [J / (P Σ J)] of one outcome, nat: `joint[g]` = P(group g and this outcome).
fn told(joint: &[f64], groups: &[f64]) -> f64 {
    let total: f64 = joint.iter().sum();
    joint
        .iter()
        .zip(groups)
        .filter(|(j, p)| **j > 0.0 && **p > 0.0)
        .map(|(&j, &p)| j * ln(j / (p * total)))
        .sum()
}
