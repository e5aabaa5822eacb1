//! What lies on the desk beside the visit: the test in hand, the question that stands, the odds last shown.

use std::collections::BTreeMap;
use std::path::PathBuf;

use super::super::text::{Meaning, Page, Text};
use super::super::words::{Names, minutes};
use super::points::Asking;
use super::typed::{Typed, understand};
use crate::safety::{HoldPoint, warnings};
use crate::session::command;
use crate::session::view::{AdviceView, CheckOwed, OpenAnswer, TestView, VerdictView, Warning};
use crate::session::{Event, Session, SessionError};

/// Hypotheses that names are looked up in.
pub const MANY: usize = 200;

/// The test in hand.
#[derive(Clone, Debug, PartialEq)]
pub struct Hand {
    /// The test.
    pub test: TestView,
    /// What must be done first.
    pub points: Vec<HoldPoint>,
    /// What may bite.
    pub hazard: Option<String>,
    /// As advised, where it was.
    pub advice: Option<AdviceView>,
    /// As owed after a repair, where it is.
    pub owed: Option<CheckOwed>,
}

impl Hand {
    /// From an advice.
    pub fn advised(advice: &AdviceView) -> Self {
        Self {
            test: advice.test.clone(),
            points: advice.hold_points.clone(),
            hazard: advice.hazard.clone(),
            advice: Some(advice.clone()),
            owed: None,
        }
    }

    /// From a test that was looked up.
    pub fn looked_up(check: &CheckOwed) -> Self {
        Self {
            test: check.test.clone(),
            points: check.hold_points.clone(),
            hazard: check.hazard.clone(),
            advice: None,
            owed: None,
        }
    }

    /// A re-test that is owed.
    pub fn owed(check: &CheckOwed) -> Self {
        Self {
            owed: Some(check.clone()),
            ..Self::looked_up(check)
        }
    }

    /// Points that are still open.
    pub fn open(&self) -> impl Iterator<Item = &HoldPoint> {
        self.points.iter().filter(|point| !point.done)
    }
}

/// The prompt's side of a visit.
#[derive(Debug)]
pub struct Desk {
    pub(super) session: Session,
    pub(super) log: Option<PathBuf>,
    pub(super) hand: Option<Hand>,
    pub(super) advice: Vec<AdviceView>,
    pub(super) why: String,
    pub(super) verdict: Option<VerdictView>,
    /// Odds as last shown.
    pub(super) was: BTreeMap<String, f64>,
    /// A reading that was questioned.
    pub(super) questioned: Option<command::Reading>,
    /// A hold point whose readings are being asked for.
    pub(super) asking: Option<Asking>,
    over: bool,
}

/// What a command answers: a page, or the refusal.
pub type Answer = Result<Page, SessionError>;

impl Desk {
    /// An open visit; `log`: where it is kept.
    pub fn new(session: Session, log: Option<PathBuf>) -> Self {
        Self {
            session,
            log,
            hand: None,
            advice: Vec::new(),
            why: String::new(),
            verdict: None,
            was: BTreeMap::new(),
            questioned: None,
            asking: None,
            over: false,
        }
    }

    /// The visit.
    pub fn session(&self) -> &Session {
        &self.session
    }

