//! Notes, entries taken back, and the end of a visit.

use super::Session;
use super::command::{self, CloseOutcome};
use super::error::{ErrorCode, SessionError};
use super::event::{Closed, Event};
use super::view::{EntryAnswer, MovedAnswer};

impl Session {
    /// Words for the log.
    ///
    /// # Errors
    /// `bad-request` for nothing; log errors.
    pub fn note(&mut self, ask: &command::Note) -> Result<EntryAnswer, SessionError> {
        self.going()?;
        if ask.text.trim().is_empty() {
            return Err(SessionError::new(
                ErrorCode::BadRequest,
                "the note is empty",
                "write something in `text`",
            ));
        }
        Ok(EntryAnswer {
            entry: self.record(Event::Note(ask.clone()))?,
        })
    }

    /// An entry that should not count; the log keeps both.
    ///
    /// # Errors
    /// `unknown-entry`: not there, retracted already, or nothing that counts; log errors.
    pub fn retract(&mut self, ask: &command::Retract) -> Result<MovedAnswer, SessionError> {
        self.going()?;
        let refuse = |text: String| {
            Err(SessionError::new(
                ErrorCode::UnknownEntry,
                text,
                "name the `entry` of a complaint, a hold point, a \
                reading, a `cannot`, a repair or a re-test",
            ))
        };
        let Some(record) = self.records.iter().find(|record| record.n == ask.entry) else {
            return refuse(format!("there is no entry {}", ask.entry));
        };
        if self.visit.retracted.contains(&ask.entry) {
            return refuse(format!("entry {} is retracted already", ask.entry));
        }
        match record.event {
            Event::Symptom(_)
            | Event::HoldPoint(_)
            | Event::Reading(_)
            | Event::Cannot(_)
            | Event::Note(_)
            | Event::Repair(_)
            | Event::Recheck(_) => {}
            _ => {
                return refuse(format!(
                    "entry {} ({}) cannot be retracted",
                    ask.entry,
                    record.event.name()
                ));
            }
        }
        let entry = self.record(Event::Retracted(ask.clone()))?;
        Ok(self.moved(entry))
    }

    /// The end of the visit.
    ///
    /// # Errors
    /// `recheck-owed`; log errors.
    pub fn close(&mut self, ask: &command::Close) -> Result<EntryAnswer, SessionError> {
        self.going()?;
        let may_owe = matches!(ask.outcome, CloseOutcome::MadeSafe | CloseOutcome::Referred);
        if !may_owe && !self.visit.owed.is_empty() {
            let owed: Vec<String> = self
                .visit
                .owed
                .iter()
                .map(|key| format!("{} at {}", key.test, key.at))
                .collect();
            return Err(SessionError::new(
                ErrorCode::RecheckOwed,
                format!("re-tests are still owed: {}", owed.join(", ")),
                "take them, or close as `made-safe` or `referred`",
            )
            .with("checks", serde_json::json!(self.visit.owed)));
        }
        let closed = Closed {
            outcome: ask.outcome,
            note: ask.note.clone(),
            lines: self.log.lines() + 1,
        };
        Ok(EntryAnswer {
            entry: self.record(Event::Closed(closed))?,
        })
    }
}
