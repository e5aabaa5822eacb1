//! The chest-clinic network of Lauritzen & Spiegelhalter 1988 (JRSS-B 50:157–224), its tables typed in.
//!
//! Posteriors and information come from exact rational elimination, confirmed by two junction-tree engines to
//! 1e-16 (reference tables, part 1).

use straypath::belief::odds::{by_group, entropy, posterior};
use straypath::numeric::special::{exp, ln};
use straypath::plan::information::discrete_by_group;

use super::close;

/// Seven of the eight variables, in the order of their bits in a world.
#[derive(Clone, Copy, PartialEq, Eq)]
pub enum Node {
    /// Visit to Asia.
    Asia,
    /// Smoker.
    Smoke,
    /// Tuberculosis.
    Tub,
    /// Lung cancer.
    Lung,
    /// Bronchitis.
    Bronc,
    /// Positive X-ray.
    Xray,
    /// Dyspnoea.
    Dysp,
}
use Node::*;

/// Number of worlds; tuberculosis or cancer is a function of two others and no bit of its own.
pub const WORLDS: usize = 1 << 7;

/// Whether `node` is `yes` in `world`.
pub fn yes(world: usize, node: Node) -> bool {
    world >> (node as usize) & 1 == 1
}

/// Probability in hundredths that each node is as it is in `world`, given its parents (ibid., table 1).
pub fn hundredths(world: usize) -> [u8; 7] {
    let is = |node| yes(world, node);
    let either = is(Tub) || is(Lung);
    let row = [
        (Asia, 1),
        (Smoke, 50),
        (Tub, if is(Asia) { 5 } else { 1 }),
        (Lung, if is(Smoke) { 10 } else { 1 }),
        (Bronc, if is(Smoke) { 60 } else { 30 }),
        (Xray, if either { 98 } else { 5 }),
        (
            Dysp,
            match (is(Bronc), either) {
                (true, true) => 90,
                (true, false) => 80,
                (false, true) => 70,
                (false, false) => 10,
            },
        ),
    ];
    row.map(|(node, p)| if is(node) { p } else { 100 - p })
}

/// Posterior over worlds and P(evidence).
fn given(evidence: &[(Node, bool)]) -> (Vec<f64>, f64) {
    let prior: Vec<f64> = (0..WORLDS)
        .map(|w| {
            hundredths(w)
                .iter()
                .map(|&p| ln(f64::from(p) / 100.0))
                .sum()
        })
        .collect();
    let likelihood: Vec<f64> = (0..WORLDS)
        .map(
            |w| match evidence.iter().all(|&(node, value)| yes(w, node) == value) {
                true => 0.0,
                false => f64::NEG_INFINITY,
            },
        )
        .collect();
    let (worlds, log_evidence) = posterior(&prior, &likelihood);
    (worlds, exp(log_evidence))
}

/// Group of each world: the states of the target nodes as bits, the first node highest.
fn groups(target: &[Node]) -> Vec<usize> {
    (0..WORLDS)
        .map(|w| {
            target
                .iter()
                .fold(0, |bits, &node| bits * 2 + usize::from(yes(w, node)))
        })
        .collect()
}

fn information(worlds: &[f64], target: &[Node], observable: Node) -> f64 {
    let table: Vec<Vec<f64>> = (0..WORLDS)
        .map(|w| {
            if yes(w, observable) {
                vec![0.0, 1.0]
            } else {
                vec![1.0, 0.0]
            }
        })
        .collect();
    discrete_by_group(worlds, &groups(target), &table)
}

struct Case {
    target: &'static [Node],
    evidence: &'static [(Node, bool)],
    p_evidence: f64,
    bits: f64,
    /// By group.
    odds: &'static [f64],
    told: &'static [(Node, f64)],
}

impl Case {
    fn hold(&self) {
        let (worlds, p_evidence) = given(self.evidence);
        close(p_evidence, self.p_evidence, 1e-12, "P(evidence)");
        let odds = by_group(&worlds, &groups(self.target), 1 << self.target.len());
        for (got, want) in odds.iter().zip(self.odds) {
            close(*got, *want, 1e-12, "posterior");
        }
        close(entropy(&odds), self.bits, 1e-10, "entropy");
        for &(observable, want) in self.told {
            let got = information(&worlds, self.target, observable);
            close(got, want, 1e-10, "information");
        }
    }
}

