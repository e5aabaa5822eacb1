//! Statistics of weighted draws: moments, quantiles, effective size, tail diagnosis, resampling, intervals.

use super::rng::Stream;
use super::special::{exp, exp_m1, ln, ln_1p, log_sum_exp, normal_quantile};

/// Normal weights of log weights, summing to one, with the logarithm of their sum.
///
/// Where all are −∞ the weights are zero and the sum −∞.
pub fn normalise(log_weights: &[f64]) -> (Vec<f64>, f64) {
    let total = log_sum_exp(log_weights);
    if !total.is_finite() {
        return (vec![0.0; log_weights.len()], total);
    }
    (log_weights.iter().map(|&w| exp(w - total)).collect(), total)
}

/// Mean of `values` under `weights` (of any sum); NaN where they sum to nothing.
pub fn weighted_mean(values: &[f64], weights: &[f64]) -> f64 {
    let total: f64 = weights.iter().sum();
    values.iter().zip(weights).map(|(v, w)| v * w).sum::<f64>() / total
}

/// Variance of `values` under `weights` as a distribution (no small-sample correction).
pub fn weighted_variance(values: &[f64], weights: &[f64]) -> f64 {
    let mean = weighted_mean(values, weights);
    let total: f64 = weights.iter().sum();
    values
        .iter()
        .zip(weights)
        .map(|(v, w)| w * (v - mean) * (v - mean))
        .sum::<f64>()
        / total
}

/// Quantiles of weighted values at the probabilities `at`, each 0..1.
///
/// The distribution function rises linearly through the middle of each value's own weight, so equal
/// weights give Hazen's quantiles. Empty in, NaN out.
pub fn weighted_quantiles(values: &[f64], weights: &[f64], at: &[f64]) -> Vec<f64> {
    let mut order: Vec<(f64, f64)> = values
        .iter()
        .copied()
        .zip(weights.iter().copied())
        .filter(|(_, w)| *w > 0.0)
        .collect();
    order.sort_by(|a, b| a.0.total_cmp(&b.0));
    let total: f64 = order.iter().map(|(_, w)| w).sum();
    let mut below = 0.0;
    let knots: Vec<(f64, f64)> = order
        .iter()
        .map(|&(value, weight)| {
            below += weight;
            ((below - 0.5 * weight) / total, value)
        })
        .collect();
    at.iter().map(|&p| interpolate(&knots, p)).collect()
}

/// Value at `x` of the polygon through `knots` (ascending), flat beyond its ends.
fn interpolate(knots: &[(f64, f64)], x: f64) -> f64 {
    let next = knots.partition_point(|k| k.0 < x);
    match (
        next.checked_sub(1).and_then(|i| knots.get(i)),
        knots.get(next),
    ) {
        (Some(&(xa, ya)), Some(&(xb, yb))) if xb > xa && ya != yb => {
            ya + (yb - ya) * (x - xa) / (xb - xa)
        }
        (_, Some(&(_, y))) | (Some(&(_, y)), None) => y,
        (None, None) => f64::NAN,
    }
}

/// Effective number of draws, (Σw)² / Σw²; 0 where all weights are zero.
///
/// Blind to modes that no draw reached: see [`Psis`].
pub fn effective_size(weights: &[f64]) -> f64 {
    let sum: f64 = weights.iter().sum();
    let squares: f64 = weights.iter().map(|w| w * w).sum();
    if squares > 0.0 {
        sum * sum / squares
    } else {
        0.0
    }
}

/// Standard error of a log evidence estimated by the mean of importance weights: √(1/ESS − 1/N) nat.
pub fn log_evidence_error(weights: &[f64]) -> f64 {
    let size = effective_size(weights);
    if size > 0.0 {
        (1.0 / size - 1.0 / weights.len() as f64).max(0.0).sqrt()
    } else {
        f64::INFINITY
    }
}

