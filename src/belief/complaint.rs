//! The complaint as evidence: what the person would have noticed under each hypothesis.
//!
//! P(complaint | h) = P(this kind of call | fault kind) · (s + (1 − s) · floor), where s is the share of
//! draws under which a sign of the complaint shows in the solved circuit at the place told.

use super::cloud::{Draws, aim, shown};
use super::model::Model;
use super::nearness::{Near, near};
use super::world::World;
use crate::checks::sign_at;
use crate::faults::Hypothesis;
use crate::knowledge::{Hookup, Setup, Sign, SymptomRow};
use crate::network::{Outcome, QuickSolver, Values};
use crate::numeric::special::{ln, normal_quantile};
use crate::quantity::Word;

/// A complaint as told.
#[derive(Clone, Debug, PartialEq)]
pub struct Complaint {
    /// Symptom kind.
    pub kind: String,
    /// Where, if told.
    pub at: Option<String>,
    /// When (`always`, `rain`, …), if told.
    pub when: Option<String>,
    /// With which equipment, if told.
    pub with: Option<String>,
    /// Log entry.
    pub entry: u64,
}

/// Least probability of a complaint under any cause: people call for reasons of their own.
const LEAST: f64 = 0.004;

/// The signs of a complaint that fit its place, filled.
fn signs(model: &Model, row: &SymptomRow, complaint: &Complaint) -> Vec<(Sign, Setup, Hookup)> {
    let Some(at) = &complaint.at else {
        return Vec::new();
    };
    row.signs
        .iter()
        .filter(|s| {
            s.when.is_empty() || complaint.when.as_ref().is_some_and(|w| s.when.contains(w))
        })
        .filter_map(|s| {
            let (mut setup, hookup) = sign_at(&model.site, &s.at, at, &s.setup, &s.hookup)?;
            if let Some(with) = &complaint.with
                && !setup.on.contains(with)
            {
                setup.on.push(with.clone());
            }
            Some((s.clone(), setup, hookup))
        })
        .collect()
}

fn shows(sign: &Sign, outcome: Outcome) -> bool {
    match outcome {
        Outcome::Number(x) => {
            sign.above.is_some_and(|a| x > a) || sign.below.is_some_and(|b| x < b)
        }
        Outcome::Word(w) => {
            let word = match w {
                Word::Trips => "trips",
                Word::NoTrip => "no trip",
                Word::Dims => "dims",
                Word::Brightens => "brightens",
                Word::Holds => "holds",
                _ => "",
            };
            sign.word.as_deref() == Some(word)
        }
    }
}

/// Log probability of a complaint under a hypothesis; `draws` of the prior, the first `n` of them.
pub fn log_probability(
    model: &Model,
    world: &mut World,
    hypothesis: Option<&Hypothesis>,
    complaint: &Complaint,
    draws: &Draws,
    n: usize,
) -> f64 {
    let Some(row) = model.knowledge.symptom(&complaint.kind) else {
        return 0.0;
    };
    let table = match hypothesis {
        None => row.nothing_wrong,
        // Of two causes, either may be the one complained of.
        Some(h) => {
            1.0 - h
                .kinds
                .iter()
                .zip(&h.faults)
                .filter_map(|(&k, fault)| Some((model.knowledge.faults.get(k)?, fault)))
                .map(|(k, fault)| {
                    let p = k.complaints.get(&complaint.kind).copied().unwrap_or(0.0);
                    1.0 - p * place_factor(model, row, complaint, &fault.at)
                })
                .product::<f64>()
        }
    };
    let signs = signs(model, row, complaint);
    let factor = if signs.is_empty() || hypothesis.is_none() || !world.edited {
        // Nothing to simulate: a kind without a circuit, a complaint without a place.
        1.0
    } else {
        let share = share(model, world, &signs, draws, n);
        share + (1.0 - share) * row.floor
    };
    ln((table * factor).max(LEAST))
}

/// How much less likely a complaint that points at its own cause is where the fault is elsewhere.
fn place_factor(model: &Model, row: &SymptomRow, complaint: &Complaint, fault: &str) -> f64 {
    match (row.elsewhere, &complaint.at) {
        (Some(elsewhere), Some(told)) => match near(&model.site, fault, told) {
            Near::Here => 1.0,
            Near::Around => elsewhere.sqrt(),
            Near::Away => elsewhere,
        },
        _ => 1.0,
    }
}

fn share(
    model: &Model,
    world: &mut World,
    signs: &[(Sign, Setup, Hookup)],
    draws: &Draws,
    n: usize,
) -> f64 {
    let n = n.min(draws.n).max(1);
    let own = world.unknowns.len();
    let aims: Vec<_> = signs
        .iter()
        .map(|(s, setup, hookup)| (s, aim(world, setup, hookup), world.shows(setup.provoke)))
        .collect();
    let mut total = 0.0;
    for i in 0..n {
        // Fault values at the middles of equal shares, in an order of their own per unknown.
        let z: Vec<f64> = (0..own)
            .map(|k| normal_quantile((((i * (2 * k + 5) + k) % n) as f64 + 0.5) / n as f64))
            .collect();
        world.set(&z);
        let values = Values {
            theta: draws.theta(i),
            common: &model.network.common,
        };
        let solver = QuickSolver::new(&world.wiring, values);
        let mut miss: f64 = 1.0;
        for (sign, aim, p) in &aims {
            if let Some(aim) = aim
                && shows(sign, shown(&solver, aim).outcome)
            {
                // An intermittent fault has had many occasions before the call.
                miss = miss.min(1.0 - p.sqrt());
            }
        }
        total += 1.0 - miss;
    }
    total / n as f64
}