#[test]
fn lung_cancer() {
    let cases = [
        Case {
            target: &[Lung],
            evidence: &[],
            p_evidence: 1.0,
            bits: 0.307268359861,
            odds: &[189.0 / 200.0, 11.0 / 200.0],
            told: &[
                (Xray, 0.184807236453),
                (Smoke, 0.032373995118),
                (Dysp, 0.025382488298),
                (Bronc, 0.002539798464),
                (Asia, 0.0),
            ],
        },
        Case {
            target: &[Lung],
            evidence: &[(Dysp, true)],
            p_evidence: 2179853.0 / 5000000.0,
            bits: 0.477681594320,
            odds: &[1955853.0 / 2179853.0, 224000.0 / 2179853.0],
            told: &[
                (Xray, 0.301746163560),
                (Smoke, 0.034276949154),
                (Bronc, 0.019890218702),
                (Asia, 0.000000861687),
            ],
        },
        Case {
            target: &[Lung],
            evidence: &[(Dysp, true), (Xray, true)],
            p_evidence: 176675261.0 / 2500000000.0,
            bits: 0.957152403563,
            odds: &[9559323.0 / 25239323.0, 15680000.0 / 25239323.0],
            told: &[
                (Smoke, 0.116630358000),
                (Bronc, 0.013446208333),
                (Asia, 0.001312381874),
            ],
        },
        Case {
            target: &[Lung],
            evidence: &[(Dysp, true), (Xray, true), (Smoke, false)],
            p_evidence: 37877341.0 / 2500000000.0,
            bits: 0.804542468044,
            odds: &[28567341.0 / 37877341.0, 9310000.0 / 37877341.0],
            told: &[(Bronc, 0.042102017248), (Asia, 0.001262511067)],
        },
    ];
    cases.iter().for_each(Case::hold);
}

#[test]
fn tuberculosis() {
    let cases = [
        Case {
            target: &[Tub],
            evidence: &[],
            p_evidence: 1.0,
            bits: 0.083433371268,
            odds: &[1237.0 / 1250.0, 13.0 / 1250.0],
            told: &[
                (Xray, 0.031604118503),
                (Dysp, 0.003973400589),
                (Asia, 0.000584197160),
                (Smoke, 0.0),
                (Bronc, 0.0),
            ],
        },
        Case {
            target: &[Tub],
            evidence: &[(Asia, true), (Xray, true)],
            p_evidence: 58037.0 / 40000000.0,
            bits: 0.922615893076,
            odds: &[5491.0 / 8291.0, 2800.0 / 8291.0],
            told: &[
                (Smoke, 0.029428860134),
                (Dysp, 0.020942214004),
                (Bronc, 0.002489752120),
            ],
        },
    ];
    cases.iter().for_each(Case::hold);
}

/// Three faults that may be there together; odds in the order of (tub, lung, bronc) as bits.
#[test]
fn three_faults_together() {
    let target = &[Tub, Lung, Bronc];
    let cases = [
        Case {
            target,
            evidence: &[],
            p_evidence: 1.0,
            bits: 1.380936386653,
            odds: &[
                1302561.0 / 2500000.0,
                1035369.0 / 2500000.0,
                58139.0 / 2500000.0,
                77931.0 / 2500000.0,
                13689.0 / 2500000.0,
                10881.0 / 2500000.0,
                611.0 / 2500000.0,
                819.0 / 2500000.0,
            ],
            told: &[
                (Dysp, 0.402444549758),
                (Xray, 0.223790464310),
                (Smoke, 0.096487903800),
                (Asia, 0.000584197160),
            ],
        },
        Case {
            target,
            evidence: &[(Dysp, true)],
            p_evidence: 2179853.0 / 5000000.0,
            bits: 1.231714308676,
            odds: &[
                100197.0 / 838405.0,
                8282952.0 / 10899265.0,
                406973.0 / 10899265.0,
                701379.0 / 10899265.0,
                7371.0 / 838405.0,
                7533.0 / 838405.0,
                329.0 / 838405.0,
                567.0 / 838405.0,
            ],
            told: &[
                (Xray, 0.370381353059),
                (Smoke, 0.066291114094),
                (Asia, 0.001041378772),
            ],
        },
        Case {
            target,
            evidence: &[(Dysp, true), (Xray, true)],
            p_evidence: 176675261.0 / 2500000000.0,
            bits: 2.187159827516,
            odds: &[
                6512805.0 / 176675261.0,
                41414760.0 / 176675261.0,
                5697622.0 / 25239323.0,
                9819306.0 / 25239323.0,
                1341522.0 / 25239323.0,
                1371006.0 / 25239323.0,
                59878.0 / 25239323.0,
                103194.0 / 25239323.0,
            ],
            told: &[(Smoke, 0.148371366860), (Asia, 0.005253380896)],
        },
    ];
    cases.iter().for_each(Case::hold);
}
