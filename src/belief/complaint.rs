//! The complaint as evidence: what the person would have noticed under each hypothesis.
//!
//! P(complaint | h) = P(this kind of call | fault kind) · place · time · (s + (1 − s) · floor), where s is
//! the share of draws under which a sign of the complaint shows in the solved circuit at the place told.

use super::cloud::{Draws, aim, shown};
use super::model::Model;
use super::nearness::{Near, near};
use super::world::World;
use crate::checks::sign_at;
use crate::faults::Hypothesis;
use crate::knowledge::{FaultKind, Hookup, Setup, Sign, SymptomRow, words};
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
const LEAST: f64 = 0.0003;

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
        None => row.nothing_wrong * anywhere(row, complaint),
        // Of two causes, either may be the one complained of.
        Some(h) => {
            1.0 - h
                .kinds
                .iter()
                .zip(&h.faults)
                .filter_map(|(&k, fault)| Some((model.knowledge.faults.get(k)?, fault)))
                .map(|(kind, fault)| {
                    let p = kind.complaints.get(&complaint.kind).copied().unwrap_or(0.0);
                    let place = place_factor(model, row, complaint, kind, &fault.at);
                    1.0 - p * place * when_factor(kind, complaint)
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

/// Log probability of a complaint under an unlisted cause.
pub fn unlisted(model: &Model, complaint: &Complaint) -> f64 {
    match model.knowledge.symptom(&complaint.kind) {
        Some(row) => ln((row.unlisted * anywhere(row, complaint)).max(1e-9)),
        None => 0.0,
    }
}

/// Factor of the place told where the cause may be anywhere.
fn anywhere(row: &SymptomRow, complaint: &Complaint) -> f64 {
    match (row.elsewhere, &complaint.at) {
        (Some(elsewhere), Some(_)) => elsewhere.sqrt(),
        _ => 1.0,
    }
}

/// How much less likely the place told is where the fault is elsewhere.
fn place_factor(
    model: &Model,
    row: &SymptomRow,
    complaint: &Complaint,
    kind: &FaultKind,
    fault: &str,
) -> f64 {
    let Some(told) = &complaint.at else {
        return 1.0;
    };
    let away = row.elsewhere.unwrap_or(1.0);
    let away = if kind.edits.is_empty() {
        away.min(row.floor)
    } else {
        away
    };
    match near(&model.site, fault, told) {
        Near::Here => 1.0,
        Near::Around => away.sqrt(),
        Near::Away => away,
    }
}

/// How much likelier than an even share the time told is under a kind.
fn when_factor(kind: &FaultKind, complaint: &Complaint) -> f64 {
    let even = 1.0 / words::WHEN.len() as f64;
    match &complaint.when {
        Some(when) => kind.when.get(when).copied().unwrap_or(even) / even,
        None => 1.0,
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
