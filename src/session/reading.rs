//! Readings: understood, let in by the gate, questioned once when nothing explains them, counted.

use super::Session;
use super::command;
use super::engine::Engine;
use super::error::{ErrorCode, SessionError};
use super::event::{Event, ReadingTaken};
use super::view::{CannotAnswer, MovedAnswer, RankingAnswer};
use crate::checks::Check;
use crate::quantity::{Parsed, ParsedValue, Word, format_parsed};

/// Under this tail probability a reading is held back once (contract §6).
const CREDIBLE: f64 = 1e-4;

impl Session {
    /// Whether a test can be done with this kit and was not said to be impossible.
    pub(super) fn must_be_available(&self, check: &Check) -> Result<(), SessionError> {
        let Some(why) = self.visit.why_not(check) else {
            return Ok(());
        };
        let hint = if self.visit.cannot.contains_key(&Engine::key(check)) {
            "send `cannot` with `undo` true if it can be done after all"
        } else {
            "take another test: `advise` names those that this kit can do"
        };
        let text = format!("`{}` at `{}` is not available: {why}", check.test, check.at);
        Err(SessionError::new(ErrorCode::Unavailable, text, hint))
    }

    /// What an instrument showed.
    ///
    /// # Errors
    /// `unknown-test`, `unknown-place` (setup), `bad-reading`, `wrong-unit`, `unavailable`,
    /// `hold-point-open`, `not-credible`; log errors.
    pub fn reading(&mut self, ask: &command::Reading) -> Result<MovedAnswer, SessionError> {
        self.going()?;
        let check = self
            .visit
            .as_taken(&ask.test, &ask.at, ask.setup.as_ref())?;
        let parsed = self.visit.engine.understand(&check, &ask.value)?;
        if matches!(
            parsed.value,
            ParsedValue::Word {
                word: Word::Unknown
            }
        ) {
            let why = Some("not known".to_owned());
            let cannot = command::Cannot {
                test: ask.test.clone(),
                at: ask.at.clone(),
                why,
                undo: None,
            };
            let entry = self.record(Event::Cannot(cannot))?;
            let mut answer = self.moved(entry);
            answer.parsed = Some(parsed);
            return Ok(answer);
        }
        self.must_be_available(&check)?;
        self.let_in(&check)?;
        let surprise = self.visit.mind.surprise(&check, &parsed);
        if surprise < CREDIBLE && ask.confirm != Some(true) {
            return Err(not_credible(&check, &parsed, surprise));
        }
        let entry = self.record(Event::Reading(ReadingTaken {
            test: ask.test.clone(),
            at: ask.at.clone(),
            value: ask.value.clone(),
            setup: ask.setup.clone(),
            confirm: ask.confirm,
            parsed,
        }))?;
        let mut answer = self.moved(entry);
        answer.parsed = Some(parsed);
        answer.surprise = Some(surprise);
        Ok(answer)
    }

    /// Asks the gate; a refusal for open points puts the test in hand.
    pub(super) fn let_in(&mut self, check: &Check) -> Result<(), SessionError> {
        let allowed = self.visit.may_read(check);
        if matches!(&allowed, Err(error) if error.code == ErrorCode::HoldPointOpen) {
            let key = Engine::key(check);
            self.shown.retain(|shown| *shown != key);
            self.shown.insert(0, key);
        }
        allowed
    }

    /// The odds as a reading would leave them; nothing is recorded.
    ///
    /// # Errors
    /// `unknown-test`, `bad-reading`, `wrong-unit`.
    pub fn whatif(&self, ask: &command::WhatIf) -> Result<RankingAnswer, SessionError> {
        let check = self.visit.engine.check(&ask.test, &ask.at)?;
        let parsed = self.visit.engine.understand(check, &ask.value)?;
        if matches!(
            parsed.value,
            ParsedValue::Word {
                word: Word::Unknown
            }
        ) {
            return Ok(RankingAnswer {
                odds: self.visit.mind.odds(super::odds::USUAL_COUNT),
                verdict: None,
            });
        }
        Ok(RankingAnswer {
            odds: self
                .visit
                .mind
                .whatif(check, &parsed, super::odds::USUAL_COUNT),
            verdict: None,
        })
    }

    /// A test that cannot be done here, or can after all.
    ///
    /// # Errors
    /// `unknown-test`; `unknown-entry` where there is nothing to undo; log errors.
    pub fn cannot(&mut self, ask: &command::Cannot) -> Result<CannotAnswer, SessionError> {
        self.going()?;
        let key = Engine::key(self.visit.engine.check(&ask.test, &ask.at)?);
        if ask.undo == Some(true) && !self.visit.cannot.contains_key(&key) {
            let text = format!(
                "`{}` at `{}` was not said to be impossible",
                ask.test, ask.at
            );
            return Err(SessionError::new(
                ErrorCode::UnknownEntry,
                text,
                "there is nothing to undo",
            ));
        }
        let entry = self.record(Event::Cannot(ask.clone()))?;
        Ok(CannotAnswer {
            entry,
            verdict: self.note_verdict(),
        })
    }
}

fn not_credible(check: &Check, parsed: &Parsed, surprise: f64) -> SessionError {
    SessionError::new(
        ErrorCode::NotCredible,
        format!("nothing that is still likely explains {} in `{}` at `{}`", format_parsed(parsed), check.test, check.at),
        "was another range or unit meant, another place, another setup? If it stands, send it again with `confirm` true",
    )
    .with("surprise", surprise)
    .with("parsed", serde_json::json!(parsed))
}