/// Pareto-smoothed importance weights and what their tail says.
#[derive(Clone, Debug, PartialEq)]
pub struct Psis {
    /// Smoothed log weights, in the order given, not normalised.
    pub log_weights: Vec<f64>,
    /// Shape of the fitted tail: above min(1 − 1/log₁₀ N, 0.7) the estimate is not to be trusted.
    /// −∞ where the tail has no spread; +∞ where there are too few draws to tell (below 25).
    pub k_hat: f64,
}

impl Psis {
    /// Pareto-smoothed importance sampling (Vehtari, Simpson, Gelman, Yao & Gabry 2024, JMLR 25:72).
    ///
    /// The largest min(N/5, 3√N) ratios are replaced by the expected order statistics of a generalised
    /// Pareto fitted to them (Zhang & Stephens 2009), none above the largest raw ratio.
    pub fn new(log_ratios: &[f64]) -> Self {
        let n = log_ratios.len();
        let mut log_weights = log_ratios.to_vec();
        let tail = (0.2 * n as f64).min(3.0 * (n as f64).sqrt()).ceil() as usize;
        if tail < 5 {
            return Self {
                log_weights,
                k_hat: f64::INFINITY,
            };
        }
        let mut order: Vec<usize> = (0..n).collect();
        order.sort_by(|&a, &b| log_ratios[a].total_cmp(&log_ratios[b]));
        let top = log_ratios[order[n - 1]];
        let cut = exp(log_ratios[order[n - tail - 1]] - top);
        let excess: Vec<f64> = order[n - tail..]
            .iter()
            .map(|&i| exp(log_ratios[i] - top) - cut)
            .collect();
        if !top.is_finite() || excess[tail - 1] <= f64::EPSILON || excess[tail / 4] <= 0.0 {
            let k_hat = if top.is_finite() && excess[0] >= -f64::EPSILON && cut > 0.0 {
                f64::NEG_INFINITY
            } else {
                f64::INFINITY
            };
            return Self { log_weights, k_hat };
        }
        let (k_hat, scale) = fit_pareto(&excess);
        for (rank, &index) in order[n - tail..].iter().enumerate() {
            let p = (rank as f64 + 0.5) / tail as f64;
            let smooth = cut + pareto_quantile(p, k_hat, scale);
            log_weights[index] = ln(smooth).min(0.0) + top;
        }
        Self { log_weights, k_hat }
    }

    /// Whether an average over these draws converges well enough for their number (ibid., section 3).
    pub fn trustworthy(&self) -> bool {
        let n = self.log_weights.len() as f64;
        self.k_hat < (1.0 - std::f64::consts::LN_10 / ln(n)).min(0.7)
    }
}

/// Shape and scale of a generalised Pareto fitted to ascending excesses.
///
/// Zhang & Stephens 2009 (Technometrics 51:316), the shape drawn towards 0.5 with the weight of ten
/// observations (Vehtari et al. 2024, appendix G).
fn fit_pareto(excess: &[f64]) -> (f64, f64) {
    const PRIOR: f64 = 3.0;
    let n = excess.len() as f64;
    let points = 30 + n.sqrt() as usize;
    let quartile = excess[((n / 4.0 + 0.5) as usize).max(1) - 1];
    let largest = excess[excess.len() - 1];
    let shape = |theta: f64| excess.iter().map(|x| ln_1p(-theta * x)).sum::<f64>() / n;
    let grid: Vec<(f64, f64)> = (1..=points)
        .map(|j| {
            let theta = 1.0 / largest
                + (1.0 - (points as f64 / (j as f64 - 0.5)).sqrt()) / PRIOR / quartile;
            let k = shape(theta);
            (theta, n * (ln(-theta / k) - k - 1.0))
        })
        .filter(|(_, likelihood)| likelihood.is_finite())
        .collect();
    let (weights, _) = normalise(&grid.iter().map(|g| g.1).collect::<Vec<_>>());
    let theta: f64 = grid.iter().zip(&weights).map(|(g, w)| g.0 * w).sum();
    let raw = shape(theta);
    ((raw * n + 5.0) / (n + 10.0), -raw / theta)
}

