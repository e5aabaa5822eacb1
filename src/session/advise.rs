//! What to do next: thinking that ends by the clock, and is counted so that a replay thinks as long.

use super::Session;
use super::clock::Deadline;
use super::command;
use super::engine::Engine;
use super::error::SessionError;
use super::event::{Advised, Event};
use super::view::AdviseAnswer;

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
        let passes = u64::from(deadline.has_time());
        let cleared = self.visit.cleared();
        let (setup, place) = (self.visit.safety.setup().clone(), self.visit.place.clone());
        let advice = self.visit.mind.advise(&cleared, &setup, &place, count);
        let tests: Vec<_> = advice
            .iter()
            .map(|a| super::event::TestAt {
                test: a.test.test.clone(),
                at: a.test.at.clone(),
            })
            .collect();
        let event = Event::Advised(Advised {
            count,
            within_ms: ask.within_ms,
            passes,
            advice: tests.clone(),
        });
        // The thinking has been done: it is not applied a second time.
        let time = self.clock.now();
        let n = match self.log.append(time, &event) {
            Ok(n) => n,
            Err(error) => {
                self.rebuild()?;
                return Err(error.into());
            }
        };
        self.records.push(super::chain::Record { n, time, event });
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
            entry: n,
            advice,
            verdict,
            why,
        })
    }

    /// Whether a test was among those last advised.
    pub fn is_in_hand(&self, test: &str, at: &str) -> bool {
        self.visit
            .engine
            .check(test, at)
            .is_ok_and(|check| self.shown.contains(&Engine::key(check)))
    }
}
