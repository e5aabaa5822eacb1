//! Exact dynamic programming over what is known: the cheapest way to test and then act.
//!
//! The yardstick of the heuristics: small problems are solved outright and the advice's rule is run on the same
//! ones. Tests have costs and finitely many outcomes, actions have losses that depend on the world. A state of
//! knowledge is how often each test has given each outcome; its value is the smaller of acting now and of the
//! best test: V(w) = min( min_a Σ w l_a, min_t [c_t Σ w + Σ_o V(w · L_to)] ), on weights never normalised, so
//! that the recursion needs no division and holds in exact rationals too (Bellman 1957; Raiffa & Schlaifer 1961).

use std::collections::BTreeMap;
use std::iter::Sum;
use std::ops::{Add, Mul};

/// What the recursion asks of a number: `f64`, or an exact rational.
pub trait Amount: Clone + PartialOrd + Add<Output = Self> + Mul<Output = Self> + Sum {}

impl<T: Clone + PartialOrd + Add<Output = T> + Mul<Output = T> + Sum> Amount for T {}

/// A test with finitely many outcomes.
#[derive(Clone, Debug)]
pub struct Test<T> {
    /// Cost of making it once.
    pub cost: T,
    /// P(outcome | world), `[world][outcome]`, each row as long as the others.
    pub likelihood: Vec<Vec<T>>,
    /// How often it may be made; repeats are independent given the world.
    pub times: u16,
}

/// A problem of testing and acting.
#[derive(Clone, Debug)]
pub struct Problem<T> {
    /// Weight of each world (any sum; costs come out for that sum).
    pub weights: Vec<T>,
    /// Tests, in any order, stopping at any time.
    pub tests: Vec<Test<T>>,
    /// Loss of each action in each world, `[action][world]`; at least one action.
    pub losses: Vec<Vec<T>>,
}

/// What to do in a state of knowledge.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Choice {
    /// Act so.
    Act(usize),
    /// Make this test.
    Test(usize),
}

/// How often each test has given each outcome, `[test][outcome]`.
pub type Known = Vec<Vec<u16>>;

/// A policy and what it costs.
#[derive(Clone, Debug)]
pub struct Policy<T> {
    /// Expected cost of tests and loss of the last action, times the sum of the weights.
    pub cost: T,
    /// First step.
    pub first: Choice,
    /// The step in every state that was looked at.
    pub steps: BTreeMap<Known, Choice>,
}

/// Names a test from the weights of the worlds and the tests still open.
pub type Pick<'a, T> = &'a dyn Fn(&[T], &[usize]) -> Option<usize>;

/// How a policy goes from state to state.
enum Rule<'a, T> {
    Best,
    OneStep,
    Ordered(Pick<'a, T>),
}

impl<T: Amount> Problem<T> {
    /// The cheapest policy.
    pub fn best(&self) -> Policy<T> {
        self.run(&Rule::Best)
    }

    /// Looks one test ahead: makes the test after which acting would cost least, while that beats acting now.
    pub fn one_step(&self) -> Policy<T> {
        self.run(&Rule::OneStep)
    }

    /// Tests in the order of `pick` but stops when that is cheapest, knowing what `pick` would do next.
    pub fn ordered(&self, pick: Pick<T>) -> Policy<T> {
        self.run(&Rule::Ordered(pick))
    }

    fn run(&self, rule: &Rule<T>) -> Policy<T> {
        let known: Known = self
            .tests
            .iter()
            .map(|t| vec![0; t.likelihood.first().map_or(0, Vec::len)])
            .collect();
        let mut values = BTreeMap::new();
        let (cost, first) = self.value(rule, &known, &self.weights, &mut values);
        let steps = values
            .into_iter()
            .map(|(known, (_, choice))| (known, choice))
            .collect();
        Policy { cost, first, steps }
    }

