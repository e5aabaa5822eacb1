//! What is only looked up: odds, evidence, tests, places, state, entries.

use super::super::text::{Cell, Meaning, Page, Table, Text};
use super::super::words::{in_100, list, minutes, sentence};
use super::acts::usage;
use super::desk::{Answer, Desk, Hand, MANY};
use super::help::help;
use crate::session::clock::rfc3339;
use crate::session::command;
use crate::site::spots;

/// Rows that fit what a person looks through.
const MOST: usize = 40;

impl Desk {
    /// Commands that change nothing.
    pub(super) fn list_command(&mut self, name: &str, words: &[String]) -> Answer {
        match name {
            "ranking" => self.ranking(words),
            "evidence" => self.evidence(words),
            "path" => self.path(words),
            "tests" => Ok(self.tests(words)),
            "places" => Ok(self.places(words)),
            "kit" => Ok(self.kit()),
            "state" => Ok(self.state_page()),
            "log" => Ok(self.log_page()),
            _ => help(words.first().map(String::as_str)),
        }
    }

    /// The next best tests.
    pub(super) fn more(&mut self) -> Answer {
        let mut page = self.advise_anew()?;
        page.blank().line("Worth doing besides:");
        let mut table = Table::new(1);
        for advice in self.advice.iter().skip(1) {
            table.row(vec![
                Text::new()
                    .word(format!("{} {}", advice.test.test, advice.test.at))
                    .into(),
                Cell::from(sentence(&advice.test.name)),
                Cell::right(minutes(advice.test.minutes)),
                Cell::right(format!("{:.2} bits", advice.bits)),
            ]);
        }
        if table.is_empty() {
            page.hang("", 2, "nothing");
        }
        page.table(2, table);
        Ok(page)
    }

    /// The next of the advised tests becomes the one in hand.
    pub(super) fn other(&mut self) -> Answer {
        let now = self.hand.as_ref().and_then(|hand| {
            self.advice
                .iter()
                .position(|a| a.test.test == hand.test.test && a.test.at == hand.test.at)
        });
        let next = now.map_or(0, |at| at + 1);
        let Some(advice) = self
            .advice
            .get(next)
            .or_else(|| self.advice.first())
            .cloned()
        else {
            return Err(usage(
                "no other test is worth doing",
                "take TEST AT takes any test in hand; `tests` lists them",
            ));
        };
        self.hand = Some(Hand::advised(&advice));
        self.renew_hand()?;
        Ok(self.screen())
    }

    /// Any test becomes the one in hand.
    pub(super) fn take_test(&mut self, words: &[String]) -> Answer {
        let [test, at] = words else {
            return Err(usage(
                "name a test and its place",
                "take TEST AT; `tests` lists them",
            ));
        };
        let check = self.session.take_up(test, at)?;
        let advised = self
            .advice
            .iter()
            .find(|a| a.test.test == *test && a.test.at == *at);
        let owed = self
            .session
            .owed()
            .iter()
            .any(|key| key.test == *test && key.at == *at);
        self.hand = Some(match (owed, advised) {
            (true, _) => Hand::owed(&check),
            (false, Some(advice)) => Hand {
                points: check.hold_points.clone(),
                ..Hand::advised(advice)
            },
            (false, None) => Hand::looked_up(&check),
        });
        Ok(self.screen())
    }

    /// Why this test.
    pub(super) fn why_page(&self) -> Answer {
        let mut page = Page::new();
        let Some(hand) = &self.hand else {
            page.line(sentence(if self.why.is_empty() {
                "no test was advised yet"
            } else {
                &self.why
            }));
            return Ok(page);
        };
        match (&hand.advice, &hand.owed) {
            (Some(advice), _) => {
                page.line(sentence(&advice.why));
                page.line(
                    Text::new()
                        .value(format!("{:.2} bits", advice.bits))
                        .plain(format!(
                            " about what to repair, in {}: {:.2} bits a minute.",
                            minutes(advice.test.minutes),
                            advice.bits_per_minute
                        )),
                );
                page.line("A bit halves what is still possible.");
            }
            (None, Some(_)) => {
                page.line(
                    "The repair owes this re-test: it shows that what was wrong is right now.",
                );
            }
            (None, None) => {
                page.line("You took this test yourself; `advise` gives the one that tells most for its minutes.");
            }
        }
        Ok(page)
    }

    fn ranking(&mut self, words: &[String]) -> Answer {
        let count = match words.first() {
            None => 10,
            Some(word) => word
                .parse::<usize>()
                .ok()
                .filter(|n| *n > 0)
                .ok_or_else(|| {
                    usage(
                        format!("`{word}` is no number of causes"),
                        "ranking, or ranking 20",
                    )
                })?,
        };
        let odds = self.session.odds(count.min(MANY));
        let mut page = Page::new();
        let mut table = Table::new(1);
        for (at, row) in odds.ranking.iter().enumerate().take(count) {
            table.row(vec![
                Cell::right(Text::new().dim((at + 1).to_string())),
                Cell::from(self.names().faults(&row.faults)),
                Cell::from(Text::new().value(in_100(row.p))),
            ]);
        }
        for (name, p) in [
            ("nothing wrong", odds.nothing_wrong),
            ("not on the list", odds.unlisted),
            ("not examined (at most)", odds.not_examined),
        ] {
            table.row(vec![
                Cell::default(),
                Cell::from(name),
                Cell::from(Text::new().value(in_100(p))),
            ]);
        }
        page.table(1, table);
        Ok(page)
    }

