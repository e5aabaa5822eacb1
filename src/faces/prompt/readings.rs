//! Readings: given by name or alone, held back while hold points are open, questioned once.

use super::super::text::{Meaning, Page, Text};
use super::super::words::{list, sentence};
use super::acts::usage;
use super::desk::{Answer, Desk, Hand, MANY};
use super::points::no_hand;
use crate::session::command;
use crate::session::view::MovedAnswer;
use crate::session::{ErrorCode, SessionError};

impl Desk {
    /// `read TEST AT VALUE`.
    pub(super) fn read(&mut self, words: &[String]) -> Answer {
        let [test, at, value @ ..] = words else {
            return Err(usage(
                "a reading needs its test, its place and its value",
                "read TEST AT VALUE; `tests` lists them",
            ));
        };
        if value.is_empty() {
            return Err(usage(
                "the reading has no value",
                "read TEST AT VALUE, such as: read TEST AT 0.35 MΩ",
            ));
        }
        self.give(test, at, &value.join(" "), None)
    }

    /// A value alone answers the test in hand.
    pub(super) fn value(&mut self, value: &str) -> Answer {
        let Some(hand) = &self.hand else {
            return Err(no_hand());
        };
        let (test, at) = (hand.test.test.clone(), hand.test.at.clone());
        if hand.owed.is_some() {
            self.recheck_value(&test, &at, value)
        } else {
            self.give(&test, &at, value, None)
        }
    }

    fn give(&mut self, test: &str, at: &str, value: &str, confirm: Option<bool>) -> Answer {
        let ask = command::Reading {
            test: test.to_owned(),
            at: at.to_owned(),
            value: value.to_owned(),
            setup: None,
            confirm,
        };
        match self.session.reading(&ask) {
            Ok(answer) => self.taken(&ask, &answer),
            Err(error) => self.not_taken(ask, error),
        }
    }

    fn taken(&mut self, ask: &command::Reading, answer: &MovedAnswer) -> Answer {
        let name = self.names().test(&ask.test, &ask.at);
        let parsed = answer
            .parsed
            .as_ref()
            .map(super::super::words::reading)
            .unwrap_or_default();
        let mut page = Page::new();
        page.line(
            Text::new()
                .value(parsed)
                .plain(format!(", {name}."))
                .dim(format!(" (entry {})", answer.entry)),
        );
        if answer.surprise.is_some_and(|tail| tail < 0.01) {
            page.line("Hardly any cause explains this reading: repeat it, or look for what is not on the list.");
        }
        page.extend(self.show_odds());
        page.blank().extend(self.advise_anew()?);
        Ok(page)
    }

    /// A reading that was held back: its open points, or the question about it.
    fn not_taken(&mut self, ask: command::Reading, error: SessionError) -> Answer {
        match error.code {
            ErrorCode::HoldPointOpen => {
                let check = self.session.take_up(&ask.test, &ask.at)?;
                if self
                    .hand
                    .as_ref()
                    .is_none_or(|hand| hand.test.test != ask.test || hand.test.at != ask.at)
                {
                    self.hand = Some(Hand::looked_up(&check));
                } else if let Some(hand) = &mut self.hand {
                    hand.points = check.hold_points;
                }
                let open: Vec<String> = self
                    .hand
                    .iter()
                    .flat_map(|hand| hand.points.iter().enumerate())
                    .filter(|(_, point)| !point.done)
                    .map(|(at, _)| (at + 1).to_string())
                    .collect();
                let mut page = Page::new();
                page.line(Text::new().with(Meaning::Wrong, "Not yet: ").plain(format!(
                    "the reading was not taken; hold points {} of this test are open. Do each, say so with `done`, then \
                     read again.",
                    list(&open)
                )));
                if let Some(hand) = &self.hand {
                    page.extend(self.points_page(hand));
                }
                Ok(page)
            }
            ErrorCode::NotCredible => {
                let mut page = Page::new();
                page.line(
                    Text::new()
                        .with(Meaning::Wrong, "Held back: ")
                        .plain(sentence(&error.message)),
                );
                page.line(
                    Text::new()
                        .plain("Was another range or unit meant, another place, another setup? If it stands, say ")
                        .word("sure")
                        .plain("; else read again."),
                );
                self.questioned = Some(ask);
                Ok(page)
            }
            _ => Err(error),
        }
    }

    pub(super) fn sure(&mut self) -> Answer {
        let Some(ask) = self.questioned.take() else {
            return Err(usage(
                "no reading was questioned",
                "give a reading; `sure` is for one that was held back",
            ));
        };
        self.give(&ask.test, &ask.at, &ask.value, Some(true))
    }

    pub(super) fn whatif(&mut self, words: &[String]) -> Answer {
        let Some(hand) = &self.hand else {
            return Err(no_hand());
        };
        if words.is_empty() {
            return Err(usage("no value came", "whatif VALUE, such as: whatif 47 V"));
        }
        let (test, at) = (hand.test.test.clone(), hand.test.at.clone());
        let answer = self.session.whatif(&command::WhatIf {
            test,
            at,
            value: words.join(" "),
        })?;
        let mut page = Page::new();
        page.line(Text::new().plain("As it would be; nothing is recorded:"));
        self.was = self
            .names()
            .causes(&self.session.odds(MANY), usize::MAX)
            .into_iter()
            .map(|c| (c.key, c.p))
            .collect();
        page.extend(self.odds_page(&answer.odds, 8, true));
        Ok(page)
    }
}
