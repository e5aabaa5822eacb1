//! What moves the visit: complaints, readings, what cannot be done, entries taken back, the end.

use super::super::text::{Meaning, Page, Text};
use super::super::words::{in_100, sentence};
use super::desk::{Answer, Desk, Hand, MANY};
use super::points::no_hand;
use super::typed::part;
use crate::quantity::nearest;
use crate::session::command::{self, CloseOutcome, Detail, When};
use crate::session::event::TestAt;
use crate::session::{ErrorCode, SessionError};
use crate::site::spots;

/// Tests that are asked for at once, so that `other` has something to offer.
const COUNT: usize = 5;

pub(super) fn usage(message: impl Into<String>, hint: impl Into<String>) -> SessionError {
    SessionError::new(ErrorCode::BadRequest, message, hint)
}

impl Desk {
    /// Carries out a command.
    pub(super) fn command(&mut self, name: &str, words: &[String]) -> Answer {
        match name {
            "symptom" => self.symptom(words),
            "advise"
                if words
                    .iter()
                    .any(|word| word.trim_start_matches('-') == "more") =>
            {
                self.more()
            }
            "advise" => self.advise_anew(),
            "other" => self.other(),
            "take" => self.take_test(words),
            "why" => self.why_page(),
            "hold" | "done" => self.hold(words),
            "read" => self.read(words),
            "sure" => self.sure(),
            "cannot" => self.cannot(words),
            "whatif" => self.whatif(words),
            "verdict" => Ok(self.verdict_page()),
            "repair" => self.repair(words),
            "recheck" => self.recheck(words),
            "retract" => self.retract(words),
            "note" => self.note(words),
            "close" => self.close(words),
            other => self.list_command(other, words),
        }
    }

    /// Asks for advice again, and shows the screen.
    pub(super) fn advise_anew(&mut self) -> Answer {
        let owed = self.session.checks_owed();
        let ask = command::Advise {
            count: Some(COUNT),
            within_ms: None,
        };
        let answer = self.session.advise(&ask)?;
        self.advice = answer.advice;
        self.why = answer.why;
        self.verdict = answer.verdict;
        self.questioned = None;
        self.hand = match (owed.first(), self.advice.first()) {
            (Some(check), _) => Some(Hand::owed(check)),
            (None, Some(advice)) => Some(Hand::advised(advice)),
            (None, None) => None,
        };
        Ok(self.screen())
    }

    /// The hold points of the test in hand as they stand now.
    pub(super) fn renew_hand(&mut self) -> Result<(), SessionError> {
        let Some(hand) = &self.hand else {
            return Ok(());
        };
        match self
            .session
            .take_up(&hand.test.test.clone(), &hand.test.at.clone())
        {
            Ok(check) => {
                if let Some(hand) = &mut self.hand {
                    hand.points = check.hold_points;
                    hand.hazard = check.hazard;
                }
                Ok(())
            }
            Err(error) if error.code == ErrorCode::Unavailable => {
                self.advise_anew()?;
                Ok(())
            }
            Err(error) => Err(error),
        }
    }

    fn symptom(&mut self, words: &[String]) -> Answer {
        const KEYS: [&str; 4] = ["at", "when", "with", "text"];
        let Some(kind) = words.first() else {
            return Err(usage(
                "no complaint was named",
                "symptom KIND at PLACE; Tab completes both",
            ));
        };
        if let Some(stray) = words.get(1).filter(|word| !KEYS.contains(&word.as_str())) {
            return Err(usage(
                format!("`{stray}` stands where `at`, `when`, `with` or `text` belongs"),
                "symptom KIND at PLACE",
            ));
        }
        let when = part(words, "when", &KEYS)
            .map(|word| read_when(&word))
            .transpose()?;
        let with = part(words, "with", &KEYS).map(|text| self.resolve(&text));
        // Words of the person's own run to the end of the line.
        let text = words
            .iter()
            .position(|word| word == "text")
            .and_then(|at| words.get(at + 1..));
        let text = text
            .map(|rest| rest.join(" "))
            .filter(|text| !text.is_empty());
        let detail = Detail { when, with, text };
        let ask = command::Symptom {
            kind: kind.clone(),
            at: part(words, "at", &KEYS).map(|text| self.resolve(&text)),
            detail: (detail != Detail::default()).then_some(detail),
        };
        let answer = self.session.symptom(&ask)?;
        let said = self.names().symptom(&ask.kind, ask.at.as_deref());
        let mut page = Page::new();
        page.line(
            Text::new()
                .plain(sentence(&said))
                .dim(format!(" (entry {})", answer.entry)),
        );
        page.extend(self.show_odds());
        page.blank().extend(self.advise_anew()?);
        Ok(page)
    }

