//! What each check would read under each hypothesis still alive: mixtures for the plan.

use rayon::prelude::*;

use super::cloud::{BY_CHANCE, Cloud, aim, shown};
use super::model::Model;
use super::reading::Reading;
use super::sight::{core, spread, unit_coordinate};
use super::state::{Belief, Candidate, Cause};
use super::world::World;
use crate::checks::Check;
use crate::knowledge::Hookup;
use crate::network::{Outcome, QuickSolver, Values};
use crate::numeric::special::{self, exp, ln, log_sum_exp, normal_cdf};
use crate::numeric::stats::systematic;
use crate::quantity::{Parsed, ParsedValue, Word};

/// One weighted way in which a check may read.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Way {
    /// Share.
    pub weight: f64,
    /// What shows without error.
    pub outcome: Outcome,
    /// Spread of the reading, SI.
    pub sd: f64,
}

/// A check's forecast under a hypothesis: weights sum to one.
#[derive(Clone, Debug, Default, PartialEq)]
pub struct Forecast {
    /// Ways.
    pub ways: Vec<Way>,
}

/// Forecasts of several checks under the hypotheses that hold nearly all of the odds.
#[derive(Clone, Debug, Default)]
pub struct ForecastTable {
    /// Candidates, by index.
    pub candidates: Vec<usize>,
    /// Their probabilities, summing to one.
    pub p: Vec<f64>,
    /// `forecasts[check][candidate]`.
    pub forecasts: Vec<Vec<Forecast>>,
}

/// Draws of a forecast.
const FORECAST_DRAWS: usize = 16;

impl Forecast {
    /// Smoothing of the draws' numbers, in the coordinate of unit error: half their spread. A handful of
    /// draws is not a set of spikes, and spikes would tell bits that are not there (Silverman's rule, 1986:
    /// 1.06 σ n^(−1/5), halved for spreads of several modes).
    pub fn bandwidth(&self, row: &crate::knowledge::ErrorRow) -> f64 {
        let mut sums = (0.0, 0.0, 0.0, 0.0);
        for way in &self.ways {
            if let Outcome::Number(y) = way.outcome {
                let u = unit_coordinate(row, y);
                sums.0 += way.weight;
                sums.1 += way.weight * u;
                sums.2 += way.weight * u * u;
                sums.3 += 1.0;
            }
        }
        if sums.0 <= 0.0 || sums.3 < 2.0 {
            return 0.0;
        }
        let mean = sums.1 / sums.0;
        let sd = (sums.2 / sums.0 - mean * mean).max(0.0).sqrt();
        0.53 * sd * special::pow(sums.3, -0.2)
    }

    /// Quantile of a numeric forecast, SI; `None` if words hold most of it.
    pub fn quantile(&self, at: f64) -> Option<f64> {
        let numbers: Vec<&Way> = self
            .ways
            .iter()
            .filter(|w| matches!(w.outcome, Outcome::Number(_)))
            .collect();
        let total: f64 = numbers.iter().map(|w| w.weight).sum();
        if total < 0.5 {
            return None;
        }
        let mut sorted: Vec<(f64, f64)> = numbers
            .iter()
            .filter_map(|w| match w.outcome {
                Outcome::Number(x) => Some((x, w.weight)),
                Outcome::Word(_) => None,
            })
            .collect();
        sorted.sort_by(|a, b| a.0.total_cmp(&b.0));
        let mut sum = 0.0;
        for (x, w) in &sorted {
            sum += w / total;
            if sum >= at {
                return Some(*x);
            }
        }
        sorted.last().map(|s| s.0)
    }

    /// Words and their probabilities.
    pub fn words(&self) -> Vec<(Word, f64)> {
        let mut out: Vec<(Word, f64)> = Vec::new();
        for way in &self.ways {
            if let Outcome::Word(word) = way.outcome {
                match out.iter_mut().find(|o| o.0 == word) {
                    Some(o) => o.1 += way.weight,
                    None => out.push((word, way.weight)),
                }
            }
        }
        out.sort_by(|a, b| b.1.total_cmp(&a.1).then(a.0.cmp(&b.0)));
        out
    }
}

