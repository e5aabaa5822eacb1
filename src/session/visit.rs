//! The visit as a fold over its events: each one moves odds, safety and the lists of what is owed.

use std::collections::{BTreeMap, BTreeSet};
use std::sync::Arc;

use super::chain::Record;
use super::command;
use super::engine::Engine;
use super::error::{ErrorCode, SessionError};
use super::event::{Event, TestAt, VerdictStands};
use super::hold;
use super::limits::place_of;
use super::mind::Mind;
use super::planning::Planned;
use super::rechecks;
use super::view::VerdictView;
use crate::checks::{Check, energised};
use crate::knowledge::{Hookup, Setup};
use crate::network::Unnamed;
use crate::quantity::{Parsed, ParsedValue, Word};
use crate::safety::{
    Gate, Ground, HoldPoint, ReadingStop, State, StateEvent, Verdict, is_standing,
};

/// Everything that changes.
#[derive(Debug)]
pub struct Visit {
    /// What it stands on.
    pub engine: Arc<Engine>,
    /// Odds and plan.
    pub mind: Mind,
    /// Setup, proofs, points.
    pub safety: State,
    /// Where the person stands.
    pub place: String,
    /// Tests that cannot be done, and why.
    pub cannot: BTreeMap<TestAt, String>,
    /// Re-tests owed.
    pub owed: Vec<TestAt>,
    /// Tests that can be done with this kit, `cannot` taken off: those that may give a proof.
    pub available: Vec<Check>,
    /// Entries that no longer count.
    pub retracted: BTreeSet<u64>,
    /// The verdict as last logged.
    pub verdict: Option<VerdictStands>,
    /// Whether it has ended.
    pub closed: bool,
    /// Passes of thinking about this state.
    pub passes: u64,
    /// The verdict as last worked out; a hold point that was done leaves it as it is.
    pub standing: Option<Option<VerdictView>>,
    /// The plan of this state, once worked out.
    pub planned: Option<Planned>,
}

impl Visit {
    /// The visit as it begins.
    ///
    /// # Errors
    /// As [`Mind::new`].
    pub fn new(engine: Arc<Engine>, seed: u64) -> Result<Self, SessionError> {
        let mind = Mind::new(Arc::clone(&engine), seed)?;
        let mut visit = Self {
            engine,
            mind,
            safety: State::new(),
            place: String::new(),
            cannot: BTreeMap::new(),
            owed: Vec::new(),
            available: Vec::new(),
            retracted: BTreeSet::new(),
            verdict: None,
            closed: false,
            passes: 1,
            standing: None,
            planned: None,
        };
        visit.renew_available();
        Ok(visit)
    }

    fn renew_available(&mut self) {
        let engine = &self.engine;
        let can = |check: &&Check| {
            engine.why_not(check).is_none() && !self.cannot.contains_key(&Engine::key(check))
        };
        self.available = engine.checks().iter().filter(can).cloned().collect();
    }

    /// A test as it was taken: in its own setup, or in another.
    ///
    /// # Errors
    /// `unknown-test`; `unknown-place` or `bad-request` for the setup.
    pub fn as_taken(
        &self,
        test: &str,
        at: &str,
        setup: Option<&Setup>,
    ) -> Result<Check, SessionError> {
        let mut check = self.engine.check(test, at)?.clone();
        if let Some(setup) = setup {
            self.engine
                .model
                .network
                .circuit
                .switching(setup, Unnamed::AsFound)?;
            check.setup = setup.clone();
            check.energised = energised(&check.setup, &check.hookup, self.engine.site());
        }
        Ok(check)
    }

    /// Why a test is not available; `None`: it is.
    pub fn why_not(&self, check: &Check) -> Option<String> {
        let said = self
            .cannot
            .get(&Engine::key(check))
            .map(|why| format!("it was said that it cannot be done: {why}"));
        said.or_else(|| self.engine.why_not(check))
    }

    /// The ground that the rules of safety stand on.
    pub(super) fn ground<'a>(engine: &'a Engine, available: &'a [Check]) -> Ground<'a> {
        Ground {
            site: engine.site(),
            numbers: &engine.knowledge().safety,
            catalogue: available,
        }
    }

