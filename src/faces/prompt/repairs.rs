//! What was found, and the re-tests that a repair owes.

use super::super::text::{Meaning, Page, Text};
use super::super::words::{result, sentence};
use super::acts::usage;
use super::desk::{Answer, Desk, Hand, MANY};
use super::hand::limits;
use crate::faults::Fault;
use crate::session::command;
use crate::session::{ErrorCode, SessionError};

impl Desk {
    /// `repair found | not-found [CAUSE] [NOTE]`.
    pub(super) fn repair(&mut self, words: &[String]) -> Answer {
        let (found, done) = match words.first().map(String::as_str) {
            Some("found") => (true, None),
            Some("found-only") => (true, Some(false)),
            Some("not-found") => (false, None),
            _ => {
                return Err(usage(
                    "say what came of the look",
                    "repair found (and put right), repair found-only (not put right), or repair not-found; a cause by its \
                     number in `ranking` may follow",
                ));
            }
        };
        let mut rest = words.get(1..).unwrap_or_default();
        let faults = match rest.first() {
            Some(word) if self.names_cause(word) => {
                rest = rest.get(1..).unwrap_or_default();
                self.cause(word)?.1
            }
            _ => match &self.verdict {
                Some(verdict) if !verdict.faults.is_empty() => verdict.faults.clone(),
                _ => {
                    return Err(usage(
                        "no verdict stands, and no cause was named",
                        "name the cause by its number in `ranking`, such as: repair found 2",
                    ));
                }
            },
        };
        let note = (!rest.is_empty()).then(|| rest.join(" "));
        let what = self.names().faults(&faults);
        let answer = self.session.repair(&command::Repair {
            faults,
            found,
            done,
            note,
        })?;
        let mut page = Page::new();
        let said = match (found, done) {
            (true, None) => "Found and put right",
            (true, _) => "Found, not put right",
            _ => "Looked for, and not there",
        };
        page.line(
            Text::new()
                .plain(format!("{said}: {what}."))
                .dim(format!(" (entry {})", answer.entry)),
        );
        page.extend(self.show_odds());
        let owed = answer.checks.unwrap_or_default();
        if !owed.is_empty() {
            page.blank().line(Text::new().value(format!(
                "{} re-tests are owed before the visit can close as repaired:",
                owed.len()
            )));
            for check in &owed {
                page.hang("  -", 4, sentence(&check.test.name));
                page.extend(limits(check));
            }
        }
        page.blank().extend(self.advise_anew()?);
        Ok(page)
    }

    /// `recheck [TEST AT] VALUE`.
    pub(super) fn recheck(&mut self, words: &[String]) -> Answer {
        if let [test, at, value @ ..] = words
            && !value.is_empty()
            && self.session.engine().check(test, at).is_ok()
        {
            return self.recheck_value(test, at, &value.join(" "));
        }
        let owed = self.session.owed().first().cloned();
        match (owed, words.is_empty()) {
            (_, true) => Err(usage(
                "no value came",
                "recheck VALUE, or recheck TEST AT VALUE",
            )),
            (Some(key), _) => self.recheck_value(&key.test, &key.at, &words.join(" ")),
            (None, _) => Err(usage(
                "no re-test is owed",
                "recheck TEST AT VALUE makes one all the same",
            )),
        }
    }

    pub(super) fn recheck_value(&mut self, test: &str, at: &str, value: &str) -> Answer {
        let ask = command::Recheck {
            test: test.to_owned(),
            at: at.to_owned(),
            value: value.to_owned(),
        };
        let answer = match self.session.recheck(&ask) {
            Ok(answer) => answer,
            Err(error) if error.code == ErrorCode::HoldPointOpen => {
                let check = self.session.take_up(test, at)?;
                self.hand = Some(Hand::owed(&check));
                let mut page = Page::new();
                page.line(
                    Text::new()
                        .with(Meaning::Wrong, "Not yet: ")
                        .plain("the re-test was not taken; its hold points are open. Do each, then read again."),
                );
                page.extend(self.next());
                return Ok(page);
            }
            Err(error) => return Err(error),
        };
        let meaning = match answer.result.as_str() {
            "within" => Meaning::Done,
            "outside" => Meaning::Danger,
            _ => Meaning::Wrong,
        };
        let mut page = Page::new();
        page.line(
            Text::new()
                .value(super::super::words::reading(&answer.parsed))
                .plain(format!(", {}: ", self.names().test(test, at)))
                .with(meaning, result(&answer.result))
                .plain(".")
                .dim(format!(" (entry {})", answer.entry)),
        );
        let left = self.session.owed().len();
        page.line(match left {
            0 => Text::new()
                .plain("No re-test is owed any more. Then ")
                .word("close repaired")
                .plain("."),
            1 => Text::from("1 re-test is still owed."),
            n => Text::from(format!("{n} re-tests are still owed.")),
        });
        page.blank().extend(self.advise_anew()?);
        Ok(page)
    }

    fn names_cause(&self, word: &str) -> bool {
        self.cause(word).is_ok()
    }

    /// A cause by its number in `ranking`, or by the id of its hypothesis: id and faults.
    pub(super) fn cause(&self, word: &str) -> Result<(String, Vec<Fault>), SessionError> {
        let odds = self.session.odds(MANY);
        let number = word.parse::<usize>().ok().and_then(|n| n.checked_sub(1));
        let row = match number {
            Some(at) => odds.ranking.get(at),
            None => odds.ranking.iter().find(|row| row.hypothesis == word),
        };
        row.map(|row| (row.hypothesis.clone(), row.faults.clone()))
            .ok_or_else(|| {
                let hint = match odds.ranking.len() {
                    0 => "say first what is wrong, with `symptom`".to_owned(),
                    n => format!("name one by its number, 1 to {n}, in `ranking {n}`"),
                };
                SessionError::new(
                    ErrorCode::UnknownWord,
                    format!("there is no cause `{word}`"),
                    hint,
                )
            })
    }
}
