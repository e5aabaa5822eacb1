//! A complaint: what it owes at once, and what it makes likely.

use super::Session;
use super::command;
use super::error::{ErrorCode, SessionError};
use super::event::Event;
use super::view::MovedAnswer;
use crate::safety::warnings;
use crate::site::{Feed, Site, place};

/// Ids of every breaker: circuits and submains.
fn breakers(site: &Site) -> impl Iterator<Item = String> + '_ {
    site.boards.iter().flat_map(|board| {
        let submain = match board.feed {
            Feed::Submain { .. } => Some(format!("{}.breaker", board.id)),
            Feed::Service => None,
        };
        let own = board
            .circuits
            .iter()
            .map(|circuit| format!("{}.breaker", circuit.id));
        submain.into_iter().chain(own)
    })
}

/// Every place of the classes, by id.
fn ids(site: &Site, classes: &[String]) -> Vec<String> {
    let each = |class: &String| match class.as_str() {
        "breaker" => breakers(site).collect::<Vec<_>>(),
        class => place::places(site, class)
            .into_iter()
            .map(|place| place.id)
            .collect(),
    };
    classes.iter().flat_map(each).collect()
}

impl Session {
    /// A complaint.
    ///
    /// # Errors
    /// `unknown-word` for its kind, `unknown-place` for where or with what; log errors.
    pub fn symptom(&mut self, ask: &command::Symptom) -> Result<MovedAnswer, SessionError> {
        self.going()?;
        let engine = std::sync::Arc::clone(&self.visit.engine);
        let Some(row) = engine.knowledge().symptom(&ask.kind) else {
            let all = engine
                .knowledge()
                .symptoms
                .iter()
                .map(|row| row.kind.as_str());
            return Err(SessionError::unknown(
                ErrorCode::UnknownWord,
                "symptom",
                &ask.kind,
                all,
            ));
        };
        if let Some(at) = &ask.at {
            let all = ids(engine.site(), &row.at);
            if !all.contains(at) {
                let what = format!("place for `{}` (it is at: {})", row.kind, row.at.join(", "));
                let all = all.iter().map(String::as_str);
                return Err(SessionError::unknown(
                    ErrorCode::UnknownPlace,
                    &what,
                    at,
                    all,
                ));
            }
        }
        if let Some(with) = ask.detail.as_ref().and_then(|detail| detail.with.as_ref())
            && engine.site().equipment_index(with).is_none()
        {
            let all = engine
                .site()
                .equipment
                .iter()
                .map(|equipment| equipment.id.as_str());
            return Err(SessionError::unknown(
                ErrorCode::UnknownPlace,
                "equipment",
                with,
                all,
            ));
        }
        let entry = self.record(Event::Symptom(ask.clone()))?;
        let mut answer = self.moved(entry);
        answer.warnings = Some(warnings(row, &engine.knowledge().warnings));
        Ok(answer)
    }
}
