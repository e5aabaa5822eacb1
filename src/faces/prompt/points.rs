//! Hold points: shown one by one, done one by one, their readings asked for and never filled in.

use std::collections::BTreeMap;

use super::super::text::{Meaning, Page, Text};
use super::super::words::sentence;
use super::desk::{Answer, Desk, refused};
use crate::safety::{HoldPoint, Want};
use crate::session::{ErrorCode, SessionError, command};

/// The point that says the orders of a complaint were carried out.
pub const MAKE_SAFE: &str = "make-safe";

/// The note that says so where no hold point asks for it.
pub const ORDERS_DONE: &str = "the orders that came first were carried out";

/// A hold point whose readings are being asked for, one after another.
#[derive(Clone, Debug, PartialEq)]
pub struct Asking {
    /// The point.
    pub point: HoldPoint,
    /// What was read so far.
    pub given: Vec<String>,
}

impl Asking {
    fn want(&self) -> Option<&Want> {
        self.point.wants.get(self.given.len())
    }

    /// The question.
    pub fn prompt(&self) -> String {
        match self.want() {
            Some(want) => {
                format!(
                    "  {} of {}: {}, volts > ",
                    self.given.len() + 1,
                    self.point.wants.len(),
                    want.name
                )
            }
            None => "  > ".to_owned(),
        }
    }
}

fn refuse(code: ErrorCode, message: impl Into<String>, hint: &str) -> SessionError {
    SessionError::new(code, message, hint)
}

impl Desk {
    /// `hold`, `done`.
    pub(super) fn hold(&mut self, words: &[String]) -> Answer {
        let Some((which, given)) = words.split_first() else {
            let Some(hand) = &self.hand else {
                return Err(no_hand());
            };
            let mut page = self.points_page(hand);
            if hand.points.is_empty() {
                page.line("This test has no hold points.");
            }
            return Ok(page);
        };
        if which == "first" {
            return self.first_is_done();
        }
        let point = self.point(which)?;
        if point.done {
            let mut page = Page::new();
            page.line(format!("{} is done already.", point.point));
            return Ok(page);
        }
        let given: Vec<String> = given
            .iter()
            .map(|word| word.trim_end_matches([',', ';']).to_owned())
            .collect();
        let given = joined(given);
        if given.is_empty() && !point.wants.is_empty() && point.test.is_none() {
            let mut page = Page::new();
            page.line(
                Text::new()
                    .plain(sentence(&point.text))
                    .dim(" An empty line gives up."),
            );
            self.asking = Some(Asking {
                point,
                given: Vec::new(),
            });
            return Ok(page);
        }
        self.point_done(&point, &given)
    }

    /// A reading that was asked for.
    pub(super) fn answer_question(&mut self, mut asking: Asking, line: &str) -> Page {
        let line = line.trim();
        if line.is_empty() {
            let mut page = Page::new();
            page.line(format!("{} stays open.", asking.point.point));
            return page;
        }
        if !super::super::words::looks_like_reading(line) {
            let mut page = Page::new();
            page.line(Text::new().with(Meaning::Wrong, "No: ").plain(format!(
                "`{line}` is no voltage. Read it in volts, such as 0.1; an empty line gives up."
            )));
            self.asking = Some(asking);
            return page;
        }
        asking.given.push(line.to_owned());
        if asking.want().is_some() {
            self.asking = Some(asking);
            return Page::new();
        }
        let Asking { point, given } = asking;
        self.point_done(&point, &given)
            .unwrap_or_else(|error| refused(&error))
    }

    fn point_done(&mut self, point: &HoldPoint, given: &[String]) -> Answer {
        let wanted = point.wants.len();
        if given.len() != wanted {
            let names: Vec<&str> = point.wants.iter().map(|want| want.name.as_str()).collect();
            let text = match wanted {
                0 => format!(
                    "`{}` takes no readings, and {} came",
                    point.point,
                    given.len()
                ),
                n => format!(
                    "`{}` takes {n} readings, and {} came",
                    point.point,
                    given.len()
                ),
            };
            let hint = match wanted {
                0 => format!("say `done {}` when it is done", point.point),
                _ => format!("read them in this order: {}", names.join(", ")),
            };
            return Err(refuse(ErrorCode::BadRequest, text, &hint));
        }
        let readings: BTreeMap<String, String> = point
            .wants
            .iter()
            .map(|want| want.name.clone())
            .zip(given.iter().cloned())
            .collect();
        let ask = command::HoldPoint {
            point: point.point.clone(),
            done: true,
            readings: (!readings.is_empty()).then_some(readings),
            why: None,
            by: None,
        };
        let answer = match self.session.hold_point(&ask) {
            Ok(answer) => answer,
            Err(error) if error.code == ErrorCode::NotDead => return Ok(self.not_dead(&error)),
            Err(error) => return Err(error),
        };
        self.verdict = answer.verdict;
        let mut page = Page::new();
        let seen: Vec<String> = point
            .wants
            .iter()
            .zip(given)
            .map(|(want, volts)| format!("{} {}", with_volts(volts), want.name))
            .collect();
        let said = match seen.as_slice() {
            [] => Text::new()
                .with(Meaning::Done, "Done: ")
                .plain(short(&point.text)),
            seen => Text::new()
                .with(Meaning::Done, "Dead: ")
                .plain(seen.join(", "))
                .plain("."),
        };
        page.line(said.dim(format!(" (entry {})", answer.entry)));
        page.extend(self.after_point()?);
        Ok(page)
    }

