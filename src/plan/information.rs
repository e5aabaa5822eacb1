//! What a reading is expected to tell about the repair groups: mutual information in bits.
//!
//! I(G; Y) = Σ_g P_g ∫ f_g(y) log₂ [f_g(y) / f(y)] dy, f = Σ P_g f_g (Shannon 1948). The density f_g of a group
//! is a mixture of normal kernels (one for each draw of the unknowns, as wide as the instrument's error), with
//! words beside them (`no trip`, over the range). The integral is one-dimensional, so it is done by quadrature:
//! a nested Monte Carlo estimate would favour noisy checks (Rainforth et al. 2018, bias of order 1/M).

use crate::numeric::quadrature::gauss_legendre;

use super::mixture::{Fineness, Mixture};
use super::panels::{Bell, panels};

/// How one draw of the unknowns reads.
#[derive(Clone, Copy, Debug, PartialEq)]
pub enum Shape {
    /// A number: normal with this mean and standard deviation, in the coordinate of the check's error model
    /// (volts, decades of ohms, …). A mean that is not finite counts nothing: say it by a word.
    Bell {
        /// Mean.
        mean: f64,
        /// Standard deviation, above zero.
        sd: f64,
    },
    /// A word, by a number that the caller gives it.
    Word(u32),
}

/// One weighted way in which a check may read under a hypothesis; the weights of a forecast sum to one.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Kernel {
    /// Share of the forecast.
    pub weight: f64,
    /// How it reads.
    pub shape: Shape,
}

/// A reading wrong in itself: it tells nothing, whatever the cause.
#[derive(Clone, Copy, Debug)]
pub struct Gross<'a> {
    /// Share of readings that are so, 0..1.
    pub share: f64,
    /// What such a reading shows, the same under every hypothesis.
    pub forecast: &'a [Kernel],
}

/// A check about to be made: who may be the cause, in which group, and what each would read.
#[derive(Clone, Copy, Debug)]
pub struct Question<'a> {
    /// Probability of each hypothesis (any sum).
    pub prior: &'a [f64],
    /// Its repair group, counted from 0.
    pub group: &'a [usize],
    /// Its forecast. Hypotheses that read alike may share one slice.
    pub forecasts: &'a [&'a [Kernel]],
    /// Readings wrong in themselves.
    pub gross: Option<Gross<'a>>,
}

const FINE: Fineness = Fineness {
    reach: 9.5,
    panel: 1.5,
    nodes: 16,
    join: 0.0,
    tolerance: Some(1e-14),
};

const QUICK: Fineness = Fineness {
    reach: 4.0,
    panel: 3.0,
    nodes: 4,
    join: 0.5,
    tolerance: None,
};

impl Question<'_> {
    /// Information about the group, to 1e-10 bit.
    pub fn information(&self) -> f64 {
        self.integrate(&FINE)
    }

    /// Information about the group, within [`QUICK_ERROR`] bit of [`Self::information`] and some twenty times sooner.
    pub fn quick_information(&self) -> f64 {
        self.integrate(&QUICK)
    }

    fn integrate(&self, fineness: &Fineness) -> f64 {
        let mixture = Mixture::new(self, fineness);
        let rule = gauss_legendre(fineness.nodes);
        let mut nats = mixture.words();
        let bells: Vec<Bell> = mixture.bells.iter().map(|b| b.bell).collect();
        panels(&bells, fineness.reach, fineness.panel, |from, to, here| {
            if here.iter().all(|&i| mixture.bells[i].group.is_none()) {
                return;
            }
            let whole = mixture.panel(from, to, here, &rule);
            nats += match fineness.tolerance {
                Some(tolerance) => mixture.refine((from, to), here, &rule, whole, tolerance, 24),
                None => whole,
            };
        });
        (nats * std::f64::consts::LOG2_E).max(0.0)
    }
}

/// Largest error of [`Question::quick_information`] in bits, held by a property test over random mixtures.
pub const QUICK_ERROR: f64 = 1e-3;

/// Information in bits of an outcome table about its rows: `table[h][outcome]` = P(outcome | h), `prior` of any sum.
pub fn discrete(prior: &[f64], table: &[Vec<f64>]) -> f64 {
    let group: Vec<usize> = (0..prior.len()).collect();
    discrete_by_group(prior, &group, table)
}

/// The same about groups of rows.
pub fn discrete_by_group(prior: &[f64], group: &[usize], table: &[Vec<f64>]) -> f64 {
    let forecasts: Vec<Vec<Kernel>> = table
        .iter()
        .map(|row| {
            (0..)
                .zip(row)
                .map(|(o, &weight)| Kernel {
                    weight,
                    shape: Shape::Word(o),
                })
                .collect()
        })
        .collect();
    let forecasts: Vec<&[Kernel]> = forecasts.iter().map(Vec::as_slice).collect();
    Question {
        prior,
        group,
        forecasts: &forecasts,
        gross: None,
    }
    .information()
}