    /// What the gate says of a test as things stand.
    pub fn clear(&mut self, check: &Check) -> Verdict {
        let gate = Gate::new(Self::ground(&self.engine, &self.available));
        let safety = &self.safety;
        self.mind
            .with_hazards(|hazards| gate.clear(check, safety, Some(hazards)))
    }

    /// What the rules alone say of a test: for lists that nobody acts on.
    pub fn clear_by_rules(&self, check: &Check) -> Verdict {
        Gate::new(Self::ground(&self.engine, &self.available)).clear(check, &self.safety, None)
    }

    /// Whether a reading of the test may be taken in.
    ///
    /// # Errors
    /// `hold-point-open` with the points; `unavailable` with the reason.
    pub fn may_read(&mut self, check: &Check) -> Result<(), SessionError> {
        let gate = Gate::new(Self::ground(&self.engine, &self.available));
        let safety = &self.safety;
        let stop = self
            .mind
            .with_hazards(|hazards| gate.may_read(check, safety, Some(hazards)).err());
        match stop {
            None => Ok(()),
            Some(ReadingStop::Open(points)) => Err(hold::open_error(check, &points)),
            Some(ReadingStop::Held(why)) => Err(SessionError::new(
                ErrorCode::Unavailable,
                format!(
                    "a hold point of `{}` at `{}` cannot be done: {why}",
                    check.test, check.at
                ),
                "take another test, or do the hold point after all",
            )),
            Some(ReadingStop::Refused(refusal)) => Err(SessionError::new(
                ErrorCode::Unavailable,
                refusal.reason,
                refusal
                    .safer
                    .unwrap_or_else(|| "take another test".to_owned()),
            )),
        }
    }

    /// The hold point of an id as things stand.
    pub fn point(&mut self, id: &str) -> Option<HoldPoint> {
        let gate = Gate::new(Self::ground(&self.engine, &self.available));
        let safety = &self.safety;
        self.mind
            .with_hazards(|hazards| gate.point(id, safety, Some(hazards)))
    }

    /// Folds one event in; `earlier` are the events before it.
    ///
    /// # Errors
    /// `internal`: an event that this site or this knowledge cannot have had.
    pub fn apply(&mut self, record: &Record, earlier: &[Record]) -> Result<(), SessionError> {
        let entry = record.n;
        if !matches!(
            record.event,
            Event::Note(_) | Event::Advised(_) | Event::Verdict(_)
        ) {
            self.passes = 1;
            self.planned = None;
            if !Self::only_a_point(&record.event) {
                self.standing = None;
            }
        }
        match &record.event {
            Event::Opened(_) | Event::Note(_) => {}
            Event::Advised(advised) if advised.passes != self.passes => {
                self.passes = advised.passes;
                self.planned = None;
            }
            Event::Advised(_) => {}
            Event::Symptom(symptom) => {
                self.mind.symptom(entry, symptom);
                if self
                    .engine
                    .knowledge()
                    .symptom(&symptom.kind)
                    .is_some_and(is_standing)
                {
                    self.note(&StateEvent::Standing);
                }
            }
            Event::HoldPoint(point) => self.apply_point(entry, point)?,
            Event::Reading(reading) => {
                let check = self.as_taken(&reading.test, &reading.at, reading.setup.as_ref())?;
                self.take(entry, &check, &reading.parsed);
            }
            Event::Recheck(reading) => {
                let check = self.as_taken(&reading.test, &reading.at, None)?;
                self.take(entry, &check, &reading.parsed);
            }
            Event::Retracted(retract) => {
                self.retracted.insert(retract.entry);
                self.mind.retract(retract.entry);
                self.note(&StateEvent::Retracted(retract.entry));
                self.cannot.clear();
                self.owed.clear();
                for record in earlier {
                    self.list(record);
                }
                self.renew_available();
            }
            Event::Verdict(verdict) => self.verdict = Some(verdict.clone()),
            Event::Repair(repair) => self.apply_repair(entry, repair),
            Event::Cannot(_) => {}
            Event::Closed(_) => self.closed = true,
            Event::Resumed(_) => {
                self.closed = false;
                self.note(&StateEvent::Resumed);
            }
        }
        self.list(record);
        if matches!(record.event, Event::Cannot(_)) {
            self.renew_available();
        }
        Ok(())
    }

