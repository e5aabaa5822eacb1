//! The prompt: a visit led on a terminal, or through plain lines, one thing to do at a time.

mod acts;
mod complete;
mod desk;
mod hand;
mod help;
mod lists;
mod open_points;
mod path;
mod points;
mod progress;
mod readings;
mod repairs;
mod screen;
mod source;
mod typed;

#[cfg(test)]
mod tests;

use std::io::{self, BufRead, IsTerminal, Write};
use std::path::PathBuf;
use std::sync::Arc;

pub use desk::{Desk, MANY};
pub use source::{Input, LineSource};

use super::Trouble;
use super::sites::document;
use super::text::{Paper, Style};
use crate::knowledge::Knowledge;
use crate::session::command::Open;
use crate::session::view::OpenAnswer;
use crate::session::{Clock, ErrorCode, Log, Session, SessionError};
use progress::Progress;
use source::{Piped, Terminal};

/// What a visit is opened with.
#[derive(Clone, Debug)]
pub struct Options {
    /// What the trade knows.
    pub knowledge: Arc<Knowledge>,
    /// Site file, or an invented site's name.
    pub site: String,
    /// Where the visit is kept.
    pub log: Option<PathBuf>,
    /// Instruments.
    pub kit: Option<Vec<String>>,
    /// Seed.
    pub seed: Option<u64>,
    /// Log of the visit that goes on.
    pub resume: Option<PathBuf>,
}

/// Columns of the terminal; `None`: standard output is none.
pub fn terminal_width() -> Option<usize> {
    if !io::stdout().is_terminal() {
        return None;
    }
    source::dimensions()
}

fn open(options: &Options) -> Result<(Session, OpenAnswer), Trouble> {
    let knowledge = Arc::clone(&options.knowledge);
    if let Some(path) = &options.resume {
        return Ok(Session::resume(&knowledge, Clock::System, path)?);
    }
    let site = document(&knowledge, &options.site)?;
    let log = match &options.log {
        Some(path) => Log::open(path).map_err(SessionError::from)?.0,
        None => Log::in_memory(),
    };
    let ask = Open {
        site: Some(site),
        path: None,
        kit: options.kit.clone(),
        seed: options.seed,
    };
    Session::open(&knowledge, Clock::System, log, &ask).map_err(|error| {
        match (error.code, &options.log) {
            (ErrorCode::LogNotEmpty, Some(path)) => Trouble::Usage {
                message: format!("{}: {error}", path.display()),
                hint: format!(
                    "go on with it by --resume {}, or name a new file",
                    path.display()
                ),
            },
            _ => error.into(),
        }
    })
}

/// Leads a visit until it ends, the input ends, or nobody reads any more.
///
/// # Errors
/// What keeps the visit from opening; a terminal that cannot be used.
pub fn run(options: &Options, mut paper: Paper<impl Write>, err: Style) -> Result<(), Trouble> {
    let at_terminal = io::stdin().is_terminal() && io::stdout().is_terminal();
    let progress = Progress::new(io::stderr().is_terminal(), err);
    let (session, answer) = progress
        .over("opening: the circuit is solved under every fault", || {
            open(options)
        })?;
    let mut desk = Desk::new(
        session,
        options.log.clone().or_else(|| options.resume.clone()),
    );
    paper.show(&desk.greeting(&answer))?;
    paper.show(&progress.over("thinking", || desk.begin()))?;
    if at_terminal {
        let mut source = Terminal::new(&desk, paper.style)?;
        lead(&mut desk, &mut source, &mut paper, &progress)
    } else {
        let mut source = Piped::new(io::stdin().lock());
        lead(&mut desk, &mut source, &mut paper, &progress)
    }
}

/// Leads a visit on any lines.
///
/// # Errors
/// The input cannot be read, or the output not written.
pub fn serve(
    desk: &mut Desk,
    input: impl BufRead,
    paper: &mut Paper<impl Write>,
) -> Result<(), Trouble> {
    lead(
        desk,
        &mut Piped::new(input),
        paper,
        &Progress::new(false, Style::plain()),
    )
}

fn lead(
    desk: &mut Desk,
    source: &mut dyn LineSource,
    paper: &mut Paper<impl Write>,
    progress: &Progress,
) -> Result<(), Trouble> {
    while !desk.is_over() {
        let prompt = desk.prompt();
        if source.echoes() {
            paper.raw(&prompt)?;
        }
        match source.read(&prompt)? {
            Input::End => {
                if source.echoes() {
                    paper.raw("\n")?;
                }
                paper.show(&desk.leave())?;
                return Ok(());
            }
            Input::Dropped => desk.drop_question(),
            Input::Line(line) => {
                if source.echoes() {
                    paper.raw(&format!(
                        "{}\n",
                        crate::faces::text::Text::from(line.as_str()).bare()
                    ))?;
                }
                if let Some(width) = source.width() {
                    paper.width = width;
                }
                let page = progress.over("thinking", || desk.take_line(&line));
                paper.show(&page)?;
            }
        }
    }
    Ok(())
}
