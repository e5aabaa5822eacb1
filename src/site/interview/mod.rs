//! The short interview of `site new`: a few questions, one line each, and a site file that loads.
//!
//! A pure state machine: a face shows `question()`, hands the typed line to `answer()`, and takes
//! `document()` when `question()` is `None`. `?` (don't know) answers every question: then the key is left
//! out, and knowledge gives its prior. Enter takes the default.

mod document;
mod lines;

#[cfg(test)]
mod tests;

use serde_json::Value;

use super::file::Known;
use document::{Draft, MAIN_BOARD};
use lines::{Answer, CircuitLine};

/// What kind of line answers a question.
#[derive(Clone, Debug, PartialEq, Eq)]
pub enum AnswerKind {
    /// Any text.
    Text,
    /// A number in the unit named.
    Number(&'static str),
    /// One of these.
    Choice(&'static [&'static str]),
    /// `yes` or `no`.
    YesNo,
    /// Several parts with commas between.
    List,
}

/// A question to show.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Question {
    /// What is asked, in a line or two.
    pub text: String,
    /// What answers it.
    pub kind: AnswerKind,
    /// What Enter means.
    pub default: String,
    /// An example of an answer, where one helps.
    pub example: &'static str,
}

/// Why an answer was not taken; the question stands.
#[derive(Clone, Debug, PartialEq, Eq, thiserror::Error)]
#[error("{message}")]
pub struct AnswerError {
    /// What is wrong.
    pub message: String,
    /// The cure.
    pub hint: String,
}

impl AnswerError {
    fn new(message: impl Into<String>, hint: impl Into<String>) -> Self {
        Self {
            message: message.into(),
            hint: hint.into(),
        }
    }
}

#[derive(Clone, Copy, Debug, PartialEq, Eq)]
enum Stage {
    Name,
    Words,
    Phases,
    System,
    ServiceMetres,
    ServiceSection,
    MayIsolate,
    MainAmps,
    MainNeutral,
    WaterPipe,
    Rcds,
    Circuit,
    Equipment,
    Board,
    BoardLink,
    Done,
}

/// The interview: what was answered so far, and what is asked next.
#[derive(Clone, Debug)]
pub struct Interview {
    known: Known,
    stage: Stage,
    draft: Draft,
    taken: Vec<String>,
}

impl Interview {
    /// A fresh interview; `known` has the kinds of equipment.
    pub fn new(known: Known) -> Self {
        Self {
            known,
            stage: Stage::Name,
            draft: Draft::default(),
            taken: Vec::new(),
        }
    }

    /// How many answers were taken.
    pub fn answered(&self) -> usize {
        self.taken.len()
    }

    /// The question that stands; `None`: the interview is over.
    pub fn question(&self) -> Option<Question> {
        let ask = |text: &str, kind, default: &str, example| {
            Some(Question {
                text: text.to_owned(),
                kind,
                default: default.to_owned(),
                example,
            })
        };
        let draft = &self.draft;
        match self.stage {
            Stage::Name => ask(
                "Name of the site, as it should stand on the report",
                AnswerKind::Text,
                "unnamed site",
                "12 Long Paddock",
            ),
            Stage::Words => ask(
                "Words to use: au-nz (active, neutral, earth) or iec (line, neutral, PE)",
                AnswerKind::Choice(&["au-nz", "iec"]),
                "au-nz",
                "",
            ),
            Stage::Phases => ask(
                "Phases of the supply",
                AnswerKind::Choice(&["1", "3"]),
                "1",
                "",
            ),
            Stage::System => ask(
                "Earthing: TN-C-S (neutral and earth linked here: MEN, PME), TN-S (earth from the source), TT (own electrode only)",
                AnswerKind::Choice(&["TN-C-S", "TN-S", "TT"]),
                "TN-C-S",
                "",
            ),
            Stage::ServiceMetres => ask(
                "Length of the service cable, street to board",
                AnswerKind::Number("m"),
                "?",
                "22",
            ),
            Stage::ServiceSection => {
                ask("Its conductor size", AnswerKind::Number("mm²"), "?", "16")
            }
            Stage::MayIsolate => ask(
                "May you draw the service fuse yourself?",
                AnswerKind::YesNo,
                "no",
                "",
            ),
            Stage::MainAmps => ask(
                "Main switch, rated current",
                AnswerKind::Number("A"),
                "63",
                "80",
            ),
            Stage::MainNeutral => ask(
                "Does the main switch open the neutral too?",
                AnswerKind::YesNo,
                "no",
                "",
            ),
            Stage::WaterPipe => ask(
                "Is there a bonded metal water pipe?",
                AnswerKind::YesNo,
                "yes",
                "",
            ),
            Stage::Rcds => ask(
                &format!(
                    "RCDs on {}: how many of 30 mA, or each one's mA (S behind it: delayed)",
                    draft.board_name()
                ),
                AnswerKind::List,
                if draft.is_main() { "2" } else { "1" },
                "30, 30, 100S",
            ),
            Stage::Circuit => {
                let phase = if draft.three_phases() {
                    ", phase (L1, L2, L3 or 3)"
                } else {
                    ""
                };
                let first = draft.circuits_here() == 0;
                ask(
                    &format!(
                        "Circuit {} on {}: name, amps, RCD ({}), points, metres to the farthest{phase}{}",
                        draft.circuits() + 1,
                        draft.board_name(),
                        draft.rcd_choice(),
                        if first { "" } else { "; Enter: no more" }
                    ),
                    AnswerKind::List,
                    if first { "sockets" } else { "no more" },
                    if draft.three_phases() {
                        "kitchen sockets, 20, 1, 4, 18, L1"
                    } else {
                        "kitchen sockets, 20, 1, 4, 18"
                    },
                )
            }
            Stage::Equipment => ask(
                &format!(
                    "What hangs on {}? Kinds with commas; @2: at its second point",
                    draft.last_circuit_name()
                ),
                AnswerKind::List,
                "nothing",
                "kettle, refrigerator@2",
            ),
            Stage::Board => ask(
                "Another board fed from the main one: name, metres, breaker amps, cable mm²; Enter: none",
                AnswerKind::List,
                "none",
                "pump shed, 40, 32, 10",
            ),
            Stage::BoardLink => ask(
                &format!(
                    "Has {} a neutral-earth link and electrode of its own?",
                    draft.board_name()
                ),
                AnswerKind::YesNo,
                "no",
                "",
            ),
            Stage::Done => None,
        }
    }

