//! How the program ends: kinds of failure, their exit codes, and what is said of them.

use std::error::Error;
use std::process::ExitCode;

use straypath::faces::Trouble;
use straypath::faces::text::{Meaning, Page, Style, Text};
use straypath::session::ErrorCode;

/// What kind of failure, so that a script can tell them apart.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Kind {
    /// The command line is wrong.
    Usage,
    /// A file holds what cannot be used.
    Data,
    /// The visit refused what was asked.
    Refused,
    /// A file or the terminal cannot be read or written.
    Io,
    /// Nobody reads the output any more.
    ClosedPipe,
    /// A fault of this program.
    Internal,
}

impl Kind {
    /// The kind of what ended a face.
    pub fn of(trouble: &Trouble) -> Self {
        match trouble {
            closed if closed.is_closed_pipe() => Self::ClosedPipe,
            fault if fault.is_internal() => Self::Internal,
            Trouble::Usage { .. } => Self::Usage,
            Trouble::Knowledge(_) | Trouble::Site { .. } => Self::Data,
            Trouble::Session(error) => match error.code {
                ErrorCode::BadSite | ErrorCode::LogBroken => Self::Data,
                ErrorCode::Io => Self::Io,
                ErrorCode::UnknownWord | ErrorCode::BadRequest => Self::Usage,
                _ => Self::Refused,
            },
            Trouble::File { .. } | Trouble::Terminal(_) => Self::Io,
        }
    }

    /// Exit code, by the habit of `sysexits.h`; 0 for a closed pipe, which is no failure.
    pub fn code(self) -> ExitCode {
        ExitCode::from(match self {
            Self::ClosedPipe => 0,
            Self::Usage => 64,
            Self::Data => 65,
            Self::Refused => 69,
            Self::Internal => 70,
            Self::Io => 74,
        })
    }
}

/// What is said of a failure: the chain of causes, then the cure.
pub fn page(trouble: &Trouble) -> Page {
    let mut page = Page::new();
    let said = trouble.to_string();
    for (at, line) in said.lines().enumerate() {
        let lead = if at == 0 {
            Text::new().with(Meaning::Wrong, "straypath:")
        } else {
            Text::new()
        };
        page.hang(lead, 11, line);
    }
    let mut cause = trouble.source();
    while let Some(error) = cause {
        let text = error.to_string();
        if !said.contains(&text) {
            page.hang("", 11, format!("because {text}"));
        }
        cause = error.source();
    }
    if let Some(hint) = trouble.hint().filter(|hint| !hint.is_empty()) {
        page.hang(Text::new().dim("  do this:"), 11, hint);
    }
    page
}

/// The failure as lines for standard error.
pub fn lines(trouble: &Trouble, width: usize, style: Style) -> String {
    page(trouble).render(width, &style)
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn each_kind_has_its_code_and_its_cure() {
        let usage = Trouble::Usage {
            message: "no kit `x`".into(),
            hint: "name one".into(),
        };
        assert_eq!(Kind::of(&usage), Kind::Usage);
        assert_eq!(
            lines(&usage, 60, Style::plain()),
            "straypath: no kit `x`\n  do this: name one\n"
        );
        let closed = Trouble::Terminal(std::io::ErrorKind::BrokenPipe.into());
        assert_eq!(Kind::of(&closed), Kind::ClosedPipe);
    }
}
