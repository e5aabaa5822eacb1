//! Odds and plan of a visit: the only place that asks belief and plan.

use std::sync::Arc;

use super::command;
use super::engine::Engine;
use super::error::SessionError;
use super::shadow::Shadow;
use super::view::{GroupRow, OddsView, RankRow};
use crate::belief::{Belief, Complaint, Reading};
use crate::checks::Check;
use crate::faults::{Fault, repair_text};
use crate::quantity::Parsed;
use crate::safety::Hazards;

/// What belief was told, by entry, so that any of it can be taken back.
#[derive(Clone, Debug)]
enum Told {
    Complaint(Complaint),
    Reading(Box<Reading>),
    Repair {
        singles: Vec<usize>,
        found: bool,
        done: bool,
    },
}

/// Odds and plan.
#[derive(Debug)]
pub struct Mind {
    engine: Arc<Engine>,
    seed: u64,
    belief: Belief,
    told: Vec<(u64, Told)>,
    shadow: Shadow,
}

impl Mind {
    /// The odds at an installation that calls.
    ///
    /// # Errors
    /// `internal`: knowledge that lacks what safety stands on.
    pub fn new(engine: Arc<Engine>, seed: u64) -> Result<Self, SessionError> {
        let belief = Belief::new(Arc::clone(&engine.model), seed);
        let shadow = Shadow::new(&engine)?;
        Ok(Self {
            engine,
            seed,
            belief,
            told: Vec::new(),
            shadow,
        })
    }

    /// The belief itself.
    pub fn belief(&self) -> &Belief {
        &self.belief
    }

    /// How many hypotheses the odds start from.
    pub fn hypotheses(&self) -> usize {
        self.engine.model.space.singles.len()
    }

    /// Ids of all hypotheses.
    pub fn ids(&self) -> Vec<String> {
        self.belief
            .candidates()
            .iter()
            .map(|candidate| candidate.id().to_owned())
            .collect()
    }

    /// A complaint.
    pub fn symptom(&mut self, entry: u64, symptom: &command::Symptom) {
        let detail = symptom.detail.clone().unwrap_or_default();
        self.tell(
            entry,
            Told::Complaint(Complaint {
                kind: symptom.kind.clone(),
                at: symptom.at.clone(),
                when: detail.when.map(|when| when.as_str().to_owned()),
                with: detail.with,
                entry,
            }),
        );
    }

    /// A reading, in the setup of the check as taken.
    pub fn observe(&mut self, entry: u64, check: &Check, parsed: &Parsed) {
        self.tell(
            entry,
            Told::Reading(Box::new(as_reading(entry, check, parsed))),
        );
    }

    /// A repair, or a place looked at in vain.
    pub fn repair(&mut self, entry: u64, faults: &[Fault], found: bool, done: bool) {
        let singles = faults
            .iter()
            .filter_map(|fault| self.single(fault))
            .collect();
        self.tell(
            entry,
            Told::Repair {
                singles,
                found,
                done,
            },
        );
        self.shadow.clear();
    }

    /// The single hypothesis that a fault is, its value left aside.
    fn single(&self, fault: &Fault) -> Option<usize> {
        let singles = &self.engine.model.space.singles;
        let of = |hypothesis: &crate::faults::Hypothesis| match hypothesis.faults.as_slice() {
            [one] => Some(one.clone()),
            _ => None,
        };
        let same = |one: &Fault| one.kind == fault.kind && one.at == fault.at;
        let exact =
            |one: &Fault| same(one) && one.to == fault.to && one.conductor == fault.conductor;
        let find = |fits: &dyn Fn(&Fault) -> bool| {
            singles
                .iter()
                .position(|h| of(h).is_some_and(|one| fits(&one)))
        };
        find(&exact).or_else(|| find(&same))
    }

    fn tell(&mut self, entry: u64, told: Told) {
        take(&mut self.belief, entry, &told);
        self.told.push((entry, told));
    }