    /// Whether an event is a hold point done, with nothing read: it moves no odds and closes no test.
    fn only_a_point(event: &Event) -> bool {
        matches!(event, Event::HoldPoint(point) if point.done && point.readings.as_ref().is_none_or(BTreeMap::is_empty))
    }

    fn note(&mut self, event: &StateEvent<'_>) {
        self.safety
            .apply(&Self::ground(&self.engine, &self.available), event);
    }

    /// A reading was accepted.
    fn take(&mut self, entry: u64, check: &Check, parsed: &Parsed) {
        self.mind.observe(entry, check, parsed);
        self.note(&StateEvent::Reading {
            check,
            value: &parsed.value,
            entry,
        });
        // An instrument that trips the RCD ahead of it leaves it open.
        let tripped = matches!(parsed.value, ParsedValue::Word { word: Word::Trips });
        let ahead = || {
            place_of(&self.engine, &check.at)
                .and_then(|place| place.rcd(self.engine.site()).map(|(_, id)| id.to_owned()))
        };
        if tripped
            && !matches!(check.hookup, Hookup::Holds { .. })
            && let Some(device) = ahead()
        {
            self.note(&StateEvent::FoundTripped {
                device: &device,
                entry,
            });
        }
        self.place.clone_from(&check.place);
    }

    fn apply_point(&mut self, entry: u64, said: &command::HoldPoint) -> Result<(), SessionError> {
        if !said.done {
            let why = said.why.as_deref().unwrap_or_default();
            self.note(&StateEvent::PointCannot {
                point: &said.point,
                why,
                entry,
            });
            return Ok(());
        }
        let point = self.point(&said.point).ok_or_else(|| {
            SessionError::new(
                ErrorCode::Internal,
                format!("there is no hold point `{}`", said.point),
                "",
            )
        })?;
        let parsed = hold::readings(&self.engine, &point, said.readings.as_ref())?;
        let volts = hold::volts(&parsed);
        if State::judge(&point, &volts).is_ok() {
            self.note(&StateEvent::PointDone {
                point: &point,
                volts: &volts,
                entry,
            });
        } else {
            for (check, parsed) in hold::as_checks(&self.engine, &point, &parsed) {
                self.mind.observe(entry, &check, &parsed);
            }
        }
        Ok(())
    }

    fn apply_repair(&mut self, entry: u64, repair: &command::Repair) {
        let done = repair.done.unwrap_or(repair.found);
        self.mind.repair(entry, &repair.faults, repair.found, done);
        if repair.found && done {
            let places: Vec<String> = repair.faults.iter().map(|fault| fault.at.clone()).collect();
            let theirs = |kind: &str| {
                self.engine
                    .knowledge()
                    .fault(kind)
                    .is_some_and(|row| row.repair.action == "call-network")
            };
            let by_network = repair.faults.iter().any(|fault| theirs(&fault.kind));
            self.note(&StateEvent::Repaired {
                places: &places,
                by_network,
            });
        }
    }

    /// What an event does to the lists of what cannot be done and what is owed.
    fn list(&mut self, record: &Record) {
        if self.retracted.contains(&record.n) {
            return;
        }
        match &record.event {
            Event::Cannot(said) => {
                let key = TestAt {
                    test: said.test.clone(),
                    at: said.at.clone(),
                };
                if said.undo == Some(true) {
                    self.cannot.remove(&key);
                } else {
                    self.cannot.insert(
                        key,
                        said.why
                            .clone()
                            .unwrap_or_else(|| "no reason given".to_owned()),
                    );
                }
            }
            Event::Repair(repair) if repair.found && repair.done.unwrap_or(true) => {
                for key in rechecks::owed(&self.engine, &repair.faults) {
                    if !self.owed.contains(&key) {
                        self.owed.push(key);
                    }
                }
            }
            Event::Recheck(taken) if taken.result != "outside" => {
                self.owed
                    .retain(|key| key.test != taken.test || key.at != taken.at);
            }
            _ => {}
        }
    }
}
