//! What two readings tell together: with and without load, upstream and downstream.
//!
//! Where an unknown moves both readings alike, neither tells much and their difference tells all. The axis of
//! each reading is cut into cells about as wide as its error, and the table of cell pairs is a discrete
//! outcome. Cutting can only lose information (data processing inequality), so the result is a lower bound.

use crate::numeric::special::{ln, normal_cdf};

use super::information::Shape;
use super::panels::{Bell, panels};

/// One draw of the unknowns and what both readings would be; their errors are independent.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct PairKernel {
    /// Share of the forecast; a forecast's weights sum to one.
    pub weight: f64,
    /// The first reading.
    pub first: Shape,
    /// The second.
    pub second: Shape,
}

/// Width of a cell in standard deviations of the narrowest kernel on it, and reach of a kernel.
const CELL: f64 = 0.75;
const REACH: f64 = 4.0;

/// Information in bits of a pair of readings about the groups; arguments as in `information::Question`.
///
/// With a share ε of readings wrong in themselves, (1 − ε)² of it is left, where such readings are known as such.
pub fn pair(prior: &[f64], group: &[usize], forecasts: &[&[PairKernel]]) -> f64 {
    let total: f64 = prior.iter().sum();
    let count = group.iter().map(|g| g + 1).max().unwrap_or(0);
    if !(total > 0.0 && total.is_finite()) {
        return 0.0;
    }
    let all = || {
        forecasts
            .iter()
            .flat_map(|f| f.iter())
            .filter(|k| k.weight > 0.0)
    };
    let first = Axis::new(all().map(|k| k.first));
    let second = Axis::new(all().map(|k| k.second));
    let mut groups = vec![0.0; count];
    let mut parts: Vec<((usize, usize), usize, f64)> = Vec::new();
    for ((&p, &g), forecast) in prior.iter().zip(group).zip(forecasts) {
        groups[g] += p / total;
        if p <= 0.0 {
            continue;
        }
        for kernel in forecast.iter().filter(|k| k.weight > 0.0) {
            let columns = second.cells(kernel.second);
            for (row, a) in first.cells(kernel.first) {
                let scale = p / total * kernel.weight * a;
                parts.extend(
                    columns
                        .iter()
                        .map(|&(column, b)| ((row, column), g, scale * b)),
                );
            }
        }
    }
    // A stable sort: equal keys are summed in the order of the hypotheses, whatever the machine.
    parts.sort_by_key(|part| (part.0, part.1));
    let nats: f64 = parts
        .chunk_by(|a, b| a.0 == b.0)
        .map(|cell| {
            let (mut sum, mut all) = (0.0, 0.0);
            for part in cell.chunk_by(|a, b| a.1 == b.1) {
                let joint: f64 = part.iter().map(|p| p.2).sum();
                if joint > 0.0 {
                    sum += joint * ln(joint / groups[part[0].1]);
                    all += joint;
                }
            }
            if all > 0.0 { sum - all * ln(all) } else { 0.0 }
        })
        .sum();
    (nats * std::f64::consts::LOG2_E).max(0.0)
}

/// The cells of one reading: between edges, then one for each word.
struct Axis {
    edges: Vec<f64>,
}

impl Axis {
    fn new(shapes: impl Iterator<Item = Shape>) -> Self {
        let bells: Vec<Bell> = shapes
            .filter_map(|shape| match shape {
                Shape::Bell { mean, sd } if mean.is_finite() && sd.is_finite() => {
                    Some(Bell::new(mean, sd))
                }
                _ => None,
            })
            .collect();
        let mut edges = Vec::new();
        panels(&bells, REACH, CELL, |from, to, _| {
            if edges.last() != Some(&from) {
                edges.push(from);
            }
            edges.push(to);
        });
        Self { edges }
    }

    /// The cells that `shape` falls in, each with its probability, summing to one.
    fn cells(&self, shape: Shape) -> Vec<(usize, f64)> {
        let (mean, sd) = match shape {
            Shape::Word(word) => return vec![(self.edges.len() + 1 + word as usize, 1.0)],
            Shape::Bell { mean, sd } if mean.is_finite() && sd.is_finite() => {
                let bell = Bell::new(mean, sd);
                (bell.mean, bell.sd)
            }
            Shape::Bell { .. } => return Vec::new(),
        };
        let start = self.edges.partition_point(|&e| e <= mean - REACH * sd);
        let end = self.edges.partition_point(|&e| e < mean + REACH * sd);
        // The tails beyond the reach go to the outermost cells.
        let mut below = 0.0;
        let mut cells = Vec::with_capacity(end - start + 1);
        for (cell, &edge) in self.edges.iter().enumerate().take(end).skip(start) {
            let p = normal_cdf((edge - mean) / sd);
            cells.push((cell, p - below));
            below = p;
        }
        cells.push((end, 1.0 - below));
        cells
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::numeric::rng::midpoints;
    use crate::numeric::special::normal_quantile;

    fn shared(offset: f64) -> Vec<PairKernel> {
        let draws = midpoints(600);
        let weight = 1.0 / draws.len() as f64;
        draws
            .iter()
            .map(|&u| {
                let theta = 5.0 * normal_quantile(u);
                PairKernel {
                    weight,
                    first: Shape::Bell {
                        mean: theta,
                        sd: 1.0,
                    },
                    second: Shape::Bell {
                        mean: theta + offset,
                        sd: 1.0,
                    },
                }
            })
            .collect()
    }

    #[test]
    fn the_difference_tells_where_neither_reading_does() {
        // Shared nuisance of 5 under two readings of 1, offset 3: 0.531267751143 bit in closed form (Mahalanobis
        // separation 2.142016641886); redrawn for each reading it would be 0.0599.
        let (none, three) = (shared(0.0), shared(3.0));
        let bits = pair(&[0.5, 0.5], &[0, 1], &[&none, &three]);
        assert!(bits < 0.531_267_751_143 && bits > 0.50, "{bits}");
    }

    #[test]
    fn words_and_numbers_go_together() {
        let kernel = |first, second| {
            [PairKernel {
                weight: 1.0,
                first,
                second,
            }]
        };
        let volts = Shape::Bell {
            mean: 230.0,
            sd: 1.0,
        };
        let a = kernel(volts, Shape::Word(0));
        let b = kernel(volts, Shape::Word(1));
        let c = kernel(Shape::Bell { mean: 0.0, sd: 1.0 }, Shape::Word(1));
        let bits = pair(&[0.25, 0.25, 0.5], &[0, 1, 2], &[&a, &b, &c]);
        assert!((bits - 1.5).abs() < 1e-6, "{bits}");
        assert!((pair(&[0.25, 0.25, 0.5], &[0, 0, 1], &[&a, &b, &c]) - 1.0).abs() < 1e-6);
        assert_eq!(pair(&[], &[], &[]), 0.0);
    }
}
