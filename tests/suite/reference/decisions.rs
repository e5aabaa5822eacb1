//! When to stop testing, against exact solutions: asia, the tiger, a fair coin's sequential test.
//!
//! Numbers: rational dynamic programming and hand derivations (reference tables, parts 2e and 2f).

use num_bigint::BigInt;
use num_rational::BigRational;

use straypath::belief::odds::posterior;
use straypath::numeric::special::{ln, logit};
use straypath::plan::exact::{Amount, Choice, Policy, Problem, Test};
use straypath::plan::information::discrete_by_group;

use super::asia::Node::{self, *};
use super::asia::{WORLDS, hundredths, yes};
use super::close;

const TESTS: [Node; 4] = [Asia, Smoke, Xray, Bronc];

/// Dyspnoea is seen: is it lung cancer? Missed 100, false alarm 10; tests 0.2, 0.5, 4, 3. Weights sum to P(dyspnoea).
fn asia<T: Amount>(number: impl Fn(i64, i64) -> T) -> Problem<T> {
    let worlds: Vec<usize> = (0..WORLDS).filter(|&w| yes(w, Dysp)).collect();
    let look = |node: Node, tenths: i64| Test {
        cost: number(tenths, 10),
        likelihood: worlds
            .iter()
            .map(|&w| {
                [!yes(w, node), yes(w, node)]
                    .map(|is| number(i64::from(is), 1))
                    .to_vec()
            })
            .collect(),
        times: 1,
    };
    let loss = |says: bool| {
        worlds
            .iter()
            .map(|&w| match (yes(w, Lung), says) {
                (true, false) => number(100, 1),
                (false, true) => number(10, 1),
                _ => number(0, 1),
            })
            .collect()
    };
    Problem {
        weights: worlds
            .iter()
            .map(|&w| {
                number(
                    hundredths(w).iter().map(|&p| i64::from(p)).product(),
                    100_i64.pow(7),
                )
            })
            .collect(),
        tests: TESTS
            .iter()
            .zip([2, 5, 40, 30])
            .map(|(&n, c)| look(n, c))
            .collect(),
        losses: vec![loss(false), loss(true)],
    }
}

const P_DYSPNOEA: f64 = 2_179_853.0 / 5_000_000.0;

fn floats() -> Problem<f64> {
    asia(|above, below| above as f64 / below as f64)
}

fn step<T>(policy: &Policy<T>, seen: &[(Node, bool)]) -> Choice {
    let known = TESTS.map(|node| match seen.iter().find(|s| s.0 == node) {
        Some((_, is)) => vec![u16::from(!is), u16::from(*is)],
        None => vec![0, 0],
    });
    policy.steps[&known.to_vec()]
}

#[test]
fn asia_in_exact_rationals() {
    let exact = |above: i64, below: i64| BigRational::new(above.into(), below.into());
    let dyspnoea = exact(2_179_853, 5_000_000);
    let problem = asia(exact);
    let policy = problem.best();
    assert_eq!(
        policy.cost.clone() / &dyspnoea,
        exact(96_949_649, 21_798_530)
    );
    assert_eq!(
        problem.act_now(&problem.weights).0 / &dyspnoea,
        exact(19_558_530, 2_179_853)
    );
    assert!(*policy.cost.denom() > BigInt::from(1));

    // The policy's tree: smoke, then X-ray for a smoker, then decide.
    assert_eq!(policy.first, Choice::Test(1));
    assert_eq!(step(&policy, &[(Smoke, true)]), Choice::Test(2));
    assert_eq!(step(&policy, &[(Smoke, false)]), Choice::Act(0));
    assert_eq!(
        step(&policy, &[(Smoke, true), (Xray, true)]),
        Choice::Act(1)
    );
    assert_eq!(
        step(&policy, &[(Smoke, true), (Xray, false)]),
        Choice::Act(0)
    );
}

