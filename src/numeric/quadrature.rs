//! Gauss–Legendre quadrature: nodes and weights of any order.

use super::special::cos;

/// Nodes and weights on (−1, 1) of the rule that is exact up to degree 2`n` − 1, in ascending order.
///
/// Newton's method on the Legendre polynomial from Tricomi's estimate (Abramowitz & Stegun 25.4.29, 22.16.6).
pub fn gauss_legendre(n: usize) -> Vec<(f64, f64)> {
    let order = n as f64;
    (0..n)
        .rev()
        .map(|i| {
            let mut x = cos(std::f64::consts::PI * (i as f64 + 0.75) / (order + 0.5));
            let mut slope = 1.0;
            for _ in 0..8 {
                let (value, derivative) = legendre(n, x);
                slope = derivative;
                x -= value / derivative;
            }
            (x, 2.0 / ((1.0 - x * x) * slope * slope))
        })
        .collect()
}

/// Legendre polynomial of degree `n` ≥ 1 and its derivative at `x`, |x| < 1.
fn legendre(n: usize, x: f64) -> (f64, f64) {
    let (mut before, mut value) = (1.0, x);
    for k in 2..=n {
        let k = k as f64;
        let next = ((2.0 * k - 1.0) * x * value - (k - 1.0) * before) / k;
        before = value;
        value = next;
    }
    (value, n as f64 * (before - x * value) / (1.0 - x * x))
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn exact_up_to_twice_its_order() {
        for n in [1, 2, 4, 5, 16] {
            let rule = gauss_legendre(n);
            for power in 0..2 * n {
                let sum: f64 = rule.iter().map(|(x, w)| w * x.powi(power as i32)).sum();
                let exact = if power % 2 == 0 {
                    2.0 / (power as f64 + 1.0)
                } else {
                    0.0
                };
                assert!(
                    (sum - exact).abs() < 1e-14,
                    "order {n}, power {power}: {sum}"
                );
            }
            assert!(rule.windows(2).all(|pair| pair[0].0 < pair[1].0));
        }
    }
}
