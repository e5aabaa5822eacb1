//! The readings expected under all hypotheses as one weighted mixture, and the integrand of its information.

use std::collections::BTreeMap;
use std::ops::Range;

use crate::numeric::special::{exp_many, ln};

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
        let on = OnPanel::new(self, here);
        let mut heights = vec![0.0; here.len()];
        rule.iter()
            .map(|&(x, w)| {
                on.heights(middle + half * x, &mut heights);
                w * half * self.integrand(&on, &heights)
            })
            .sum()
    }

    /// Σ_g J_g ln [J_g / (P_g f)], where J_g = P_g f_g and groups with no kernel here have the gross part alone.
    fn integrand(&self, on: &OnPanel, heights: &[f64]) -> f64 {
        let height = |at: &Range<usize>| heights[at.clone()].iter().sum::<f64>();
        let gross = height(&on.gross);
        let (mut sum, mut total) = (0.0, 0.0);
        for run in &on.runs {
            let joint = self.groups[run.group] * gross + height(&run.at);
            total += joint;
            if joint > 0.0 {
                sum += joint * ln(joint / self.groups[run.group]);
            }
        }
        let rest = on.elsewhere * gross;
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

/// Neighbouring kernels of one group.
struct Run {
    group: usize,
    at: Range<usize>,
}

/// The kernels that reach a panel, laid out so that their heights are worked out several at once.
struct OnPanel {
    means: Vec<f64>,
    /// 1 / sd.
    narrowness: Vec<f64>,
    /// Joint weight / (sd √(2π)).
    tops: Vec<f64>,
    runs: Vec<Run>,
    gross: Range<usize>,
    /// Probability of the groups without a kernel here.
    elsewhere: f64,
}

impl OnPanel {
    fn new(mixture: &Mixture, here: &[usize]) -> Self {
        const INV_SQRT_2PI: f64 = 0.398_942_280_401_432_7;
        let kernels = || here.iter().map(|&i| &mixture.bells[i]);
        let mut on = Self {
            means: kernels().map(|k| k.bell.mean).collect(),
            narrowness: kernels().map(|k| 1.0 / k.bell.sd).collect(),
            tops: kernels()
                .map(|k| k.weight * INV_SQRT_2PI / k.bell.sd)
                .collect(),
            runs: Vec::new(),
            gross: 0..0,
            elsewhere: 1.0,
        };
        let mut from = 0;
        for run in here.chunk_by(|&a, &b| mixture.bells[a].group == mixture.bells[b].group) {
            let to = from + run.len();
            match mixture.bells[run[0]].group {
                Some(group) => {
                    on.elsewhere -= mixture.groups[group];
                    on.runs.push(Run {
                        group,
                        at: from..to,
                    });
                }
                None => on.gross = from..to,
            }
            from = to;
        }
        on.elsewhere = on.elsewhere.max(0.0);
        on
    }

    /// Joint density of each kernel at `y`.
    fn heights(&self, y: f64, heights: &mut [f64]) {
        let kernels = self.means.iter().zip(&self.narrowness).zip(&self.tops);
        for (height, ((mean, narrowness), top)) in heights.iter_mut().zip(kernels) {
            let z = (y - mean) * narrowness;
            *height = top * exp_many(-0.5 * z * z);
        }
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
