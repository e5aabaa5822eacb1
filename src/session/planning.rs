//! The plan of one state of the visit: what safety lets through of what may tell most, and whether to stop.

use super::engine::Engine;
use super::explain::{expects, faults_of, says, verdict_why};
use super::rechecks::nearest_check;
use super::view::{AdviceView, CouldBe, VerdictView};
use super::visit::Visit;
use crate::checks::Check;
use crate::faults::UNLISTED;
use crate::plan::{Advice, Now, Plan, Verdict, minutes_of, plan, shortlist, suspect, verdict};
use crate::quantity::format_parsed;
use crate::safety::{Cleared, Gate};

/// Cleared checks that a plan weighs in each pass: those that may tell most come first.
const WEIGHED: usize = 32;

/// Passes after which what is left can hardly tell anything.
const MOST_PASSES: u64 = 8;

/// Leading hypotheses whose confirming looks are weighed too.
const CONFIRMED: usize = 5;

/// All that was worked out of one state.
#[derive(Debug)]
pub struct Planned {
    /// What safety let through.
    pub cleared: Vec<Cleared<Check>>,
    /// Bits, minutes, forecasts.
    pub plan: Plan,
    /// Whether to stop.
    pub verdict: Option<Verdict>,
    /// Whether everything available was weighed.
    pub whole: bool,
    /// A reading that is probably wrong: entry, and index in `cleared` of the test that repeats it.
    pub again: Option<(u64, usize)>,
}

impl Visit {
    /// The plan as things stand, worked out once for each state.
    pub fn planned(&mut self) -> &Planned {
        let planned = match self.planned.take() {
            Some(planned) => planned,
            None => {
                let planned = self.work_out();
                self.standing = Some(self.view_of(&planned));
                planned
            }
        };
        self.planned.insert(planned)
    }

    /// Thinks on while there is time: each pass weighs as many checks more. Passes made since the state
    /// last changed.
    pub fn think(&mut self, has_time: impl Fn() -> bool) -> u64 {
        while !self.planned().whole && self.passes < MOST_PASSES && has_time() {
            self.passes += 1;
            self.planned = None;
        }
        self.passes
    }

    /// Goes back to the passes that the log knows of.
    pub fn forget_passes(&mut self, passes: u64) {
        if self.passes != passes {
            self.passes = passes;
            self.planned = None;
        }
    }

    fn work_out(&mut self) -> Planned {
        let engine = std::sync::Arc::clone(&self.engine);
        let doubtful = suspect(self.mind.belief());
        let chosen = self.candidates(
            &engine,
            doubtful
                .as_ref()
                .map(|(_, test, at, _)| (test.as_str(), at.as_str())),
        );
        let gate = Gate::new(Self::ground(&engine, &self.available));
        let safety = &self.safety;
        let most = WEIGHED.saturating_mul(usize::try_from(self.passes).unwrap_or(usize::MAX));
        let cleared: Vec<Cleared<Check>> = self.mind.with_hazards(|hazards| {
            chosen
                .iter()
                .filter_map(|check| gate.clear(check, safety, Some(hazards)).cleared())
                .take(most)
                .collect()
        });
        let whole = cleared.len() < most;
        let now = Now {
            setup: self.safety.setup(),
            place: &self.place,
        };
        let belief = self.mind.belief();
        let plan = plan(belief, &cleared, now);
        let verdict = verdict(belief, &plan, &cleared);
        let again = doubtful.and_then(|(entry, test, at, _)| {
            let same =
                |cleared: &Cleared<Check>| cleared.get().key() == (test.as_str(), at.as_str());
            Some((entry, cleared.iter().position(same)?))
        });
        Planned {
            cleared,
            plan,
            verdict,
            whole,
            again,
        }
    }

    /// Checks to be weighed: the one to repeat, the looks that would confirm the leaders, then what may
    /// tell most a minute.
    fn candidates(&self, engine: &Engine, again: Option<(&str, &str)>) -> Vec<Check> {
        let belief = self.mind.belief();
        let worth: Vec<&Check> = self
            .available
            .iter()
            .filter(|check| !check.recheck_only)
            .collect();
        let effort = &engine.knowledge().effort;
        let from = |check: &&Check| {
            check.minutes_from(self.safety.setup(), &self.place, engine.site(), effort)
        };
        let minutes: Vec<f64> = worth.iter().map(from).collect();
        let order = shortlist(belief, &worth, &minutes, worth.len());
        let repeat = again.and_then(|key| worth.iter().copied().find(|check| check.key() == key));
        let leaders = belief
            .odds()
            .hypotheses
            .iter()
            .take(CONFIRMED)
            .filter_map(|(index, _)| belief.candidates().get(*index));
        let confirming = leaders.flat_map(faults_of).filter_map(|fault| {
            let test = engine
                .knowledge()
                .fault(&fault.kind)?
                .repair
                .confirm
                .as_ref()?;
            let check = nearest_check(engine, test, fault)?;
            worth.iter().copied().find(|own| own.key() == check.key())
        });
        let ranked = order
            .into_iter()
            .filter_map(|index| worth.get(index).copied());
        let mut all: Vec<Check> = Vec::new();
        for check in repeat.into_iter().chain(confirming).chain(ranked) {
            if !all.iter().any(|known| known.key() == check.key()) {
                all.push(check.clone());
            }
        }
        all
    }

