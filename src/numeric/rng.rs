//! Random streams labelled by purpose, so that one part's draws never shift another's.
//!
//! A stream is Pcg64 (PCG XSL-RR 128/64, O'Neill 2014) whose state and increment are the SHA-256 of seed,
//! counter and purpose. Normal draws invert the distribution function: one uniform, one normal, always.

use rand_core::Rng;
use rand_pcg::Pcg64;
use sha2::{Digest, Sha256};

use super::special::normal_quantile;

/// A reproducible stream of random numbers.
#[derive(Clone, Debug)]
pub struct Stream {
    generator: Pcg64,
}

impl Stream {
    /// The stream of `purpose` number `counter` under `seed`; equal arguments give equal streams for ever.
    pub fn new(seed: u64, purpose: &str, counter: u64) -> Self {
        let mut hash = Sha256::new();
        hash.update(seed.to_le_bytes());
        hash.update(counter.to_le_bytes());
        hash.update(purpose.as_bytes());
        let digest = hash.finalize();
        let (mut state, mut increment) = ([0; 16], [0; 16]);
        state.copy_from_slice(&digest[..16]);
        increment.copy_from_slice(&digest[16..]);
        Self {
            generator: Pcg64::new(u128::from_le_bytes(state), u128::from_le_bytes(increment)),
        }
    }

    /// Sixty-four random bits.
    pub fn bits(&mut self) -> u64 {
        self.generator.next_u64()
    }

    /// Uniform strictly inside (0, 1): the centre of one of 2⁵² equal cells, so that no quantile is infinite.
    pub fn uniform01(&mut self) -> f64 {
        const CELL: f64 = 1.0 / (1_u64 << 53) as f64;
        // An odd number of 2⁻⁵³: 53 significant bits, never 0 and never 1.
        ((self.bits() >> 12) * 2 + 1) as f64 * CELL
    }

    /// Uniform between `low` and `high`.
    pub fn uniform(&mut self, low: f64, high: f64) -> f64 {
        low + (high - low) * self.uniform01()
    }

    /// Standard normal.
    pub fn normal(&mut self) -> f64 {
        normal_quantile(self.uniform01())
    }

    /// True with probability `p`.
    pub fn chance(&mut self, p: f64) -> bool {
        self.uniform01() < p
    }

    /// Whole number below `n`, all equally likely (Lemire 2019, without the last-bit rejection: bias below
    /// n / 2⁶⁴); 0 for `n` = 0.
    pub fn below(&mut self, n: usize) -> usize {
        ((u128::from(self.bits()) * n as u128) >> 64) as usize
    }

    /// Index drawn in proportion to `weights` (none negative); `None` where they sum to nothing or to no number.
    pub fn categorical(&mut self, weights: &[f64]) -> Option<usize> {
        let total: f64 = weights.iter().sum();
        let mut left = self.uniform01() * total;
        if !(total > 0.0 && total.is_finite()) {
            return None;
        }
        let mut last = None;
        for (index, &weight) in weights.iter().enumerate().filter(|(_, w)| **w > 0.0) {
            last = Some(index);
            left -= weight;
            if left < 0.0 {
                break;
            }
        }
        last
    }

    /// Shuffles `items` in place (Fisher–Yates).
    pub fn shuffle<T>(&mut self, items: &mut [T]) {
        for end in (1..items.len()).rev() {
            let other = self.below(end + 1);
            items.swap(end, other);
        }
    }
}

/// A Latin hypercube (McKay, Beckman & Conover 1979): `n` points of `dims` uniforms, row by row.
///
/// In every dimension each of the `n` equal cells of (0, 1) holds exactly one point; the cells of different
/// dimensions are joined by independent permutations. Entry `[point * dims + dim]`.
pub fn stratified(n: usize, dims: usize, stream: &mut Stream) -> Vec<f64> {
    let mut points = vec![0.0; n * dims];
    let mut order: Vec<usize> = (0..n).collect();
    for dim in 0..dims {
        stream.shuffle(&mut order);
        for (point, &cell) in order.iter().enumerate() {
            points[point * dims + dim] = (cell as f64 + stream.uniform01()) / n as f64;
        }
    }
    points
}

/// The centres of `n` equal cells of (0, 1), in order: the nodes of a one-dimensional stratified rule.
pub fn midpoints(n: usize) -> Vec<f64> {
    (0..n).map(|i| (i as f64 + 0.5) / n as f64).collect()
}

#[cfg(test)]
mod tests {
    use super::*;
    use proptest::prelude::*;

    #[test]
    fn a_stream_is_a_promise() {
        // Old logs rest on these bits, worked out by hand from the definition: they may never change.
        let mut stream = Stream::new(1, "draws", 0);
        assert_eq!(stream.bits(), 15412205102700890333);
        assert_ne!(
            Stream::new(1, "draws", 1).bits(),
            Stream::new(1, "draws", 0).bits()
        );
        assert_ne!(
            Stream::new(1, "trial", 0).bits(),
            Stream::new(1, "draws", 0).bits()
        );
        assert_ne!(
            Stream::new(2, "draws", 0).bits(),
            Stream::new(1, "draws", 0).bits()
        );
    }

    #[test]
    fn moments_are_those_of_the_distributions() {
        let mut stream = Stream::new(7, "moments", 0);
        let n = 40_000;
        let (mut sum, mut squares, mut low) = (0.0, 0.0, 0_usize);
        for _ in 0..n {
            let z = stream.normal();
            sum += z;
            squares += z * z;
            low += usize::from(stream.below(5) == 3);
        }
        let n = f64::from(n);
        assert!((sum / n).abs() < 4.0 / n.sqrt());
        assert!((squares / n - 1.0).abs() < 4.0 * (2.0 / n).sqrt());
        assert!((low as f64 / n - 0.2).abs() < 4.0 * (0.16 / n).sqrt());
    }

    #[test]
    fn categorical_takes_only_what_has_weight() {
        let mut stream = Stream::new(3, "categorical", 0);
        let mut counts = [0; 4];
        for _ in 0..4000 {
            counts[stream.categorical(&[0.0, 3.0, 1.0, 0.0]).expect("weights")] += 1;
        }
        assert_eq!((counts[0], counts[3]), (0, 0));
        assert!((2800..3200).contains(&counts[1]), "{counts:?}");
        assert_eq!(stream.categorical(&[]), None);
        assert_eq!(stream.categorical(&[0.0]), None);
        assert_eq!(stream.categorical(&[f64::NAN]), None);
    }

    proptest! {
        #[test]
        fn every_cell_of_every_dimension_holds_one_point(n in 1_usize..70, dims in 0_usize..6, seed: u64) {
            let points = stratified(n, dims, &mut Stream::new(seed, "hypercube", 0));
            prop_assert_eq!(points.len(), n * dims);
            for dim in 0..dims {
                let mut cells: Vec<usize> =
                    (0..n).map(|p| (points[p * dims + dim] * n as f64) as usize).collect();
                cells.sort_unstable();
                prop_assert_eq!(cells, (0..n).collect::<Vec<_>>());
            }
        }

        #[test]
        fn uniforms_stay_inside(seed: u64) {
            let u = Stream::new(seed, "inside", 0).uniform01();
            prop_assert!(u > 0.0 && u < 1.0);
        }
    }
}
