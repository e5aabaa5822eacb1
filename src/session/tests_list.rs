//! Every test at every place, and where the visit stands: open, lifted, proved, live.

use std::collections::{BTreeMap, BTreeSet};

use super::Session;
use super::view::{ProvedView, StateAnswer, TestView, TestsAnswer};
use super::visit::Visit;
use crate::checks::Check;
use crate::knowledge::Setup;
use crate::safety::Verdict;
use crate::safety::places::conductors_at;

impl Visit {
    /// A test as an answer shows it, its minutes from a state and a place.
    pub fn test_view(&self, check: &Check, from: &Setup, place: &str) -> TestView {
        let effort = &self.engine.knowledge().effort;
        let why_not = self
            .why_not(check)
            .or_else(|| match self.clear_by_rules(check) {
                Verdict::Cleared(_) => None,
                Verdict::Held { why, .. } => Some(format!("a hold point cannot be done: {why}")),
                Verdict::Refused(refusal) => Some(match refusal.safer {
                    Some(safer) => format!("{}; {safer}", refusal.reason),
                    None => refusal.reason,
                }),
            });
        TestView {
            test: check.test.clone(),
            at: check.at.clone(),
            name: check.name.clone(),
            text: check.text.clone(),
            setup: check.setup.clone(),
            hookup: check.hookup.clone(),
            unit: check.unit.clone(),
            minutes: check.minutes_from(from, place, self.engine.site(), effort),
            energised: check.energised,
            available: why_not.is_none(),
            why_not,
        }
    }
}

impl Session {
    /// Every test at every place; minutes from the installation in service.
    pub fn tests(&self) -> TestsAnswer {
        let service = Setup::default();
        let view = |check| self.visit.test_view(check, &service, "");
        TestsAnswer {
            tests: self.visit.engine.checks().iter().map(view).collect(),
        }
    }

    /// What is open, lifted, proved dead, live, owed.
    pub fn state(&self) -> StateAnswer {
        let safety = &self.visit.safety;
        let site = self.visit.engine.site();
        let mut proved: BTreeMap<(String, u64), Vec<String>> = BTreeMap::new();
        let mut dead: BTreeSet<&str> = BTreeSet::new();
        for proof in safety.proved_dead() {
            proved
                .entry((proof.at.clone(), proof.entry))
                .or_default()
                .push(proof.against.clone());
            if proof.against == "soil" {
                dead.insert(&proof.at);
            }
        }
        let boards = site.boards.iter().flat_map(|board| {
            std::iter::once(board.id.clone())
                .chain(board.circuits.iter().map(|circuit| circuit.id.clone()))
        });
        // Live until every conductor there is proved dead, to the stake too.
        let is_dead = |place: &String| {
            conductors_at(site, place)
                .is_some_and(|all| all.all().all(|terminal| dead.contains(terminal.as_str())))
        };
        StateAnswer {
            open: safety.open(),
            lifted: safety.lifted().to_vec(),
            proved: proved
                .into_iter()
                .map(|((at, entry), against)| ProvedView { at, against, entry })
                .collect(),
            live: std::iter::once("service".to_owned())
                .chain(boards)
                .filter(|place| !is_dead(place))
                .collect(),
            checks: self.visit.owed.clone(),
        }
    }
}