    /// The verdict as an answer shows it.
    pub fn verdict_view(&mut self) -> Option<VerdictView> {
        if self.standing.is_none() {
            self.planned();
        }
        self.standing.clone().flatten()
    }

    fn view_of(&self, planned: &Planned) -> Option<VerdictView> {
        let engine = &self.engine;
        let found = planned.verdict.as_ref()?;
        let candidate = self.mind.belief().candidates().get(found.candidate)?;
        let confirm = found
            .confirm
            .and_then(|row| engine.checks().get(row))
            .map(Engine::key);
        let could_be = found.could_be.iter().map(|(group, p)| CouldBe {
            group: group.clone(),
            p: *p,
        });
        let faults = if found.group == UNLISTED {
            Vec::new()
        } else {
            faults_of(candidate).to_vec()
        };
        Some(VerdictView {
            group: found.group.clone(),
            faults,
            p: found.p,
            action: found.action.clone(),
            why: verdict_why(engine, found, candidate),
            confirm,
            could_also_be: could_be.collect(),
        })
    }

    /// The best `count` tests as an answer shows them: the one to repeat first, then the standing
    /// verdict's confirming look, then by worth.
    pub fn advice(&mut self, count: usize) -> Vec<AdviceView> {
        let engine = std::sync::Arc::clone(&self.engine);
        self.planned();
        let Some(planned) = self.planned.as_ref() else {
            return Vec::new();
        };
        let confirm = planned
            .verdict
            .as_ref()
            .and_then(|v| v.confirm)
            .and_then(|row| engine.checks().get(row));
        let confirm = confirm.and_then(|c| {
            planned
                .cleared
                .iter()
                .position(|own| own.get().key() == c.key())
        });
        let again = planned.again.map(|(_, index)| index);
        let mut order: Vec<usize> = Vec::new();
        for index in again
            .into_iter()
            .chain(confirm)
            .chain(planned.plan.advice.iter().map(|a| a.check))
        {
            if !order.contains(&index) {
                order.push(index);
            }
        }
        order
            .into_iter()
            .take(count)
            .filter_map(|index| self.advice_view(&engine, planned, index))
            .collect()
    }

    fn advice_view(&self, engine: &Engine, planned: &Planned, index: usize) -> Option<AdviceView> {
        let belief = self.mind.belief();
        let cleared = planned.cleared.get(index)?;
        let advice = planned
            .plan
            .advice
            .iter()
            .find(|advice| advice.check == index);
        let now = Now {
            setup: self.safety.setup(),
            place: &self.place,
        };
        let minutes =
            advice.map_or_else(|| minutes_of(belief, cleared, now), |advice| advice.minutes);
        let bits = advice.map_or(0.0, |advice| advice.bits);
        let mut test = self.test_view(cleared.get(), self.safety.setup(), &self.place);
        test.minutes = minutes;
        let column = planned
            .plan
            .forecasts
            .get(index)
            .map(Vec::as_slice)
            .unwrap_or_default();
        let why = match planned.again {
            Some((entry, repeat)) if repeat == index => {
                let said = self
                    .mind
                    .told_in(entry)
                    .map(|parsed| format_parsed(&parsed))
                    .unwrap_or_default();
                format!("entry {entry} ({said}) is probably misread or mistaken: take it again")
            }
            _ => self.advice_why(engine, planned, advice, index),
        };
        Some(AdviceView {
            test,
            bits,
            bits_per_minute: advice.map_or(0.0, |advice| advice.rate),
            hold_points: cleared.points().to_vec(),
            hazard: cleared.hazard().map(str::to_owned),
            expects: expects(belief, column),
            why,
        })
    }

    fn advice_why(
        &self,
        engine: &Engine,
        planned: &Planned,
        advice: Option<&Advice>,
        index: usize,
    ) -> String {
        let Some(advice) = advice else {
            return "it would confirm the verdict".to_owned();
        };
        let parts = match &advice.parts {
            Some((a, b)) => format!(
                "it parts {} from {}",
                self.group_says(engine, a),
                self.group_says(engine, b)
            ),
            None => "it moves the odds".to_owned(),
        };
        let bits = format!("{:.2} bits in {:.0} min", advice.bits, advice.minutes);
        let with = advice
            .with
            .and_then(|other| planned.cleared.get(other))
            .map(|other| {
                format!(
                    ", most of it together with {} at {}",
                    other.get().test,
                    other.get().at
                )
            });
        let next = planned
            .plan
            .advice
            .iter()
            .find(|other| other.check != index && other.rate <= advice.rate);
        let next = next.map(|other| {
            format!(
                "; the next best gives {:.2} in {:.0}",
                other.bits, other.minutes
            )
        });
        format!(
            "{parts}: {bits}{}{}",
            with.unwrap_or_default(),
            next.unwrap_or_default()
        )
    }

    /// A repair group as a person says it: by its likeliest hypothesis.
    fn group_says(&self, engine: &Engine, group: &str) -> String {
        let belief = self.mind.belief();
        let leader = belief
            .odds()
            .hypotheses
            .iter()
            .filter_map(|(index, _)| belief.candidates().get(*index));
        let leader = leader
            .into_iter()
            .find(|candidate| candidate.group() == group);
        says(engine, group, leader)
    }
}
