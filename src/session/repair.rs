//! What was found and put right, and the re-tests that this owes.

use super::Session;
use super::command;
use super::engine::Engine;
use super::error::{ErrorCode, SessionError};
use super::event::{Event, RecheckTaken, TestAt};
use super::limits::{judge, limits};
use super::view::{CheckOwed, MovedAnswer, RecheckAnswer};
use crate::faults::describe;
use crate::knowledge::Marker;
use crate::quantity::{ParsedValue, Word};
use crate::safety::Verdict;

fn marker_word(marker: Marker) -> &'static str {
    match marker {
        Marker::Seen => "seen",
        Marker::Memory => "memory",
        Marker::Computed => "computed",
        Marker::Guess => "guess",
        Marker::Mixed => "mixed",
    }
}

impl Session {
    /// A repair, or a place looked at in vain.
    ///
    /// # Errors
    /// `bad-request` (no faults, or done without having been found), `unknown-word`, `unknown-place`;
    /// log errors.
    pub fn repair(&mut self, ask: &command::Repair) -> Result<MovedAnswer, SessionError> {
        self.going()?;
        if ask.faults.is_empty() {
            let hint = "name the faults that were looked for, as `ranking` writes them";
            return Err(SessionError::new(
                ErrorCode::BadRequest,
                "`repair` names no faults",
                hint,
            ));
        }
        if !ask.found && ask.done == Some(true) {
            let hint =
                "what is not there cannot be put right: leave `done` out, or say that it was found";
            return Err(SessionError::new(
                ErrorCode::BadRequest,
                "`repair` is done but not found",
                hint,
            ));
        }
        let engine = &self.visit.engine;
        describe(engine.knowledge(), engine.site(), &ask.faults)?;
        let entry = self.record(Event::Repair(ask.clone()))?;
        let checks = self.checks_owed();
        let mut answer = self.moved(entry);
        answer.checks = Some(checks);
        Ok(answer)
    }

    /// The re-tests owed, each with its limits and its hold points.
    pub fn checks_owed(&mut self) -> Vec<CheckOwed> {
        let owed: Vec<TestAt> = self.visit.owed.clone();
        owed.iter().filter_map(|key| self.check_owed(key)).collect()
    }

    /// A test with its hold points as things stand; it becomes the one in hand.
    ///
    /// # Errors
    /// `unknown-test`; `unavailable` with the reason and the safer way.
    pub fn take_up(&mut self, test: &str, at: &str) -> Result<CheckOwed, SessionError> {
        let check = self.visit.engine.check(test, at)?.clone();
        self.must_be_available(&check)?;
        if let Verdict::Refused(refusal) = self.visit.clear(&check) {
            let safer = refusal.safer;
            return Err(SessionError::new(
                ErrorCode::Unavailable,
                refusal.reason,
                safer.unwrap_or_else(|| "take another test".to_owned()),
            ));
        }
        let key = Engine::key(&check);
        self.shown.retain(|shown| *shown != key);
        self.shown.insert(0, key.clone());
        self.check_owed(&key).ok_or_else(|| {
            SessionError::new(
                ErrorCode::Internal,
                format!("`{test}` is gone"),
                "take another test",
            )
        })
    }

    fn check_owed(&mut self, key: &TestAt) -> Option<CheckOwed> {
        let check = self.visit.engine.check(&key.test, &key.at).ok()?.clone();
        let view = self
            .visit
            .test_view(&check, self.visit.safety.setup(), &self.visit.place);
        let (hold_points, hazard) = match self.visit.clear(&check) {
            Verdict::Cleared(cleared) => (
                cleared.points().to_vec(),
                cleared.hazard().map(str::to_owned),
            ),
            Verdict::Held { points, .. } => (points, None),
            Verdict::Refused(_) => (Vec::new(), None),
        };
        let limits = limits(&self.visit.engine, &check);
        let joined = |part: fn(&super::limits::Limit) -> String| {
            let mut parts: Vec<String> = limits.iter().map(part).collect();
            parts.dedup();
            (!parts.is_empty()).then(|| parts.join("; "))
        };
        Some(CheckOwed {
            test: view,
            hold_points,
            hazard,
            limit: joined(|limit| limit.text.clone()),
            source: joined(|limit| limit.source.clone()),
            marker: joined(|limit| marker_word(limit.marker).to_owned()),
        })
    }

    /// A re-test.
    ///
    /// # Errors
    /// As a reading, but never held back: what a re-test shows, it shows.
    pub fn recheck(&mut self, ask: &command::Recheck) -> Result<RecheckAnswer, SessionError> {
        self.going()?;
        let check = self.visit.as_taken(&ask.test, &ask.at, None)?;
        let parsed = self.visit.engine.understand(&check, &ask.value)?;
        if matches!(
            parsed.value,
            ParsedValue::Word {
                word: Word::Unknown
            }
        ) {
            let text = "a re-test that was not taken has no result";
            return Err(SessionError::new(
                ErrorCode::BadReading,
                text,
                "close as `made-safe` or `referred` instead",
            ));
        }
        self.must_be_available(&check)?;
        self.let_in(&check)?;
        let rules_named = self.visit.engine.site().rules.is_some();
        let result = judge(&limits(&self.visit.engine, &check), rules_named, &parsed)
            .as_str()
            .to_owned();
        let entry = self.record(Event::Recheck(RecheckTaken {
            test: ask.test.clone(),
            at: ask.at.clone(),
            value: ask.value.clone(),
            parsed,
            result: result.clone(),
        }))?;
        Ok(RecheckAnswer {
            entry,
            parsed,
            result,
        })
    }
}
