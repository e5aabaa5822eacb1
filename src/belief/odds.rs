//! Bayes' rule on a list of hypotheses, in logarithms, and the uncertainty that is left, in bits.

use crate::numeric::special::{exp, log_sum_exp, log2};

/// Posterior probabilities and the log evidence (natural logarithm of the probability of what was read).
///
/// `log_prior` need not be normalised: its sum is divided out. Where nothing is possible (every product is
/// zero) the posterior is all zeros and the evidence −∞; the caller must ask whether the reading is right.
pub fn posterior(log_prior: &[f64], log_likelihood: &[f64]) -> (Vec<f64>, f64) {
    let joint: Vec<f64> = log_prior
        .iter()
        .zip(log_likelihood)
        .map(|(p, l)| p + l)
        .collect();
    let total = log_sum_exp(&joint);
    if total == f64::NEG_INFINITY {
        return (vec![0.0; joint.len()], total);
    }
    let odds = joint.iter().map(|&j| exp(j - total)).collect();
    (odds, total - log_sum_exp(log_prior))
}

/// Entropy of `probabilities` in bits; zero counts nothing.
pub fn entropy(probabilities: &[f64]) -> f64 {
    probabilities
        .iter()
        .filter(|p| **p > 0.0)
        .map(|&p| -p * log2(p))
        .sum()
}

/// Sums `probabilities` into `groups` repair groups; `group[h]` is the group of hypothesis h.
///
/// What belongs to no group below `groups` is left out.
pub fn by_group(probabilities: &[f64], group: &[usize], groups: usize) -> Vec<f64> {
    let mut sums = vec![0.0; groups];
    for (&p, &g) in probabilities.iter().zip(group) {
        if let Some(sum) = sums.get_mut(g) {
            *sum += p;
        }
    }
    sums
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::numeric::special::ln;
    use proptest::prelude::*;

    #[test]
    fn three_causes_and_one_reading() {
        // Bayes by hand: 0.5·0.1, 0.3·0.4, 0.2·0.4 of 0.25.
        let (odds, evidence) = posterior(&[0.5, 0.3, 0.2].map(ln), &[0.1, 0.4, 0.4].map(ln));
        for (got, want) in odds.iter().zip([0.2, 0.48, 0.32]) {
            assert!((got - want).abs() < 1e-15);
        }
        assert!((evidence - ln(0.25)).abs() < 1e-15);
        assert_eq!(entropy(&[0.25; 4]), 2.0);
        assert_eq!(entropy(&[1.0, 0.0]), 0.0);
        assert_eq!(by_group(&[0.5, 0.25, 0.25], &[1, 0, 1], 2), [0.25, 0.75]);
    }

    #[test]
    fn the_impossible_leaves_no_odds() {
        let (odds, evidence) = posterior(&[0.0], &[f64::NEG_INFINITY]);
        assert_eq!((odds[0], evidence), (0.0, f64::NEG_INFINITY));
    }

    proptest! {
        #[test]
        fn scale_of_the_prior_does_not_matter(
            terms in prop::collection::vec((-30.0..0.0_f64, -900.0..0.0_f64), 1..20), shift in -500.0..500.0_f64,
        ) {
            let (prior, likelihood): (Vec<f64>, Vec<f64>) = terms.into_iter().unzip();
            let (odds, evidence) = posterior(&prior, &likelihood);
            let moved: Vec<f64> = prior.iter().map(|p| p + shift).collect();
            let (same, again) = posterior(&moved, &likelihood);
            prop_assert!((evidence - again).abs() < 1e-9);
            prop_assert!((odds.iter().sum::<f64>() - 1.0).abs() < 1e-12);
            prop_assert!(odds.iter().zip(&same).all(|(a, b)| (a - b).abs() < 1e-9));
        }
    }
}
