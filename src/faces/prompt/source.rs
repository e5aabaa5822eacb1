//! Where lines come from: a line editor on a terminal, or any stream of lines.

use std::io::{self, BufRead};

use rustyline::config::Configurer;
use rustyline::error::ReadlineError;
use rustyline::history::MemHistory;
use rustyline::{ColorMode, CompletionType, Config, Editor};

use super::super::sites::next_line;
use super::super::text::Style;
use super::complete::Completions;
use super::desk::Desk;

/// What came.
#[derive(Clone, Debug, PartialEq, Eq)]
pub enum Input {
    /// A line.
    Line(String),
    /// The line was dropped (Ctrl-C).
    Dropped,
    /// Nothing more comes.
    End,
}

/// Lines, one after another.
pub trait LineSource {
    /// The next line behind a prompt.
    ///
    /// # Errors
    /// The terminal or stream cannot be read.
    fn read(&mut self, prompt: &str) -> io::Result<Input>;

    /// Whether prompt and line must be written by the caller, so that a saved page reads as a visit did.
    fn echoes(&self) -> bool;

    /// Columns now; `None`: as before.
    fn width(&mut self) -> Option<usize>;
}

/// A stream of lines.
#[derive(Debug)]
pub struct Piped<R>(R);

impl<R: BufRead> Piped<R> {
    /// Lines of a stream.
    pub fn new(input: R) -> Self {
        Self(input)
    }
}

impl<R: BufRead> LineSource for Piped<R> {
    fn read(&mut self, _prompt: &str) -> io::Result<Input> {
        Ok(next_line(&mut self.0)?.map_or(Input::End, Input::Line))
    }

    fn echoes(&self) -> bool {
        true
    }

    fn width(&mut self) -> Option<usize> {
        None
    }
}

/// Columns that the terminal says it has.
pub fn dimensions() -> Option<usize> {
    let mut editor =
        Editor::<(), MemHistory>::with_history(Config::default(), MemHistory::new()).ok()?;
    editor.dimensions().map(|(columns, _)| usize::from(columns))
}

/// A terminal with editing, completion and a history in memory.
pub struct Terminal {
    editor: Editor<Completions, MemHistory>,
}

impl Terminal {
    /// A line editor that completes what this visit knows.
    ///
    /// # Errors
    /// A terminal that cannot be used.
    pub fn new(desk: &Desk, style: Style) -> io::Result<Self> {
        let colours = if style.is_colour() {
            ColorMode::Enabled
        } else {
            ColorMode::Disabled
        };
        let config = Config::builder()
            .completion_type(CompletionType::List)
            .auto_add_history(true)
            .color_mode(colours);
        let mut editor =
            Editor::with_history(config.build(), MemHistory::new()).map_err(|e| other(&e))?;
        editor.set_helper(Some(Completions::of(desk)));
        editor.set_max_history_size(1000).map_err(|e| other(&e))?;
        Ok(Self { editor })
    }
}

fn other(error: &ReadlineError) -> io::Error {
    io::Error::other(error.to_string())
}

impl LineSource for Terminal {
    fn read(&mut self, prompt: &str) -> io::Result<Input> {
        match self.editor.readline(prompt) {
            Ok(line) => Ok(Input::Line(line)),
            Err(ReadlineError::Interrupted) => Ok(Input::Dropped),
            Err(ReadlineError::Eof) => Ok(Input::End),
            Err(ReadlineError::Io(error)) => Err(error),
            Err(error) => Err(other(&error)),
        }
    }

    fn echoes(&self) -> bool {
        false
    }

    fn width(&mut self) -> Option<usize> {
        let (columns, _) = self.editor.dimensions()?;
        Some(super::super::text::columns(
            Some(usize::from(columns)),
            None,
        ))
    }
}