#[test]
fn asia_by_greedy_rules() {
    let problem = floats();
    close(
        problem.best().cost / P_DYSPNOEA,
        96949649.0 / 21798530.0,
        1e-12,
        "optimum",
    );
    close(
        problem.act_now(&problem.weights).0 / P_DYSPNOEA,
        8.972407772451,
        1e-11,
        "at once",
    );
    close(
        problem.one_step().cost / P_DYSPNOEA,
        4.819461321474,
        1e-11,
        "one-step value",
    );

    // Information about cancer, by minute and regardless of it, with optimal stopping.
    let cancer: Vec<usize> = (0..WORLDS)
        .filter(|&w| yes(w, Dysp))
        .map(|w| usize::from(yes(w, Lung)))
        .collect();
    for by_cost in [true, false] {
        let worth = |weights: &[f64], test: usize| {
            let bits = discrete_by_group(weights, &cancer, &problem.tests[test].likelihood);
            if by_cost {
                bits / problem.tests[test].cost
            } else {
                bits
            }
        };
        let policy = problem.ordered(&|weights, open| {
            open.iter()
                .copied()
                .max_by(|&a, &b| worth(weights, a).total_cmp(&worth(weights, b)))
        });
        close(
            policy.cost / P_DYSPNOEA,
            4.819461321474,
            1e-11,
            "greedy information",
        );
    }

    // All four tests, then decide: fold the tables outcome by outcome.
    let mut leaves = vec![problem.weights.clone()];
    for test in 0..TESTS.len() {
        leaves = leaves
            .iter()
            .flat_map(|w| [0, 1].map(|outcome| problem.after(test, outcome, w)))
            .collect();
    }
    let decided: f64 = leaves.iter().map(|w| problem.act_now(w).0).sum();
    close(
        decided / P_DYSPNOEA + 7.7,
        8.519461321474,
        1e-11,
        "all four tests",
    );
}

/// One of two doors; a listen costs 1 and is right with 0.85. Listens so far: correct for door 1 less door 2.
#[test]
fn one_shot_sequential_test() {
    // Loss of a wrong decision, cost, |count| at which it stops, its error, mean listens = Wald's bound.
    let rows = [
        (10.0, 2.5, 1, 0.15, 1.0),
        (110.0, 4.8400809717, 3, 0.0054655870, 4.2388663968),
        (1000.0, 6.6720891845, 4, 0.0009688763, 5.7032128418),
    ];
    for (loss, cost, stop, error, listens) in rows {
        let problem = Problem {
            weights: vec![0.5, 0.5],
            tests: vec![Test {
                cost: 1.0,
                likelihood: vec![vec![0.85, 0.15], vec![0.15, 0.85]],
                times: 120,
            }],
            losses: vec![vec![0.0, loss], vec![loss, 0.0]],
        };
        let policy = problem.best();
        close(policy.cost, cost, 5.1e-11, "sequential test");
        for count in 0..6_u16 {
            let step = policy.steps.get(&vec![vec![count, 0]]);
            assert_eq!(
                matches!(step, Some(Choice::Act(_))),
                count >= stop,
                "count {count}"
            );
        }
        // No overshoot: the error is the posterior's at the stop, and Wald's identity is an equality.
        let odds = posterior(
            &[ln(0.5); 2],
            &[f64::from(stop) * ln(0.85), f64::from(stop) * ln(0.15)],
        );
        close(odds.0[1], error, 5.1e-11, "error");
        let wald = (1.0 - 2.0 * error) * logit(1.0 - error) / (0.7 * logit(0.85));
        close(wald, listens, 1e-6, "mean listens");
        close(cost, listens + loss * error, 1e-6, "cost by its parts");
    }
}

/// Kaelbling, Littman & Cassandra 1998: +10 behind the right door, −100 behind the tiger's, discount 0.95, for ever.
#[test]
fn the_tiger() {
    const SIDE: i32 = 12;
    let right = |count: i32| {
        let k = f64::from(count);
        posterior(&[ln(0.5); 2], &[k * ln(0.85), k * ln(0.15)]).0[0]
    };
    let place = |count: i32| (count + SIDE) as usize;
    let mut value = vec![0.0; 2 * SIDE as usize + 1];
    let opens = |value: &[f64], count: i32| {
        let p = f64::max(right(count), right(-count));
        10.0 * p - 100.0 * (1.0 - p) + 0.95 * value[place(0)]
    };
    for _ in 0..2000 {
        value = (-SIDE..=SIDE)
            .map(|count| {
                let open = opens(&value, count);
                if count.abs() == SIDE {
                    return open;
                }
                let p = right(count);
                let up = 0.85 * p + 0.15 * (1.0 - p);
                let listen = -1.0
                    + 0.95 * (up * value[place(count + 1)] + (1.0 - up) * value[place(count - 1)]);
                f64::max(open, listen)
            })
            .collect();
    }
    close(value[place(0)], 19.371368374890938, 1e-9, "the tiger");
    assert!(value[place(1)] > opens(&value, 1) + 1e-6);
    close(value[place(2)], opens(&value, 2), 1e-9, "opens at two");
}