    /// Names of its site.
    pub fn names(&self) -> Names<'_> {
        Names(self.session.engine())
    }

    /// Whether the prompt has ended.
    pub fn is_over(&self) -> bool {
        self.over
    }

    /// What is said first.
    pub fn greeting(&self, answer: &OpenAnswer) -> Page {
        let mut page = Page::new();
        let site = self.session.engine().site();
        page.line(
            Text::new()
                .with(Meaning::Place, site.name.clone())
                .dim(format!(
                    "  visit {}, {} causes, {} tests",
                    answer.session, answer.hypotheses, answer.tests
                )),
        );
        if let Some(entries) = answer.entries {
            page.line(format!(
                "Resumed at entry {entries}. Every proof of dead is void: prove again before you touch."
            ));
        }
        for warning in &answer.warnings {
            page.hang("  -", 4, Text::new().dim(warning.text.as_str()));
        }
        match &self.log {
            Some(path) => page.line(Text::new().dim(format!("Kept in {}.", path.display()))),
            None => page.line(Text::new().dim("Kept nowhere: give --log FILE to keep a visit.")),
        };
        page.blank();
        page
    }

    /// The first screen.
    pub fn begin(&mut self) -> Page {
        let resumed = self
            .session
            .records()
            .iter()
            .any(|record| matches!(record.event, Event::Symptom(_)));
        if resumed {
            self.advise_anew().unwrap_or_else(|error| refused(&error))
        } else {
            self.screen()
        }
    }

    /// The prompt: what is dead, and what is still open before a reading.
    pub fn prompt(&self) -> String {
        if let Some(asking) = &self.asking {
            return asking.prompt();
        }
        let state = self.session.state();
        let all = self.all_places().len();
        let live = match state.live.len() {
            0 => "all proved dead",
            n if n == all => "live",
            _ => "part dead",
        };
        let open = self.hand.as_ref().map_or(0, |hand| hand.open().count());
        match open {
            0 => format!("{live} > "),
            1 => format!("{live}, 1 hold point open > "),
            n => format!("{live}, {n} hold points open > "),
        }
    }

    /// `service`, boards and circuits.
    pub(super) fn all_places(&self) -> Vec<String> {
        let boards = &self.session.engine().site().boards;
        let each = boards.iter().flat_map(|board| {
            std::iter::once(&board.id).chain(board.circuits.iter().map(|circuit| &circuit.id))
        });
        std::iter::once("service".to_owned())
            .chain(each.cloned())
            .collect()
    }

    /// Orders that the complaints owe.
    pub(super) fn orders(&self) -> Vec<Warning> {
        let knowledge = self.session.engine().knowledge();
        let mut all: Vec<Warning> = Vec::new();
        for record in self.session.records() {
            if let Event::Symptom(symptom) = &record.event
                && !self.session.is_retracted(record.n)
                && let Some(row) = knowledge.symptom(&symptom.kind)
            {
                for warning in warnings(row, &knowledge.warnings) {
                    if !all.contains(&warning) {
                        all.push(warning);
                    }
                }
            }
        }
        all
    }

    /// Minutes since the visit began, by its last entry.
    pub(super) fn minutes_so_far(&self) -> String {
        let records = self.session.records();
        let span = records.first().zip(records.last()).map(|(first, last)| {
            (last.time.as_millisecond() - first.time.as_millisecond()) as f64 / 60_000.0
        });
        minutes(span.unwrap_or(0.0))
    }

    /// Drops a question that stands, so that the next line is a command again.
    pub fn drop_question(&mut self) {
        self.asking = None;
    }

    /// What is said at the end of the input.
    pub fn leave(&mut self) -> Page {
        self.over = true;
        let mut page = Page::new();
        if self.session.is_closed() {
            return page;
        }
        let open = self.session.safety().open();
        let lifted = self.session.safety().lifted().to_vec();
        if !open.is_empty() || !lifted.is_empty() {
            let names = self.names();
            page.line(
                Text::new()
                    .danger("Left as it stands: ")
                    .plain(format!(
                        "open {}; lifted {}.",
                        names.places(&open),
                        names.places(&lifted)
                    ))
                    .plain(" Lock, tag, and tell whoever comes next."),
            );
        }
        match &self.log {
            Some(path) => {
                let path = path.display();
                page.line(
                    Text::new()
                        .plain("The visit is kept: ")
                        .word(format!("straypath attend --resume {path}")),
                )
            }
            None => page.line("The visit was not kept."),
        };
        page
    }

    /// Takes a line and says what came of it.
    pub fn take_line(&mut self, line: &str) -> Page {
        let typed = match self.asking.take() {
            Some(asking) => return self.answer_question(asking, line),
            None => understand(line),
        };
        let answer = match typed {
            Typed::Nothing => Ok(self.remind()),
            Typed::Value(value) => self.value(&value),
            Typed::Command("quit", _) => Ok(self.leave()),
            Typed::Command(name, words) => self.command(name, &words),
            Typed::Unknown(word, nearest) => Ok(unknown(&word, &nearest)),
        };
        if self.session.is_closed() {
            self.over = true;
        }
        answer.unwrap_or_else(|error| refused(&error))
    }

    /// An empty line: the one thing to do.
    fn remind(&self) -> Page {
        let mut page = Page::new();
        page.line(self.ready());
        page
    }
}

fn unknown(word: &str, nearest: &[String]) -> Page {
    let mut page = Page::new();
    let mut text = Text::new()
        .with(Meaning::Wrong, "No command ")
        .plain(format!("`{word}`. "));
    text = match nearest {
        [] => text.plain("Type ").word("help"),
        near => text.plain("Type ").word(near.join(", or ")),
    };
    page.line(text.plain("."));
    page
}

/// A refusal: what, and the way on.
pub fn refused(error: &SessionError) -> Page {
    let mut page = Page::new();
    let mut text = Text::new()
        .with(Meaning::Wrong, "No: ")
        .plain(super::super::words::sentence(&error.message))
        .plain(" ");
    if !error.hint.is_empty() {
        text = text.plain(super::super::words::sentence(&error.hint));
    }
    page.line(text);
    page
}