    /// Takes an answer; refused, the same question stands.
    pub fn answer(&mut self, line: &str) -> Result<(), AnswerError> {
        let before = (self.stage, self.draft.clone());
        let taken = lines::clean(line).and_then(|clean| self.step(&clean));
        match taken {
            Ok(()) => self.taken.push(line.to_owned()),
            Err(_) => (self.stage, self.draft) = before,
        }
        taken
    }

    /// Goes back one answer; `false` at the first question.
    pub fn back(&mut self) -> bool {
        let mut lines = std::mem::take(&mut self.taken);
        let had = lines.pop().is_some();
        self.stage = Stage::Name;
        self.draft = Draft::default();
        for line in lines {
            // Every line was taken before from the same state, so it is taken again.
            if self.answer(&line).is_err() {
                break;
            }
        }
        had
    }

    /// The site file so far; it loads once a circuit was given.
    pub fn document(&self) -> Value {
        self.draft.document()
    }

    fn step(&mut self, line: &str) -> Result<(), AnswerError> {
        let default = self.question().map(|q| q.default).unwrap_or_default();
        let answer = Answer::read(line, &default);
        let draft = &mut self.draft;
        self.stage = match self.stage {
            Stage::Name => {
                draft.name = answer.text("unnamed site");
                Stage::Words
            }
            Stage::Words => {
                draft.words = answer.choice(&["au-nz", "iec"], "au-nz")?;
                Stage::Phases
            }
            Stage::Phases => {
                draft.phases = if answer.choice(&["1", "3"], "1")? == "3" {
                    3
                } else {
                    1
                };
                Stage::System
            }
            Stage::System => {
                draft.system = answer.choice(&["TN-C-S", "TN-S", "TT"], "TN-C-S")?;
                Stage::ServiceMetres
            }
            Stage::ServiceMetres => {
                draft.service_metres = answer.number("m", 0.5, 10_000.0)?;
                Stage::ServiceSection
            }
            Stage::ServiceSection => {
                draft.service_mm2 = answer.number("mm²", 0.5, 2_000.0)?;
                Stage::MayIsolate
            }
            Stage::MayIsolate => {
                draft.may_isolate = answer.yes_no()?.unwrap_or(false);
                Stage::MainAmps
            }
            Stage::MainAmps => {
                draft.main_amps = answer.number("A", 1.0, 6_300.0)?;
                Stage::MainNeutral
            }
            Stage::MainNeutral => {
                draft.main_neutral = answer.yes_no()?.unwrap_or(false);
                Stage::WaterPipe
            }
            Stage::WaterPipe => {
                draft.water_pipe = answer.yes_no()?.unwrap_or(false);
                Stage::Rcds
            }
            Stage::Rcds => {
                let rcds = lines::rcds(&answer)?;
                draft.add_rcds(&rcds);
                Stage::Circuit
            }
            Stage::Circuit => {
                if draft.circuits_here() > 0
                    && (line.is_empty() || line == "no more" || line == "none")
                {
                    Stage::Board
                } else {
                    let circuit =
                        CircuitLine::read(&answer, draft.three_phases(), &draft.rcds_here())?;
                    draft.add_circuit(circuit);
                    Stage::Equipment
                }
            }
            Stage::Equipment => {
                let list = lines::equipment(&answer, &self.known, draft.last_circuit_points())?;
                draft.add_equipment(list);
                Stage::Circuit
            }
            Stage::Board => match lines::board(&answer)? {
                None => Stage::Done,
                Some(board) => {
                    draft.add_board(board);
                    if draft.system == "TN-C-S" {
                        Stage::BoardLink
                    } else {
                        Stage::Rcds
                    }
                }
            },
            Stage::BoardLink => {
                draft.set_link(answer.yes_no()?.unwrap_or(false));
                Stage::Rcds
            }
            Stage::Done => {
                return Err(AnswerError::new(
                    "the interview is over",
                    format!("`{MAIN_BOARD}` and the rest are written"),
                ));
            }
        };
        Ok(())
    }
}
