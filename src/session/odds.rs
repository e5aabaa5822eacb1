//! The odds, what speaks for each cause, and the verdict that stands.

use super::Session;
use super::command;
use super::error::{ErrorCode, SessionError};
use super::event::{Event, VerdictStands};
use super::view::{EvidenceAnswer, EvidenceRow, MovedAnswer, OddsView, RankingAnswer, VerdictView};

/// Hypotheses shown when nobody says how many.
pub const USUAL_COUNT: usize = 10;

impl Session {
    /// The odds now.
    pub fn ranking(&mut self, ask: &command::Ranking) -> RankingAnswer {
        let odds = self.visit.mind.odds(ask.count.unwrap_or(USUAL_COUNT));
        RankingAnswer {
            odds,
            verdict: self.note_verdict(),
        }
    }

    /// The odds now, nothing noted: so many hypotheses.
    pub fn odds(&self, count: usize) -> OddsView {
        self.visit.mind.odds(count)
    }

    /// Bits that each entry gives for a hypothesis against the rest.
    ///
    /// # Errors
    /// `unknown-word` with the nearest hypotheses.
    pub fn evidence(&self, ask: &command::Evidence) -> Result<EvidenceAnswer, SessionError> {
        let Some(bits) = self.visit.mind.evidence(&ask.hypothesis) else {
            let all = self.visit.mind.ids();
            let all = all.iter().map(String::as_str);
            return Err(SessionError::unknown(
                ErrorCode::UnknownWord,
                "hypothesis",
                &ask.hypothesis,
                all,
            ));
        };
        let row = |(entry, bits): (u64, f64)| {
            let event = &self.records.iter().find(|record| record.n == entry)?.event;
            let (test, at) = match event {
                Event::Symptom(symptom) => {
                    (symptom.kind.clone(), symptom.at.clone().unwrap_or_default())
                }
                Event::Reading(reading) => (reading.test.clone(), reading.at.clone()),
                Event::Recheck(reading) => (reading.test.clone(), reading.at.clone()),
                Event::HoldPoint(point) => (point.point.clone(), String::new()),
                Event::Repair(repair) => {
                    let at: Vec<&str> = repair
                        .faults
                        .iter()
                        .map(|fault| fault.at.as_str())
                        .collect();
                    ("repair".to_owned(), at.join("+"))
                }
                _ => return None,
            };
            Some(EvidenceRow {
                entry,
                test,
                at,
                bits,
            })
        };
        Ok(EvidenceAnswer {
            evidence: bits.into_iter().filter_map(row).collect(),
        })
    }

    /// The answer to what moved the odds.
    pub(super) fn moved(&mut self, entry: u64) -> MovedAnswer {
        let verdict = self.note_verdict();
        let odds = self.visit.mind.odds(USUAL_COUNT);
        MovedAnswer {
            entry,
            odds,
            verdict,
            warnings: None,
            parsed: None,
            surprise: None,
            checks: None,
        }
    }

    /// The verdict now; logged when it is another than before.
    pub(super) fn note_verdict(&mut self) -> Option<VerdictView> {
        // Before any reading nothing is acted on, and planning would only cost time.
        let read = !self.visit.mind.belief().readings().is_empty();
        let verdict = if read {
            self.visit.verdict_view()
        } else {
            None
        };
        let logged = self
            .visit
            .verdict
            .as_ref()
            .map(|v| (v.group.clone(), v.action.clone()));
        let now = verdict
            .as_ref()
            .map(|v| (Some(v.group.clone()), v.action.clone()));
        let fell = (None, String::new());
        if now.clone().unwrap_or(fell.clone()) != logged.unwrap_or(fell) && !self.visit.closed {
            let stands = VerdictStands {
                group: now.as_ref().and_then(|(group, _)| group.clone()),
                p: verdict.as_ref().map_or(0.0, |v| v.p),
                action: now.map(|(_, action)| action).unwrap_or_default(),
            };
            // The verdict follows from the events before it: when the disk has no room for this line,
            // what was just recorded must still be answered for.
            let _ = self.record(Event::Verdict(stands));
        }
        verdict
    }
}