/// Forecasts of `checks` under one candidate.
fn of_candidate(model: &Model, c: &Candidate, sound: &World, checks: &[&Check]) -> Vec<Forecast> {
    let cloud: &Cloud = c.cloud();
    let weights = cloud.weights();
    let picks = systematic(&weights, FORECAST_DRAWS, 0.5);
    let mut world = c.world().clone();
    let aims: Vec<_> = checks
        .iter()
        .map(|k| aim(&world, &k.setup, &k.hookup))
        .collect();
    let faint: Vec<Option<_>> = checks
        .iter()
        .map(|k| {
            let shows = world.shows(k.setup.provoke);
            (shows < 1.0 && world.edited).then(|| (shows, aim(sound, &k.setup, &k.hookup)))
        })
        .collect();
    let mut out: Vec<Forecast> = vec![Forecast::default(); checks.len()];
    let share = 1.0 / picks.len().max(1) as f64;
    let mut previous = usize::MAX;
    for pick in picks {
        // Equal draws (heavy weights) need no second solution.
        if pick == previous {
            for (f, faint) in out.iter_mut().zip(&faint) {
                // A fault that comes and goes has two ways to each draw: shown, and not.
                let of_one = if matches!(faint, Some((_, Some(_)))) {
                    2
                } else {
                    1
                };
                let first = f.ways.len().saturating_sub(of_one);
                f.ways.extend_from_within(first..);
            }
            continue;
        }
        previous = pick;
        world.set(cloud.own(pick));
        let values = Values {
            theta: cloud.draws.theta(pick),
            common: &model.network.common,
        };
        let solver = QuickSolver::new(&world.wiring, values);
        let clear = QuickSolver::new(&sound.wiring, values);
        for ((k, check), f) in checks.iter().enumerate().zip(&mut out) {
            if matches!(check.hookup, Hookup::Seen { .. }) {
                continue;
            }
            let Some(aim) = &aims[k] else { continue };
            let Some(row) = model.knowledge.error_of(&check.hookup) else {
                continue;
            };
            let way = |s: super::sight::Shown, weight: f64| {
                let outcome = match s.outcome {
                    Outcome::Number(x) if x >= row.over => Outcome::Word(Word::Open),
                    other => other,
                };
                let sd = match outcome {
                    Outcome::Number(x) => spread(row, x, s.enclosed),
                    Outcome::Word(_) => 0.0,
                };
                Way {
                    weight,
                    outcome,
                    sd,
                }
            };
            match &faint[k] {
                Some((shows, Some(sound_aim))) => {
                    f.ways.push(way(shown(&solver, aim), share * shows));
                    f.ways
                        .push(way(shown(&clear, sound_aim), share * (1.0 - shows)));
                }
                _ => f.ways.push(way(shown(&solver, aim), share)),
            }
        }
    }
    for (check, f) in checks.iter().zip(&mut out) {
        if let Hookup::Seen { at, what } = &check.hookup {
            let miss = world
                .looks
                .iter()
                .filter(|t| t.at == *at && t.what == *what)
                .fold(1.0 - BY_CHANCE, |m, t| m * (1.0 - t.p));
            f.ways = vec![
                Way {
                    weight: 1.0 - miss,
                    outcome: Outcome::Word(Word::Yes),
                    sd: 0.0,
                },
                Way {
                    weight: miss,
                    outcome: Outcome::Word(Word::No),
                    sd: 0.0,
                },
            ];
        } else if let Some(t) = world
            .outcomes
            .iter()
            .find(|t| t.what == check.test && t.at == check.at)
        {
            let word =
                |w: &str| serde_json::from_value(serde_json::Value::String(w.to_owned())).ok();
            if let Some(word) = word(&t.word) {
                for way in &mut f.ways {
                    way.weight *= 1.0 - t.p;
                }
                f.ways.push(Way {
                    weight: t.p,
                    outcome: Outcome::Word(word),
                    sd: 0.0,
                });
            }
        }
    }
    out
}

impl Belief {
    /// Candidates that hold all but `tail` of the odds, at most `most`, unlisted apart.
    pub fn credible(&self, tail: f64, most: usize) -> Vec<(usize, f64)> {
        let mut all: Vec<(usize, f64)> = self.odds().hypotheses.clone();
        if let Some(nothing) = self
            .candidates()
            .iter()
            .position(|c| c.cause == Cause::Nothing)
        {
            all.push((nothing, self.odds().nothing_wrong));
        }
        all.sort_by(|a, b| b.1.total_cmp(&a.1).then(a.0.cmp(&b.0)));
        let mut sum = 0.0;
        let total: f64 = all.iter().map(|a| a.1).sum();
        let mut out = Vec::new();
        for (i, p) in all {
            if sum >= (1.0 - tail) * total || out.len() >= most {
                break;
            }
            sum += p;
            out.push((i, p));
        }
        out
    }