    /// Value of a state and its step, remembered in `values`.
    fn value(
        &self,
        rule: &Rule<T>,
        known: &Known,
        weights: &[T],
        values: &mut BTreeMap<Known, (T, Choice)>,
    ) -> (T, Choice) {
        if let Some(found) = values.get(known) {
            return found.clone();
        }
        let (mut cost, action) = self.act_now(weights);
        let mut choice = Choice::Act(action);
        let open: Vec<usize> = (0..self.tests.len())
            .filter(|&t| {
                known[t].iter().map(|&n| usize::from(n)).sum::<usize>()
                    < usize::from(self.tests[t].times)
            })
            .collect();
        let tried = match rule {
            Rule::Best => open,
            Rule::Ordered(pick) => pick(weights, &open).into_iter().collect(),
            Rule::OneStep => self.one_ahead(weights, &open, &cost).into_iter().collect(),
        };
        for test in tried {
            let mut sum = self.price(test, weights);
            for outcome in 0..known[test].len() {
                let after = self.after(test, outcome, weights);
                if is_nothing(&after) {
                    continue;
                }
                let mut next = known.clone();
                next[test][outcome] += 1;
                sum = sum + self.value(rule, &next, &after, values).0;
            }
            // The one-step rule has decided to test; the others test only if that is cheaper.
            if sum < cost || matches!(rule, Rule::OneStep) {
                cost = sum;
                choice = Choice::Test(test);
            }
        }
        values.insert(known.clone(), (cost.clone(), choice));
        (cost, choice)
    }

    /// The test after which acting at once costs least, if less than `now`.
    fn one_ahead(&self, weights: &[T], open: &[usize], now: &T) -> Option<usize> {
        let mut least = now.clone();
        let mut chosen = None;
        for &test in open {
            let outcomes = self.tests[test].likelihood.first().map_or(0, Vec::len);
            let then: T = (0..outcomes)
                .map(|o| self.act_now(&self.after(test, o, weights)).0)
                .sum();
            let cost = self.price(test, weights) + then;
            if cost < least {
                least = cost;
                chosen = Some(test);
            }
        }
        chosen
    }

    /// Cheapest action on these weights: its loss and which.
    pub fn act_now(&self, weights: &[T]) -> (T, usize) {
        let loss = |row: &Vec<T>| {
            row.iter()
                .zip(weights)
                .map(|(l, w)| l.clone() * w.clone())
                .sum()
        };
        let mut best: (T, usize) = (std::iter::empty().sum(), 0);
        for (action, row) in self.losses.iter().enumerate() {
            let loss: T = loss(row);
            if action == 0 || loss < best.0 {
                best = (loss, action);
            }
        }
        best
    }

    fn price(&self, test: usize, weights: &[T]) -> T {
        self.tests[test].cost.clone() * weights.iter().cloned().sum()
    }

    /// Weights after `test` gave `outcome`.
    pub fn after(&self, test: usize, outcome: usize, weights: &[T]) -> Vec<T> {
        let rows = &self.tests[test].likelihood;
        rows.iter()
            .zip(weights)
            .map(|(row, w)| row[outcome].clone() * w.clone())
            .collect()
    }
}

fn is_nothing<T: Amount>(weights: &[T]) -> bool {
    let nothing: T = std::iter::empty().sum();
    weights.iter().all(|w| *w == nothing)
}

#[cfg(test)]
mod tests {
    use super::*;

    /// Raiffa 1968: drill (70) on a field dry, wet or soaking (0, 120, 270); sounding costs 10.
    fn wildcatter(sounding: f64) -> Problem<f64> {
        Problem {
            weights: vec![0.5, 0.3, 0.2],
            tests: vec![Test {
                cost: sounding,
                likelihood: vec![
                    vec![0.1, 0.3, 0.6],
                    vec![0.3, 0.4, 0.3],
                    vec![0.5, 0.4, 0.1],
                ],
                times: 1,
            }],
            losses: vec![vec![70.0, -50.0, -200.0], vec![0.0; 3]],
        }
    }

    #[test]
    fn the_wildcatter_sounds_first() {
        // bn_reference part 2d: 22.5 with the sounding, 20 without, worth 12.5.
        let policy = wildcatter(10.0).best();
        assert!((policy.cost + 22.5).abs() < 1e-12);
        assert_eq!(policy.first, Choice::Test(0));
        assert_eq!(policy.steps[&vec![vec![0, 0, 1]]], Choice::Act(1));
        assert_eq!(policy.steps[&vec![vec![0, 1, 0]]], Choice::Act(0));
        assert_eq!(wildcatter(12.6).best().first, Choice::Act(0));
        assert!((wildcatter(12.6).best().cost + 20.0).abs() < 1e-12);
    }

    #[test]
    fn every_rule_stops_where_no_test_is_left() {
        let problem = Problem {
            tests: Vec::new(),
            ..wildcatter(10.0)
        };
        assert_eq!(problem.best().first, Choice::Act(0));
        assert_eq!(problem.one_step().first, Choice::Act(0));
        assert_eq!(
            problem.ordered(&|_, open| open.first().copied()).first,
            Choice::Act(0)
        );
    }
}