    fn evidence(&mut self, words: &[String]) -> Answer {
        let (hypothesis, faults) = self.cause(words.first().map_or("1", String::as_str))?;
        let answer = self.session.evidence(&command::Evidence { hypothesis })?;
        let mut page = Page::new();
        page.line(format!(
            "For {} against the rest:",
            self.names().faults(&faults)
        ));
        let mut table = Table::new(1);
        for row in &answer.evidence {
            let event = self
                .session
                .records()
                .iter()
                .find(|record| record.n == row.entry);
            let said = event.map_or_else(
                || row.test.clone(),
                |record| self.names().event(&record.event),
            );
            table.row(vec![
                Cell::right(Text::new().dim(row.entry.to_string())),
                Cell::from(said),
                Cell::right(Text::new().value(format!("{:+.1} bits", row.bits))),
            ]);
        }
        if table.is_empty() {
            page.hang("", 2, "nothing yet");
        }
        page.table(1, table);
        page.line(Text::new().dim("+1 bit doubles its odds, -1 halves them."));
        Ok(page)
    }

    fn tests(&self, words: &[String]) -> Page {
        let wanted: Vec<String> = words.iter().map(|word| word.to_lowercase()).collect();
        let all = self.session.tests().tests;
        let fits = |text: String| wanted.iter().all(|word| text.contains(word));
        let found: Vec<_> = all
            .iter()
            .filter(|test| fits(format!("{} {} {}", test.test, test.at, test.name).to_lowercase()))
            .collect();
        let mut page = Page::new();
        for test in found.iter().take(MOST) {
            let mut text = Text::new()
                .word(format!("{} {}", test.test, test.at))
                .plain(format!("  {}", sentence(&test.name)));
            text = text.dim(format!(" {}", minutes(test.minutes)));
            if let Some(why) = &test.why_not {
                text = text
                    .plain(" ")
                    .with(Meaning::Wrong, "cannot: ")
                    .plain(why.clone());
            }
            page.hang("  ", 4, text);
        }
        match found.len() {
            0 => page.line("No test has these words."),
            n if n > MOST => page.line(format!(
                "{} more: add words, such as `tests {} c1`.",
                n - MOST,
                words.join(" ")
            )),
            n => page.line(Text::new().dim(format!("{n} of {} tests", all.len()))),
        };
        page
    }

    fn places(&self, words: &[String]) -> Page {
        let wanted = words.join(" ").to_lowercase();
        let mut table = Table::new(1);
        let mut page = Page::new();
        let all = spots(self.session.engine().site());
        let found: Vec<(&String, String)> = all
            .keys()
            .map(|id| (id, self.names().place(id)))
            .filter(|(id, name)| id.contains(&wanted) || name.to_lowercase().contains(&wanted))
            .collect();
        for (id, name) in found.iter().take(MOST) {
            table.row(vec![
                Text::new().word((*id).clone()).into(),
                Cell::from(name.clone()),
            ]);
        }
        page.table(2, table);
        match found.len() {
            0 => drop(page.line("No place has these words.")),
            n if n > MOST => drop(page.line(format!("{} more: add a word.", n - MOST))),
            _ => {}
        }
        page
    }

    fn kit(&self) -> Page {
        let engine = self.session.engine();
        let have: Vec<String> = engine.kit.iter().cloned().collect();
        let lack: Vec<String> = engine
            .knowledge()
            .kit
            .iter()
            .map(|row| row.kind.clone())
            .filter(|kind| !engine.kit.contains(kind))
            .collect();
        let mut page = Page::new();
        page.hang(Text::new().dim("here"), 8, list(&have));
        page.hang(Text::new().dim("not"), 8, list(&lack));
        page.line(
            Text::new()
                .dim("The kit is chosen when the visit opens: ")
                .word("--kit A,B,C"),
        );
        page
    }

    fn state_page(&self) -> Page {
        let (state, names) = (self.session.state(), self.names());
        let mut page = self.header();
        page.hang("live", 8, names.places(&state.live));
        for proof in &state.proved {
            page.hang(
                Text::new().with(Meaning::Done, "proved"),
                8,
                format!(
                    "{} dead against {} (entry {})",
                    names.place(&proof.at),
                    names.places(&proof.against),
                    proof.entry
                ),
            );
        }
        let owed: Vec<String> = state
            .checks
            .iter()
            .map(|key| names.test(&key.test, &key.at))
            .collect();
        page.hang("owed", 8, list(&owed));
        page
    }

    fn log_page(&self) -> Page {
        let mut page = Page::new();
        let mut table = Table::new(2);
        for record in self.session.records() {
            let time = rfc3339(record.time);
            let taken_back = if self.session.is_retracted(record.n) {
                " (taken back)"
            } else {
                ""
            };
            table.row(vec![
                Cell::right(Text::new().dim(record.n.to_string())),
                Text::new().dim(time.get(11..16).unwrap_or_default()).into(),
                Cell::from(self.names().event(&record.event) + taken_back),
            ]);
        }
        page.table(0, table);
        page
    }
}