/// Quantile of the generalised Pareto above zero.
fn pareto_quantile(p: f64, k: f64, scale: f64) -> f64 {
    let log = -ln_1p(-p);
    if k.abs() < 1e-12 {
        scale * log
    } else {
        scale * exp_m1(k * log) / k
    }
}

/// Systematic resampling: `n` ancestors in order, each index i taken ⌊n wᵢ⌋ or ⌈n wᵢ⌉ times (`weights` of any
/// sum, `u` uniform in (0, 1)). Empty where the weights sum to nothing.
pub fn systematic(weights: &[f64], n: usize, u: f64) -> Vec<usize> {
    let total: f64 = weights.iter().sum();
    if !(total > 0.0 && total.is_finite()) {
        return Vec::new();
    }
    let mut chosen = Vec::with_capacity(n);
    let mut reached = 0.0;
    let mut last = 0;
    for (index, &weight) in weights.iter().enumerate() {
        reached += weight;
        if weight > 0.0 {
            last = index;
        }
        while chosen.len() < n && (chosen.len() as f64 + u) * total < reached * n as f64 {
            chosen.push(index);
        }
    }
    // Rounding of the running sum may leave the last place unfilled.
    chosen.resize(n, last);
    chosen
}

/// Wilson's interval for a probability from `successes` in `trials`, at confidence `level` (0.95).
///
/// Wilson 1927; (0, 1) for no trials.
pub fn wilson(successes: usize, trials: usize, level: f64) -> (f64, f64) {
    if trials == 0 {
        return (0.0, 1.0);
    }
    let n = trials as f64;
    let p = successes as f64 / n;
    let z = normal_quantile(0.5 + 0.5 * level);
    let centre = p + z * z / (2.0 * n);
    let half = z * (p * (1.0 - p) / n + z * z / (4.0 * n * n)).sqrt();
    let scale = 1.0 + z * z / n;
    (
        ((centre - half) / scale).max(0.0),
        ((centre + half) / scale).min(1.0),
    )
}

/// Percentile bootstrap interval (Efron 1979) of `statistic` over `values`, at confidence `level`.
///
/// Paired data: let a value be the pair. (NaN, NaN) of nothing.
pub fn bootstrap<T: Clone>(
    values: &[T],
    statistic: impl Fn(&[T]) -> f64,
    resamples: usize,
    level: f64,
    stream: &mut Stream,
) -> (f64, f64) {
    if values.is_empty() || resamples == 0 {
        return (f64::NAN, f64::NAN);
    }
    let estimates: Vec<f64> = (0..resamples)
        .map(|_| {
            let sample: Vec<T> = values
                .iter()
                .map(|_| values[stream.below(values.len())].clone())
                .collect();
            statistic(&sample)
        })
        .collect();
    let ends = [0.5 - 0.5 * level, 0.5 + 0.5 * level];
    let bounds = weighted_quantiles(&estimates, &vec![1.0; resamples], &ends);
    (bounds[0], bounds[1])
}

#[cfg(test)]
mod tests {
    use super::*;
    use proptest::prelude::*;

    #[test]
    fn quantiles_of_equal_and_unequal_weights() {
        let values = [3.0, 1.0, 2.0, 4.0];
        assert_eq!(
            weighted_quantiles(&values, &[1.0; 4], &[0.5, 0.0, 1.0]),
            [2.5, 1.0, 4.0]
        );
        assert_eq!(
            weighted_quantiles(&values, &[0.0, 1.0, 0.0, 0.0], &[0.3]),
            [1.0]
        );
        assert!(weighted_quantiles(&[], &[], &[0.5])[0].is_nan());
        // Infinite ohms beside a number: no infinity less infinity.
        let open = [f64::INFINITY, f64::INFINITY, 2.0];
        assert_eq!(
            weighted_quantiles(&open, &[1.0; 3], &[0.9])[0],
            f64::INFINITY
        );
    }

    #[test]
    fn effective_size_counts_equals_and_sees_one() {
        assert_eq!(effective_size(&[0.25; 5]), 5.0);
        assert_eq!(effective_size(&[1.0, 0.0, 0.0]), 1.0);
        assert_eq!(effective_size(&[0.0; 3]), 0.0);
        assert_eq!(log_evidence_error(&[0.25; 5]), 0.0);
    }

