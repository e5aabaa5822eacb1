//! The order in which to repair when no more checks pay: probability over minutes, highest first.

/// Candidates in the order that costs least in expectation: p / minutes descending (Smith's rule, 1956), ties as given.
///
/// A repair that takes no time goes first.
pub fn repair_order(p: &[f64], minutes: &[f64]) -> Vec<usize> {
    let mut order: Vec<usize> = (0..p.len().min(minutes.len())).collect();
    let rank = |i: usize| {
        if minutes[i] > 0.0 {
            p[i] / minutes[i]
        } else {
            f64::INFINITY
        }
    };
    order.sort_by(|&a, &b| rank(b).total_cmp(&rank(a)));
    order
}

/// Expected minutes of repairing in [`repair_order`], each candidate tried until the fault is gone.
///
/// `p[i]` is the probability that repair i alone cures, `minutes[i]` its time with its re-test. What is left of
/// the probability, 1 − Σp, costs all of them and `last_resort` minutes more.
pub fn repair_order_cost(p: &[f64], minutes: &[f64], last_resort: f64) -> f64 {
    let mut left = 1.0;
    let mut cost = 0.0;
    for i in repair_order(p, minutes) {
        cost += left * minutes[i];
        left = f64::max(left - p[i], 0.0);
    }
    cost + left * last_resort
}

#[cfg(test)]
mod tests {
    use super::*;
    use proptest::prelude::*;

    #[test]
    fn by_hand() {
        // 0.6 in 10 min before 0.4 in 20 min: 10 + 0.4 · 20.
        assert!((repair_order_cost(&[0.4, 0.6], &[20.0, 10.0], 0.0) - 18.0).abs() < 1e-12);
        assert!((repair_order_cost(&[0.5], &[10.0], 100.0) - 60.0).abs() < 1e-12);
        assert_eq!(repair_order(&[0.1, 0.0, 0.2], &[1.0, 0.0, 1.0]), [1, 2, 0]);
    }

    proptest! {
        #[test]
        fn no_swap_of_neighbours_is_better(
            items in prop::collection::vec((0.01..1.0_f64, 1.0..60.0_f64), 1..8), extra in 0.0..1.0_f64,
        ) {
            let total: f64 = items.iter().map(|i| i.0).sum::<f64>() + extra;
            let p: Vec<f64> = items.iter().map(|i| i.0 / total).collect();
            let minutes: Vec<f64> = items.iter().map(|i| i.1).collect();
            let cost = |order: &[usize]| {
                let (mut left, mut sum) = (1.0, 0.0);
                for &i in order {
                    sum += left * minutes[i];
                    left -= p[i];
                }
                sum + left * 200.0
            };
            let best = repair_order_cost(&p, &minutes, 200.0);
            let order = repair_order(&p, &minutes);
            prop_assert!((cost(&order) - best).abs() < 1e-9);
            for i in 1..order.len() {
                let mut other = order.clone();
                other.swap(i - 1, i);
                prop_assert!(cost(&other) >= best - 1e-9);
            }
        }
    }
}
