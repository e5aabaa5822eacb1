//! What to do next: thinking that ends by the clock, and is counted so that a replay thinks as long.

use super::Session;
use super::clock::Deadline;
use super::command;
use super::error::SessionError;
use super::event::{Advised, Event, TestAt};
use super::view::{AdviceView, AdviseAnswer};

/// Tests advised when nobody says how many.
const USUAL_COUNT: usize = 3;

/// Milliseconds of thinking when nobody says how long.
const USUAL_MS: u64 = 500;

impl Session {
    /// The tests worth most now, behind their hold points.
    ///
    /// # Errors
    /// Log errors.
    pub fn advise(&mut self, ask: &command::Advise) -> Result<AdviseAnswer, SessionError> {
        self.going()?;
        let count = ask.count.unwrap_or(USUAL_COUNT).max(1);
        let deadline = Deadline::in_ms(Some(ask.within_ms.unwrap_or(USUAL_MS)));
        let before = self.visit.passes;
        let passes = self.visit.think(|| deadline.has_time());
        let advice = self.visit.advice(count);
        let key = |a: &AdviceView| TestAt {
            test: a.test.test.clone(),
            at: a.test.at.clone(),
        };
        let tests: Vec<TestAt> = advice.iter().map(key).collect();
        let advised = Advised {
            count,
            within_ms: ask.within_ms,
            passes,
            advice: tests.clone(),
        };
        let entry = match self.record(Event::Advised(advised)) {
            Ok(entry) => entry,
            Err(error) => {
                // Thinking that the log does not know of must not count.
                self.visit.forget_passes(before);
                return Err(error);
            }
        };
        self.shown = tests;
        let verdict = self.note_verdict();
        let why = match (advice.first(), &verdict) {
            (_, Some(verdict)) => verdict.why.clone(),
            (Some(first), None) => first.why.clone(),
            (None, None) if self.visit.available.is_empty() => {
                "no test can be done with this kit; name more instruments, or refer".to_owned()
            }
            (None, None) => "no available test would change what to do".to_owned(),
        };
        Ok(AdviseAnswer {
            entry,
            advice,
            verdict,
            why,
        })
    }
}