    #[test]
    fn the_tail_shape_is_found() {
        // Ratios u^(−k) of uniform u have a Pareto tail of shape k.
        for (k, trusted) in [(0.2, true), (1.2, false)] {
            let ratios: Vec<f64> = crate::numeric::rng::midpoints(4000)
                .iter()
                .map(|u| -k * ln(*u))
                .collect();
            let psis = Psis::new(&ratios);
            assert!((psis.k_hat - k).abs() < 0.1, "{} for {k}", psis.k_hat);
            assert_eq!(psis.trustworthy(), trusted);
        }
        assert_eq!(Psis::new(&[0.0; 100]).k_hat, f64::NEG_INFINITY);
        assert_eq!(Psis::new(&[0.0; 10]).k_hat, f64::INFINITY);
        let mut one = vec![-900.0; 100];
        one[3] = 0.0;
        assert!(!Psis::new(&one).trustworthy());
    }

    #[test]
    fn wilson_by_hand() {
        // 9 of 10 at 95 %: 0.5958..0.9821 (Agresti & Coull 1998 give the formula).
        let (low, high) = wilson(9, 10, 0.95);
        assert!(
            (low - 0.595_850).abs() < 1e-5 && (high - 0.982_124).abs() < 1e-5,
            "{low} {high}"
        );
        assert_eq!(wilson(0, 0, 0.95), (0.0, 1.0));
        assert!(wilson(0, 5, 0.95).0 < 1e-15);
    }

    #[test]
    fn bootstrap_covers_the_mean() {
        let values: Vec<f64> = crate::numeric::rng::midpoints(100);
        let mean = |v: &[f64]| v.iter().sum::<f64>() / v.len() as f64;
        let (low, high) = bootstrap(
            &values,
            mean,
            2000,
            0.95,
            &mut Stream::new(1, "bootstrap", 0),
        );
        // ±1.96 × 0.2887 / √100.
        assert!(
            (low - 0.4434).abs() < 0.01 && (high - 0.5566).abs() < 0.01,
            "{low} {high}"
        );
    }

    proptest! {
        #[test]
        fn systematic_takes_floor_or_ceiling(
            weights in prop::collection::vec(0.0..1.0_f64, 1..30), n in 1_usize..200, u in 0.001..0.999_f64,
        ) {
            let total: f64 = weights.iter().sum();
            prop_assume!(total > 1e-3);
            let chosen = systematic(&weights, n, u);
            prop_assert_eq!(chosen.len(), n);
            for (index, weight) in weights.iter().enumerate() {
                let count = chosen.iter().filter(|&&c| c == index).count() as f64;
                let expected = weight / total * n as f64;
                prop_assert!((count - expected).abs() < 1.0 + 1e-9);
            }
        }

        #[test]
        fn resampling_keeps_weights_in_expectation(weights in prop::collection::vec(0.01..1.0_f64, 2..8)) {
            // Averaged over the offset u, the counts are n w exactly.
            let n = 7;
            let total: f64 = weights.iter().sum();
            let mut counts = vec![0.0; weights.len()];
            let offsets = crate::numeric::rng::midpoints(2000);
            for &u in &offsets {
                systematic(&weights, n, u).iter().for_each(|&i| counts[i] += 1.0 / offsets.len() as f64);
            }
            for (count, weight) in counts.iter().zip(&weights) {
                prop_assert!((count - weight / total * n as f64).abs() < 2e-3);
            }
        }

        #[test]
        fn smoothing_leaves_the_bulk_alone(mut ratios in prop::collection::vec(-5.0..5.0_f64, 100..300)) {
            ratios.sort_by(f64::total_cmp);
            let psis = Psis::new(&ratios);
            prop_assert_eq!(&psis.log_weights[..70], &ratios[..70]);
            let top = ratios[ratios.len() - 1];
            prop_assert!(psis.log_weights.iter().all(|w| *w <= top + 1e-12));
        }
    }
}