    /// A hold point that cannot be done.
    pub(super) fn point_cannot(&mut self, which: &str, why: &str) -> Answer {
        let point = self.point(which)?;
        if why.is_empty() {
            let text = format!("`{}` cannot be done, and no reason came", point.point);
            return Err(refuse(
                ErrorCode::BadRequest,
                text,
                &format!("say why: cannot {which} no key for the lock"),
            ));
        }
        let ask = command::HoldPoint {
            point: point.point.clone(),
            done: false,
            readings: None,
            why: Some(why.to_owned()),
            by: None,
        };
        let answer = self.session.hold_point(&ask)?;
        let mut page = Page::new();
        page.line(format!(
            "Noted (entry {}). Tests that need it stay closed.",
            answer.entry
        ));
        page.blank().extend(self.advise_anew()?);
        Ok(page)
    }

    fn first_is_done(&mut self) -> Answer {
        let point = |done| command::HoldPoint {
            point: MAKE_SAFE.into(),
            done,
            readings: None,
            why: None,
            by: None,
        };
        let entry = match self.session.hold_point(&point(true)) {
            Ok(answer) => answer.entry,
            Err(error) if error.code == ErrorCode::UnknownWord => {
                if self.orders().is_empty() {
                    return Err(refuse(
                        ErrorCode::BadRequest,
                        "nothing stands under FIRST",
                        "take what stands under NEXT",
                    ));
                }
                self.session
                    .note(&command::Note {
                        text: ORDERS_DONE.into(),
                    })?
                    .entry
            }
            Err(error) => return Err(error),
        };
        let mut page = Page::new();
        page.line(
            Text::new()
                .with(Meaning::Done, "Noted")
                .dim(format!(" (entry {entry}).")),
        );
        page.extend(self.after_point()?);
        Ok(page)
    }

    /// The hold point of a number in the list, or of an id.
    fn point(&self, which: &str) -> Result<HoldPoint, SessionError> {
        let Some(hand) = &self.hand else {
            return Err(no_hand());
        };
        let number = which.parse::<usize>().ok().and_then(|n| n.checked_sub(1));
        let found = match number {
            Some(at) => hand.points.get(at),
            None => hand.points.iter().find(|point| point.point == which),
        };
        found.cloned().ok_or_else(|| {
            let text = format!("this test has no hold point `{which}`");
            let hint = match hand.points.len() {
                0 => "it has none: give its reading".to_owned(),
                n => format!("name one of 1 to {n}; `hold` lists them"),
            };
            refuse(ErrorCode::UnknownWord, text, &hint)
        })
    }

    /// Whether a word names a hold point of the test in hand.
    pub(super) fn names_point(&self, word: &str) -> bool {
        self.point(word).is_ok()
    }
}

/// The refusal where no test is in hand.
pub fn no_hand() -> SessionError {
    refuse(
        ErrorCode::BadRequest,
        "no test is in hand",
        "say `advise`, or `take TEST AT`; `tests` lists them",
    )
}

/// The first sentence.
pub(super) fn short(text: &str) -> String {
    let end = text
        .find(". ")
        .or_else(|| text.find(": "))
        .map_or(text.len(), |at| at + 1);
    let first = text
        .get(..end)
        .unwrap_or(text)
        .trim_end_matches([':', ';', '.']);
    sentence(first)
}

/// `0.1 V` from `0.1`, and from `0.1 V`.
fn with_volts(text: &str) -> String {
    if text.ends_with(|c: char| c.is_ascii_digit()) {
        format!("{text} V")
    } else {
        text.to_owned()
    }
}

/// Numbers typed apart from their units are put together again: `0.1 V 0.2 V`.
fn joined(words: Vec<String>) -> Vec<String> {
    let mut all: Vec<String> = Vec::new();
    for word in words {
        let is_unit = word.starts_with(|c: char| c.is_alphabetic() || c == 'µ');
        match all.last_mut() {
            Some(last) if is_unit && last.ends_with(|c: char| c.is_ascii_digit()) => {
                last.push(' ');
                last.push_str(&word);
            }
            _ => all.push(word),
        }
    }
    all
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn readings_and_their_units_belong_together() {
        let words = ["0.0", "V", "0.1", "12", "mV", "OL"]
            .map(str::to_owned)
            .to_vec();
        assert_eq!(joined(words), ["0.0 V", "0.1", "12 mV", "OL"]);
        assert_eq!([with_volts("0.1"), with_volts("12 mV")], ["0.1 V", "12 mV"]);
    }

    #[test]
    fn what_comes_later_is_said_in_short() {
        assert_eq!(
            short("Find every source: main; a second tariff. Tell the occupants."),
            "Find every source: main; a second tariff."
        );
        assert_eq!(short("Prove the tester"), "Prove the tester.");
    }
}
