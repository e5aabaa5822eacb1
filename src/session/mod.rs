//! A visit: commands in, events to the log, state and views out.
//!
//! Every change is an event: decided, appended to the log and synced, then applied. The state is the fold
//! of the events, so a log that is read again gives the same odds.

mod advise;
pub mod chain;
pub mod clock;
pub mod command;
pub mod electrician;
mod end;
pub mod engine;
mod error;
pub mod event;
mod expected;
mod explain;
pub mod hidden;
mod hold;
pub mod limits;
pub mod log;
mod mind;
mod odds;
mod open;
pub mod path;
mod planning;
pub mod predict;
mod reading;
pub mod rechecks;
mod repair;
mod shadow;
mod symptom;
mod tests_list;
pub mod view;
mod visit;
pub mod vocabulary;

#[cfg(test)]
mod visit_tests;

use std::sync::Arc;

use chain::Record;
pub use clock::Clock;
pub use engine::Engine;
pub use error::{ErrorCode, SessionError};
pub use event::Event;
use event::{Opened, TestAt};
pub use log::Log;
pub use vocabulary::vocabulary;

use crate::belief::Belief;
use crate::checks::Check;
use crate::safety::State;
use visit::Visit;

/// One visit to one site.
#[derive(Debug)]
pub struct Session {
    clock: Clock,
    log: Log,
    opened: Opened,
    records: Vec<Record>,
    visit: Visit,
    /// Tests whose hold points a face was last shown, the one in hand first.
    shown: Vec<TestAt>,
}

impl Session {
    /// What the visit stands on.
    pub fn engine(&self) -> &Arc<Engine> {
        &self.visit.engine
    }

    /// Every event so far.
    pub fn records(&self) -> &[Record] {
        &self.records
    }

    /// The belief as it stands: hypotheses with their circuits, for showing where currents go.
    pub fn belief(&self) -> &Belief {
        self.visit.mind.belief()
    }

    /// What is open, lifted and proved.
    pub fn safety(&self) -> &State {
        &self.visit.safety
    }

    /// Why a test cannot be done; `None`: it can.
    pub fn why_not(&self, check: &Check) -> Option<String> {
        self.visit.why_not(check)
    }

    /// Whether an entry was retracted.
    pub fn is_retracted(&self, entry: u64) -> bool {
        self.visit.retracted.contains(&entry)
    }

    /// Re-tests owed.
    pub fn owed(&self) -> &[TestAt] {
        &self.visit.owed
    }

    /// Whether the visit has ended.
    pub fn is_closed(&self) -> bool {
        self.visit.closed
    }

    /// Refuses what a visit that has ended cannot take.
    fn going(&self) -> Result<(), SessionError> {
        if self.visit.closed {
            let hint = "`resume` goes on with it; `open` begins another";
            return Err(SessionError::new(
                ErrorCode::NoSession,
                "this visit is closed",
                hint,
            ));
        }
        Ok(())
    }

    /// Appends an event, syncs it, then applies it; its entry.
    fn record(&mut self, event: Event) -> Result<u64, SessionError> {
        let time = self.clock.now();
        let n = self.log.append(time, &event)?;
        let record = Record { n, time, event };
        let applied = self.visit.apply(&record, &self.records);
        self.records.push(record);
        applied.map(|()| n)
    }

    /// Thinks everything through again from the events: after a fault of this program.
    ///
    /// # Errors
    /// `internal`: an event that cannot be applied.
    pub fn rebuild(&mut self) -> Result<(), SessionError> {
        let mut visit = Visit::new(Arc::clone(&self.visit.engine), self.opened.seed)?;
        for (done, record) in self.records.iter().enumerate() {
            visit.apply(record, self.records.get(..done).unwrap_or_default())?;
        }
        self.visit = visit;
        Ok(())
    }
}
