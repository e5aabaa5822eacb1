//! Star–mesh elimination: a network folded on its branch admittances, without one subtraction.
//!
//! Eliminating a node with branches `y_1…y_d` puts `y_i y_j / Σ y` between each pair of its
//! neighbours (the star–mesh transform; Rosen 1924). Diagonals of the nodal matrix are never formed, so a
//! milliohm joint beside a gigaohm of insulation loses no digits: with positive admittances the
//! relative error grows only with the number of nodes folded.
//!
//! The pattern (order, fill, slots) is made once for a topology and reused for any admittances.

use num_complex::Complex64;

/// A number that admittances can be made of.
pub trait Scalar: Clone {
    /// Zero.
    fn zero() -> Self;
    /// Sum.
    fn plus(&self, other: &Self) -> Self;
    /// Product.
    fn times(&self, other: &Self) -> Self;
    /// Quotient; the divisor is not zero.
    fn over(&self, other: &Self) -> Self;
    /// Whether it is exactly zero.
    fn is_zero(&self) -> bool;
}

impl Scalar for f64 {
    fn zero() -> Self {
        0.0
    }
    fn plus(&self, other: &Self) -> Self {
        self + other
    }
    fn times(&self, other: &Self) -> Self {
        self * other
    }
    fn over(&self, other: &Self) -> Self {
        self / other
    }
    fn is_zero(&self) -> bool {
        *self == 0.0
    }
}

impl Scalar for Complex64 {
    fn zero() -> Self {
        Self::new(0.0, 0.0)
    }
    #[inline]
    fn plus(&self, other: &Self) -> Self {
        self + other
    }
    #[inline]
    fn times(&self, other: &Self) -> Self {
        self * other
    }
    #[inline]
    fn over(&self, other: &Self) -> Self {
        // Plain division squares the divisor's modulus; scaling first keeps 1e-200 S usable.
        let scale = other.re.abs().max(other.im.abs());
        let (re, im) = (other.re / scale, other.im / scale);
        let d = (re * re + im * im) * scale;
        Self::new(
            (self.re * re + self.im * im) / d,
            (self.im * re - self.re * im) / d,
        )
    }
    fn is_zero(&self) -> bool {
        self.re == 0.0 && self.im == 0.0
    }
}

/// One node's elimination: its branches and where their products go.
#[derive(Clone, Debug)]
struct Step {
    node: u32,
    first: u32,
    degree: u32,
    fill: u32,
}

/// The order of elimination of a topology, with a slot for every branch that arises.
#[derive(Clone, Debug)]
pub struct Pattern {
    steps: Vec<Step>,
    neighbours: Vec<(u32, u32)>,
    fills: Vec<u32>,
    edge_slot: Vec<Option<u32>>,
    slots: usize,
    nodes: usize,
    kept_pairs: Vec<(u32, u32, u32)>,
}

/// A network folded: the branches as they stood when each node went.
#[derive(Clone, Debug)]
pub struct Folded<S> {
    slots: Vec<S>,
    sums: Vec<S>,
}

impl Pattern {
    /// Orders the elimination of every node but `kept`, least degree first.
    ///
    /// `edges` are pairs of nodes below `nodes`; an edge from a node to itself carries nothing and
    /// gets no slot.
    pub fn new(nodes: usize, edges: &[(usize, usize)], kept: &[usize]) -> Self {
        let mut near: Vec<Vec<(u32, u32)>> = vec![Vec::new(); nodes];
        let mut slots = 0u32;
        let link = |near: &mut Vec<Vec<(u32, u32)>>, slots: &mut u32, a: usize, b: usize| -> u32 {
            if let Some(&(_, slot)) = near[a].iter().find(|&&(n, _)| n as usize == b) {
                return slot;
            }
            let slot = *slots;
            *slots += 1;
            near[a].push((b as u32, slot));
            near[b].push((a as u32, slot));
            slot
        };
        let edge_slot = edges
            .iter()
            .map(|&(a, b)| (a != b).then(|| link(&mut near, &mut slots, a, b)))
            .collect();
        let mut gone = vec![false; nodes];
        let mut stays = vec![false; nodes];
        for &k in kept {
            stays[k] = true;
        }
        let mut steps = Vec::with_capacity(nodes);
        let mut neighbours = Vec::new();
        let mut fills = Vec::new();
        // Buckets by degree: the near-tree networks here keep degrees small, so this is near linear.
        let mut buckets: Vec<Vec<u32>> = Vec::new();
        let put = |buckets: &mut Vec<Vec<u32>>, degree: usize, node: usize| {
            if buckets.len() <= degree {
                buckets.resize(degree + 1, Vec::new());
            }
            buckets[degree].push(node as u32);
        };
        for node in (0..nodes).rev() {
            if !stays[node] {
                put(&mut buckets, near[node].len(), node);
            }
        }
        let mut low = 0;
        while low < buckets.len() {
            let Some(node) = buckets[low].pop() else {
                low += 1;
                continue;
            };
            let node = node as usize;
            if gone[node] || near[node].len() != low {
                continue;
            }
            gone[node] = true;
            let star = std::mem::take(&mut near[node]);
            let first = neighbours.len() as u32;
            let fill = fills.len() as u32;
            for &(n, _) in &star {
                near[n as usize].retain(|&(m, _)| m as usize != node);
            }
            for (i, &(a, _)) in star.iter().enumerate() {
                for &(b, _) in &star[i + 1..] {
                    fills.push(link(&mut near, &mut slots, a as usize, b as usize));
                }
            }
            for &(n, _) in &star {
                let n = n as usize;
                if !stays[n] {
                    let degree = near[n].len();
                    put(&mut buckets, degree, n);
                    low = low.min(degree);
                }
            }
            steps.push(Step {
                node: node as u32,
                first,
                degree: star.len() as u32,
                fill,
            });
            neighbours.extend(star);
        }
        let mut kept_pairs = Vec::new();
        for &k in kept {
            for &(n, slot) in &near[k] {
                if (k as u32) < n {
                    kept_pairs.push((k as u32, n, slot));
                }
            }
        }
        Self {
            steps,
            neighbours,
            fills,
            edge_slot,
            slots: slots as usize,
            nodes,
            kept_pairs,
        }
    }