    /// Forecasts of checks under the credible candidates.
    pub fn forecasts(&self, checks: &[&Check], tail: f64, most: usize) -> ForecastTable {
        let credible = self.credible(tail, most);
        let total: f64 = credible.iter().map(|c| c.1).sum();
        let model = self.model().clone();
        let sound = World::sound(&model);
        let columns: Vec<Vec<Forecast>> = credible
            .par_iter()
            .map(|(i, _)| of_candidate(&model, &self.candidates()[*i], &sound, checks))
            .collect();
        let forecasts = (0..checks.len())
            .map(|k| columns.iter().map(|col| col[k].clone()).collect())
            .collect();
        ForecastTable {
            candidates: credible.iter().map(|c| c.0).collect(),
            p: credible.iter().map(|c| c.1 / total.max(1e-300)).collect(),
            forecasts,
        }
    }

    /// Tail probability of a reading under the mixture of all credible hypotheses: how likely one at
    /// least as far from what was expected is. Slips do not count.
    pub fn surprise(&self, reading: &Reading) -> f64 {
        let check = check_of(reading);
        let table = self.forecasts(&[&check], 1e-2, 24);
        let Some(row) = self.model().knowledge.error_of(&reading.hookup) else {
            return 1.0;
        };
        let mut tail = 0.0;
        for (f, p) in table.forecasts.first().into_iter().flatten().zip(&table.p) {
            let smooth = f.bandwidth(row);
            for way in &f.ways {
                tail += p * way.weight * tail_of(way, row, &reading.parsed, smooth);
            }
        }
        tail.clamp(0.0, 1.0)
    }

    /// Log likelihood of a reading under the mixture, for ranking alternatives of unit or range.
    pub fn log_mixture(&self, reading: &Reading) -> f64 {
        let check = check_of(reading);
        let table = self.forecasts(&[&check], 1e-2, 24);
        let Some(row) = self.model().knowledge.error_of(&reading.hookup) else {
            return 0.0;
        };
        let mut terms = Vec::new();
        for (f, p) in table.forecasts.first().into_iter().flatten().zip(&table.p) {
            for way in &f.ways {
                let seen = super::sight::Shown {
                    outcome: way.outcome,
                    enclosed: 0.0,
                };
                terms.push(
                    ln((p * way.weight).max(1e-300)) + core(row, seen, &reading.parsed, 1.0, 0.0),
                );
            }
        }
        log_sum_exp(&terms)
    }
}

fn tail_of(way: &Way, row: &crate::knowledge::ErrorRow, parsed: &Parsed, smooth: f64) -> f64 {
    let a = row.absolute.max(row.resolution / 12f64.sqrt()).max(1e-12);
    let two_sided = |y: f64, mean: f64, sd: f64| {
        let here = (a * a + (row.relative * mean) * (row.relative * mean)).sqrt();
        let width = ((sd / here) * (sd / here) + smooth * smooth).sqrt();
        2.0 * normal_cdf(-((unit_coordinate(row, y) - unit_coordinate(row, mean)) / width).abs())
    };
    let wider = if parsed.rough { 4.0 } else { 1.0 };
    match (way.outcome, parsed.value) {
        (Outcome::Word(Word::Open), ParsedValue::Over { .. }) => 1.0,
        (Outcome::Word(Word::Open), ParsedValue::Value { value }) if value >= 0.5 * row.over => 1.0,
        (Outcome::Word(a), ParsedValue::Word { word }) => f64::from(u8::from(a == word)),
        (Outcome::Number(m), ParsedValue::Value { value }) => two_sided(value, m, way.sd * wider),
        (Outcome::Number(m), ParsedValue::Range { low, high }) => {
            if m >= low && m <= high {
                1.0
            } else {
                two_sided(if m < low { low } else { high }, m, way.sd)
            }
        }
        (Outcome::Number(m), ParsedValue::Over { over }) => normal_cdf((m - over) / way.sd),
        (Outcome::Number(m), ParsedValue::Under { under }) => normal_cdf((under - m) / way.sd),
        (Outcome::Number(m), ParsedValue::Word { word: Word::Open }) => {
            exp(ln(normal_cdf((m - row.over) / way.sd).max(1e-300)))
        }
        _ => 0.0,
    }
}

/// A reading's setup and hookup as a check, for forecasting it.
fn check_of(reading: &Reading) -> Check {
    Check {
        test: reading.test.clone(),
        at: reading.at.clone(),
        form: 0,
        name: String::new(),
        text: String::new(),
        setup: reading.setup.clone(),
        hookup: reading.hookup.clone(),
        unit: String::new(),
        minutes: 0.0,
        energised: true,
        kit: Vec::new(),
        hold: Vec::new(),
        needs: Vec::new(),
        proves: Vec::new(),
        hazard: None,
        limits: Vec::new(),
        recheck_only: false,
        staged: false,
        place: String::new(),
    }
}