    /// Takes everything of an entry back.
    pub fn retract(&mut self, entry: u64) {
        let repair = self
            .told
            .iter()
            .any(|(n, told)| *n == entry && matches!(told, Told::Repair { .. }));
        self.told.retain(|(n, _)| *n != entry);
        if repair {
            self.belief = Belief::new(Arc::clone(&self.engine.model), self.seed);
            for (n, told) in &self.told {
                take(&mut self.belief, *n, told);
            }
        } else {
            self.belief.retract(entry);
        }
        self.shadow.clear();
    }

    /// Tail probability of a reading under the mixture.
    pub fn surprise(&self, check: &Check, parsed: &Parsed) -> f64 {
        self.belief.surprise(&as_reading(0, check, parsed))
    }

    /// The odds, at most `count` hypotheses.
    pub fn odds(&self, count: usize) -> OddsView {
        view(&self.engine, &self.belief, count)
    }

    /// The odds as a reading would leave them.
    pub fn whatif(&self, check: &Check, parsed: &Parsed, count: usize) -> OddsView {
        let mut belief = self.belief.clone();
        belief.observe(as_reading(u64::MAX, check, parsed));
        view(&self.engine, &belief, count)
    }

    /// Bits of each entry for a hypothesis against the rest; `None`: there is no such hypothesis.
    pub fn evidence(&self, hypothesis: &str) -> Option<Vec<(u64, f64)>> {
        let candidate = self.belief.find(hypothesis)?;
        Some(
            self.belief
                .evidence(candidate)
                .into_iter()
                .map(|(entry, _, _, bits)| (entry, bits))
                .collect(),
        )
    }

    /// What was read in an entry.
    pub fn told_in(&self, entry: u64) -> Option<Parsed> {
        self.told.iter().find_map(|(n, told)| match told {
            Told::Reading(reading) if *n == entry => Some(reading.parsed),
            _ => None,
        })
    }

    /// Lets the gate simulate under what is credible now.
    pub fn with_hazards<R>(&mut self, ask: impl FnOnce(&mut Hazards<'_>) -> R) -> R {
        self.shadow.with(&self.engine, &self.belief, ask)
    }
}

fn as_reading(entry: u64, check: &Check, parsed: &Parsed) -> Reading {
    Reading {
        entry,
        test: check.test.clone(),
        at: check.at.clone(),
        setup: check.setup.clone(),
        hookup: check.hookup.clone(),
        parsed: *parsed,
        epoch: 0,
    }
}

fn take(belief: &mut Belief, entry: u64, told: &Told) {
    match told {
        Told::Complaint(complaint) => belief.complain(complaint.clone()),
        Told::Reading(reading) => belief.observe((**reading).clone()),
        Told::Repair {
            singles,
            found,
            done,
        } => belief.repair(entry, singles, *found, *done),
    }
}

fn view(engine: &Engine, belief: &Belief, count: usize) -> OddsView {
    let odds = belief.odds();
    let candidate = |index: usize| belief.candidates().get(index);
    let row = |&(index, p): &(usize, f64)| {
        let candidate = candidate(index)?;
        let faults = candidate
            .hypothesis
            .as_ref()
            .map(|h| h.faults.clone())
            .unwrap_or_default();
        Some(RankRow {
            hypothesis: candidate.id().to_owned(),
            group: candidate.group().to_owned(),
            faults,
            p,
        })
    };
    let group = |(group, p): &(String, f64)| {
        let leader = odds
            .hypotheses
            .iter()
            .filter_map(|(index, _)| candidate(*index))
            .find(|c| c.group() == group);
        let faults = leader
            .and_then(|c| c.hypothesis.as_ref())
            .map(|h| h.faults.as_slice())
            .unwrap_or_default();
        let repair =
            repair_text(&engine.model.knowledge, &engine.model.site, faults).unwrap_or_default();
        GroupRow {
            group: group.clone(),
            p: *p,
            repair,
        }
    };
    OddsView {
        ranking: odds.hypotheses.iter().filter_map(row).take(count).collect(),
        groups: odds.groups.iter().take(count).map(group).collect(),
        nothing_wrong: odds.nothing_wrong,
        unlisted: odds.unlisted,
        not_examined: odds.not_examined,
    }
}