    /// Number of nodes.
    pub fn nodes(&self) -> usize {
        self.nodes
    }

    /// Folds the network: `admittances[e]` belongs to edge `e` of [`Pattern::new`], in siemens.
    pub fn fold<S: Scalar>(&self, admittances: &[S]) -> Folded<S> {
        let mut slots = vec![S::zero(); self.slots];
        for (slot, y) in self.edge_slot.iter().zip(admittances) {
            if let Some(slot) = slot {
                let s = &mut slots[*slot as usize];
                *s = s.plus(y);
            }
        }
        let mut sums = Vec::with_capacity(self.steps.len());
        for step in &self.steps {
            let star = self.star(step);
            let mut sum = S::zero();
            for &(_, slot) in star {
                sum = sum.plus(&slots[slot as usize]);
            }
            if !sum.is_zero() && star.len() > 1 {
                let mut fill = step.fill as usize;
                for (i, &(_, a)) in star.iter().enumerate() {
                    let ya = slots[a as usize].clone();
                    let rest = star.len() - i - 1;
                    if ya.is_zero() {
                        fill += rest;
                        continue;
                    }
                    let share = ya.over(&sum);
                    for &(_, b) in &star[i + 1..] {
                        let product = share.times(&slots[b as usize]);
                        let target = &mut slots[self.fills[fill] as usize];
                        *target = target.plus(&product);
                        fill += 1;
                    }
                }
            }
            sums.push(sum);
        }
        Folded { slots, sums }
    }

    fn star(&self, step: &Step) -> &[(u32, u32)] {
        &self.neighbours[step.first as usize..(step.first + step.degree) as usize]
    }

    /// What the folding left between kept nodes: (node, node, admittance).
    pub fn between_kept<S: Scalar>(&self, folded: &Folded<S>) -> Vec<(usize, usize, S)> {
        self.kept_pairs
            .iter()
            .map(|&(a, b, slot)| (a as usize, b as usize, folded.slots[slot as usize].clone()))
            .collect()
    }

    /// Moves injected currents (A, into each node) of eliminated nodes onto the kept ones.
    pub fn push<S: Scalar>(&self, folded: &Folded<S>, injected: &mut [S]) {
        for (step, sum) in self.steps.iter().zip(&folded.sums) {
            let j = injected[step.node as usize].clone();
            if j.is_zero() || sum.is_zero() {
                continue;
            }
            let unit = j.over(sum);
            for &(n, slot) in self.star(step) {
                let add = unit.times(&folded.slots[slot as usize]);
                injected[n as usize] = injected[n as usize].plus(&add);
            }
        }
    }

