//! Completion: commands, then the words that each command takes.

use std::collections::{BTreeMap, BTreeSet};

use rustyline::Context;
use rustyline::completion::{Completer, Pair};

use super::desk::Desk;
use super::typed::COMMANDS;
use crate::knowledge::words;
use crate::site::spots;

/// Words that a line may go on with.
#[derive(Clone, Debug, Default)]
pub struct Vocabulary {
    symptoms: Vec<String>,
    places: Vec<String>,
    equipment: Vec<String>,
    tests: BTreeMap<String, BTreeSet<String>>,
}

impl Vocabulary {
    /// The words of a visit.
    pub fn of(desk: &Desk) -> Self {
        let engine = desk.session().engine();
        let mut tests: BTreeMap<String, BTreeSet<String>> = BTreeMap::new();
        for check in engine.checks() {
            tests
                .entry(check.test.clone())
                .or_default()
                .insert(check.at.clone());
        }
        Self {
            symptoms: engine
                .knowledge()
                .symptoms
                .iter()
                .map(|row| row.kind.clone())
                .collect(),
            places: spots(engine.site()).into_keys().collect(),
            equipment: engine
                .site()
                .equipment
                .iter()
                .map(|item| item.id.clone())
                .collect(),
            tests,
        }
    }

    /// What the last word of `line` may become.
    pub fn next(&self, line: &str) -> Vec<String> {
        let mut done: Vec<&str> = line.split_whitespace().collect();
        let begun = if line.ends_with(char::is_whitespace) {
            ""
        } else {
            done.pop().unwrap_or("")
        };
        let all: Vec<String> = match done.as_slice() {
            [] | ["help"] => COMMANDS
                .iter()
                .map(|(name, ..)| (*name).to_owned())
                .collect(),
            ["symptom"] => self.symptoms.clone(),
            ["symptom", .., "at"] | ["places"] => self.places.clone(),
            ["symptom", .., "when"] => words::all(words::WHEN).map(str::to_owned).collect(),
            ["symptom", .., "with"] => self.equipment.clone(),
            ["symptom", ..] => ["at", "when", "with", "text"].map(str::to_owned).to_vec(),
            ["read" | "take" | "recheck" | "tests"] => self.tests.keys().cloned().collect(),
            ["read" | "take" | "recheck", test] => self
                .tests
                .get(*test)
                .into_iter()
                .flatten()
                .cloned()
                .collect(),
            ["repair"] => ["found", "not-found"].map(str::to_owned).to_vec(),
            ["close"] => ["repaired", "made-safe", "referred", "nothing-found"]
                .map(str::to_owned)
                .to_vec(),
            ["advise"] => vec!["--more".to_owned()],
            ["done"] => vec!["first".to_owned()],
            _ => Vec::new(),
        };
        all.into_iter()
            .filter(|word| word.starts_with(begun))
            .collect()
    }
}

/// The line editor's helper.
#[derive(Clone, Debug, Default)]
pub struct Completions(Vocabulary);

impl Completions {
    /// For a visit.
    pub fn of(desk: &Desk) -> Self {
        Self(Vocabulary::of(desk))
    }
}

impl Completer for Completions {
    type Candidate = Pair;

    fn complete(
        &self,
        line: &str,
        pos: usize,
        _: &Context<'_>,
    ) -> rustyline::Result<(usize, Vec<Pair>)> {
        let before = line.get(..pos).unwrap_or(line);
        let start = before.rfind(char::is_whitespace).map_or(0, |at| at + 1);
        let pair = |word: String| Pair {
            display: word.clone(),
            replacement: word + " ",
        };
        Ok((start, self.0.next(before).into_iter().map(pair).collect()))
    }
}

impl rustyline::hint::Hinter for Completions {
    type Hint = String;
}
impl rustyline::highlight::Highlighter for Completions {}
impl rustyline::validate::Validator for Completions {}
impl rustyline::Helper for Completions {}