    /// The id of a place that was named by its id, or by its name as far as that is clear.
    fn resolve(&self, text: &str) -> String {
        let engine = self.session.engine();
        let all = spots(engine.site());
        let breakers = engine
            .site()
            .boards
            .iter()
            .flat_map(|b| &b.circuits)
            .map(|c| format!("{}.breaker", c.id));
        let ids: Vec<String> = all.into_keys().chain(breakers).collect();
        if ids.iter().any(|id| id == text) {
            return text.to_owned();
        }
        let wanted = text.to_lowercase();
        let named = |test: &dyn Fn(&str) -> bool| {
            let mut found = ids
                .iter()
                .filter(|id| test(&self.names().place(id).to_lowercase()));
            found.next().filter(|_| found.next().is_none()).cloned()
        };
        named(&|name| name == wanted)
            .or_else(|| named(&|name| name.contains(&wanted)))
            .unwrap_or_else(|| text.to_owned())
    }

    fn cannot(&mut self, words: &[String]) -> Answer {
        let Some(hand) = &self.hand else {
            return Err(no_hand());
        };
        let key = TestAt {
            test: hand.test.test.clone(),
            at: hand.test.at.clone(),
        };
        if let Some((first, why)) = words.split_first()
            && self.names_point(first)
        {
            return self.point_cannot(first, &why.join(" "));
        }
        let why = words.join(" ");
        let why = (!why.is_empty()).then_some(why);
        let answer = self.session.cannot(&command::Cannot {
            test: key.test,
            at: key.at,
            why,
            undo: None,
        })?;
        let mut page = Page::new();
        page.line(Text::new().plain("Noted; it costs nothing.").dim(format!(
            " (entry {}; retract {} brings it back)",
            answer.entry, answer.entry
        )));
        page.blank().extend(self.advise_anew()?);
        Ok(page)
    }

    fn retract(&mut self, words: &[String]) -> Answer {
        let entry = words
            .first()
            .and_then(|word| word.parse().ok())
            .ok_or_else(|| {
                usage(
                    "no entry was named",
                    "retract N, with the number of an entry; `log` lists them",
                )
            })?;
        let answer = self.session.retract(&command::Retract { entry })?;
        let mut page = Page::new();
        page.line(
            Text::new()
                .plain(format!(
                    "Entry {entry} no longer counts; the log keeps both."
                ))
                .dim(format!(" (entry {})", answer.entry)),
        );
        page.extend(self.show_odds());
        page.blank().extend(self.advise_anew()?);
        Ok(page)
    }

    fn note(&mut self, words: &[String]) -> Answer {
        let answer = self.session.note(&command::Note {
            text: words.join(" "),
        })?;
        let mut page = Page::new();
        page.line(
            Text::new()
                .with(Meaning::Done, "Noted")
                .dim(format!(" (entry {}).", answer.entry)),
        );
        Ok(page)
    }

    fn close(&mut self, words: &[String]) -> Answer {
        const OUTCOMES: [(&str, CloseOutcome); 4] = [
            ("repaired", CloseOutcome::Repaired),
            ("made-safe", CloseOutcome::MadeSafe),
            ("referred", CloseOutcome::Referred),
            ("nothing-found", CloseOutcome::NothingFound),
        ];
        let said = words.first().map(String::as_str).unwrap_or_default();
        let Some((_, outcome)) = OUTCOMES.iter().find(|(word, _)| *word == said) else {
            let near = nearest(said, OUTCOMES.map(|(word, _)| word), 1);
            let hint = near.first().map_or(
                "close as repaired, made-safe, referred or nothing-found".to_owned(),
                |n| format!("the nearest is `{n}`"),
            );
            return Err(usage(format!("`{said}` is no way to end a visit"), hint));
        };
        let note = words
            .get(1..)
            .map(|rest| rest.join(" "))
            .filter(|note| !note.is_empty());
        let answer = self.session.close(&command::Close {
            outcome: *outcome,
            note,
        })?;
        let mut page = Page::new();
        page.line(
            Text::new()
                .plain(format!("Closed: {}.", said.replace('-', " ")))
                .dim(format!(" (entry {})", answer.entry)),
        );
        if let Some(path) = &self.log {
            page.line(
                Text::new()
                    .plain("Its story: ")
                    .word(format!("straypath audit {}", path.display())),
            );
        }
        Ok(page)
    }

    fn verdict_page(&mut self) -> Page {
        let answer = self
            .session
            .ranking(&command::Ranking { count: Some(MANY) });
        self.verdict = answer.verdict;
        match &self.verdict {
            Some(verdict) => self.decide(verdict),
            None => {
                let best = self.names().causes(&answer.odds, 1).into_iter().next();
                let mut page = Page::new();
                let best = best
                    .map(|cause| format!(" Leading: {}, {}.", cause.name, in_100(cause.p)))
                    .unwrap_or_default();
                page.line(format!(
                    "None yet: a further test is expected to cost less than acting now.{best}"
                ));
                page
            }
        }
    }
}

fn read_when(word: &str) -> Result<When, SessionError> {
    let all = [
        When::Always,
        When::AtOnce,
        When::InUse,
        When::SwitchingOn,
        When::NowAndThen,
        When::Rain,
        When::Once,
    ];
    let said = word.replace(' ', "-");
    all.into_iter()
        .find(|when| when.as_str() == said)
        .ok_or_else(|| {
            SessionError::unknown(
                ErrorCode::UnknownWord,
                "word for when",
                word,
                all.map(When::as_str),
            )
        })
}