    /// Voltages of the eliminated nodes from those of the kept ones (V), after [`Pattern::push`] of
    /// `injected` where currents were injected. A node without any branch is left at zero.
    pub fn pull<S: Scalar>(&self, folded: &Folded<S>, injected: Option<&[S]>, volts: &mut [S]) {
        for (step, sum) in self.steps.iter().zip(&folded.sums).rev() {
            if sum.is_zero() {
                continue;
            }
            let mut total = S::zero();
            for &(n, slot) in self.star(step) {
                total = total.plus(&folded.slots[slot as usize].times(&volts[n as usize]));
            }
            if let Some(injected) = injected {
                total = total.plus(&injected[step.node as usize]);
            }
            volts[step.node as usize] = total.over(sum);
        }
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use num_bigint::BigInt;
    use num_rational::Ratio;
    use proptest::prelude::*;

    #[derive(Clone, Debug, PartialEq)]
    struct Exact(Ratio<BigInt>);

    impl Exact {
        fn new(x: f64) -> Self {
            Self(Ratio::from_float(x).unwrap())
        }
        fn value(&self) -> f64 {
            // Scaled division: numerator and denominator overflow f64 on long products.
            let (n, d) = (self.0.numer(), self.0.denom());
            let shift = n.bits() as i64 - d.bits() as i64;
            let scaled = if shift > 0 {
                (n << 64u32) / (d << shift as u64)
            } else {
                (n << (64 - shift) as u64) / d
            };
            let digits: f64 = scaled.to_string().parse().unwrap();
            libm::ldexp(digits, (shift - 64) as i32)
        }
    }

    impl Scalar for Exact {
        fn zero() -> Self {
            Self(Ratio::from_integer(BigInt::from(0)))
        }
        fn plus(&self, o: &Self) -> Self {
            Self(&self.0 + &o.0)
        }
        fn times(&self, o: &Self) -> Self {
            Self(&self.0 * &o.0)
        }
        fn over(&self, o: &Self) -> Self {
            Self(&self.0 / &o.0)
        }
        fn is_zero(&self) -> bool {
            *self.0.numer() == BigInt::from(0)
        }
    }

    proptest! {
        #![proptest_config(ProptestConfig::with_cases(60))]
        /// Design §2: against exact rationals, conductances over twelve decades, within 1e-9.
        #[test]
        fn folding_loses_no_digits_over_twelve_decades(
            parents in proptest::collection::vec((0usize..1000, -9i32..4, 1.0f64..9.99), 3..24),
            chords in proptest::collection::vec((0usize..1000, 0usize..1000, -9i32..4), 0..6),
        ) {
            let n = parents.len() + 1;
            let mut edges = Vec::new();
            let mut y = Vec::new();
            for (i, &(p, e, m)) in parents.iter().enumerate() {
                edges.push((p % (i + 1), i + 1));
                y.push(m * libm::pow(10.0, f64::from(e)));
            }
            for &(a, b, e) in &chords {
                edges.push((a % n, b % n));
                y.push(libm::pow(10.0, f64::from(e)));
            }
            // A source across nodes 0 and n-1; the same elimination in both arithmetics, then the
            // exact voltages are checked by Kirchhoff's current law, which no elimination is part of.
            let pattern = Pattern::new(n, &edges, &[0, n - 1]);
            let folded = pattern.fold(&y);
            let mut v = vec![0.0; n];
            v[0] = 230.0;
            pattern.pull(&folded, None, &mut v);
            let exact_y: Vec<Exact> = y.iter().map(|&x| Exact::new(x)).collect();
            let exact_fold = pattern.fold(&exact_y);
            let mut exact = vec![Exact::zero(); n];
            exact[0] = Exact::new(230.0);
            pattern.pull(&exact_fold, None, &mut exact);
            for node in 1..n - 1 {
                let mut sum = Exact::zero();
                for (&(a, b), y) in edges.iter().zip(&exact_y) {
                    let other = if a == node { b } else if b == node { a } else { continue };
                    let drop = Exact(&exact[node].0 - &exact[other].0);
                    sum = sum.plus(&y.times(&drop));
                }
                prop_assert!(sum.is_zero(), "Kirchhoff at node {node}");
            }
            for node in 0..n {
                let want = exact[node].value();
                prop_assert!((v[node] - want).abs() <= 1e-9 * want.abs(), "{} against {want}", v[node]);
            }
            let z: Vec<_> = pattern.between_kept(&folded);
            let ze: Vec<_> = pattern.between_kept(&exact_fold);
            for ((_, _, got), (_, _, want)) in z.iter().zip(&ze) {
                prop_assert!((got - want.value()).abs() <= 1e-9 * want.value());
            }
        }
    }

    #[test]
    fn an_injection_meets_the_parallel_of_two_ways_home() {
        // Node 1 to node 0 by 2 S and over node 2 by 1 S + 1 S in series: 2.5 S in all.
        let pattern = Pattern::new(3, &[(1, 0), (1, 2), (2, 0)], &[0]);
        let folded = pattern.fold(&[2.0, 1.0, 1.0]);
        let mut j = vec![0.0, 5.0, 0.0];
        pattern.push(&folded, &mut j);
        let mut v = vec![0.0; 3];
        pattern.pull(&folded, Some(&j), &mut v);
        assert!(
            (v[1] - 2.0).abs() < 1e-15 && (v[2] - 1.0).abs() < 1e-15,
            "{v:?}"
        );
    }

    #[test]
    fn an_island_stays_at_zero_and_harms_nobody() {
        let pattern = Pattern::new(4, &[(0, 1), (2, 3)], &[0]);
        let folded = pattern.fold(&[1.0, 1.0]);
        let mut v = vec![1.0, 0.0, 0.0, 0.0];
        pattern.pull(&folded, None, &mut v);
        assert_eq!(v, vec![1.0, 1.0, 0.0, 0.0]);
    }
}