#[cfg(test)]
mod tests {
    use super::*;
    use proptest::prelude::*;

    fn bell(weight: f64, mean: f64, sd: f64) -> Kernel {
        Kernel {
            weight,
            shape: Shape::Bell { mean, sd },
        }
    }

    #[test]
    fn a_perfect_look_tells_the_whole_entropy() {
        let yes = [Kernel {
            weight: 1.0,
            shape: Shape::Word(1),
        }];
        let no = [Kernel {
            weight: 1.0,
            shape: Shape::Word(0),
        }];
        let question = Question {
            prior: &[0.25, 0.25, 0.5],
            group: &[0, 0, 1],
            forecasts: &[&yes, &yes, &no],
            gross: None,
        };
        assert!((question.information() - 1.0).abs() < 1e-15);
        // Half of the looks are worthless and known as such: half the information.
        let lost = [Kernel {
            weight: 1.0,
            shape: Shape::Word(9),
        }];
        let blurred = Question {
            gross: Some(Gross {
                share: 0.5,
                forecast: &lost,
            }),
            ..question
        };
        assert!((blurred.information() - 0.5).abs() < 1e-15);
    }

    #[test]
    fn what_reads_alike_tells_nothing() {
        let same = [bell(0.5, 230.0, 1.0), bell(0.5, 240.0, 2.0)];
        let question = Question {
            prior: &[0.3, 0.7],
            group: &[0, 1],
            forecasts: &[&same, &same],
            gross: None,
        };
        assert!(question.information() < 1e-14);
        assert!(question.quick_information() < 1e-14);
        let nobody = Question {
            prior: &[],
            group: &[],
            forecasts: &[],
            gross: None,
        };
        assert_eq!(nobody.information(), 0.0);
        let nothing = Question {
            prior: &[0.0, 0.0],
            ..question
        };
        assert_eq!(nothing.information(), 0.0);
    }

    #[test]
    fn twelve_decades_of_width_are_resolved() {
        // A needle beside a haystack: told apart for sure but where the haystack covers the needle.
        let needle = [bell(1.0, 0.0, 1e-9)];
        let hay = [bell(1.0, 0.0, 1e3)];
        let question = Question {
            prior: &[0.5, 0.5],
            group: &[0, 1],
            forecasts: &[&needle, &hay],
            gross: None,
        };
        assert!((question.information() - 1.0).abs() < 1e-9);
        assert!((question.quick_information() - 1.0).abs() < QUICK_ERROR);
    }

    type Draws = Vec<(f64, f64, f64)>;

    prop_compose! {
        fn forecast()(
            middle in -5.0..5.0_f64, spread in 0.0..6.0_f64, sd in 0.3..1.5_f64,
            // Mostly one instrument's error, almost the same at every draw; sometimes widely different ones.
            wild in prop::sample::select(vec![0.01, 0.05, 1.0]),
            draws in prop::collection::vec((0.1..1.0_f64, -1.0..1.0_f64, 0.0..1.0_f64), 1..24),
        ) -> Draws {
            let total: f64 = draws.iter().map(|d| d.0).sum();
            draws.iter().map(|d| (d.0 / total, middle + spread * d.1, sd * (1.0 + wild * d.2))).collect()
        }
    }

    proptest! {
        #[test]
        fn quick_is_near_enough(
            sets in prop::collection::vec((0.01..1.0_f64, 0_usize..4, forecast()), 2..8),
            share in 0.0..0.1_f64,
        ) {
            let prior: Vec<f64> = sets.iter().map(|s| s.0).collect();
            let group: Vec<usize> = sets.iter().map(|s| s.1).collect();
            let forecasts: Vec<Vec<Kernel>> =
                sets.iter().map(|s| s.2.iter().map(|k| bell(k.0, k.1, k.2)).collect()).collect();
            let forecasts: Vec<&[Kernel]> = forecasts.iter().map(Vec::as_slice).collect();
            let wide = [bell(1.0, 0.0, 20.0)];
            let question = Question {
                prior: &prior, group: &group, forecasts: &forecasts,
                gross: Some(Gross { share, forecast: &wide }),
            };
            let fine = question.information();
            prop_assert!((question.quick_information() - fine).abs() < QUICK_ERROR);
            let mut odds = vec![0.0; 4];
            for (p, g) in prior.iter().zip(&group) { odds[*g] += p / prior.iter().sum::<f64>(); }
            prop_assert!(fine <= crate::belief::odds::entropy(&odds) + 1e-12);
        }
    }
}
