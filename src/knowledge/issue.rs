//! A fault of a knowledge file: file, line, what is wrong and the cure.

use std::fmt;

/// One fault of a knowledge file.
#[derive(Clone, Debug, PartialEq, Eq, PartialOrd, Ord)]
pub struct Issue {
    /// File as a person finds it, `<built-in>/faults/x.toml` or a path.
    pub file: String,
    /// Line, from 1; 0 where no line is to blame.
    pub line: usize,
    /// What is wrong.
    pub what: String,
    /// What to do about it.
    pub cure: String,
}

impl fmt::Display for Issue {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        if self.line == 0 {
            write!(f, "{}: {}; {}", self.file, self.what, self.cure)
        } else {
            write!(
                f,
                "{}:{}: {}; {}",
                self.file, self.line, self.what, self.cure
            )
        }
    }
}

/// Why knowledge could not be loaded.
#[derive(Debug, thiserror::Error)]
pub enum KnowledgeError {
    /// A folder or file that cannot be read.
    #[error(
        "cannot read {path}: {source}; name a readable folder of knowledge files with --knowledge"
    )]
    Read {
        /// The path.
        path: String,
        /// What the system says.
        source: std::io::Error,
    },
    /// Files with faults, all of them listed.
    #[error("{}", listed(.0))]
    Faulty(Vec<Issue>),
}

fn listed(issues: &[Issue]) -> String {
    let lines: Vec<String> = issues.iter().map(Issue::to_string).collect();
    format!(
        "{} in the knowledge files:\n{}",
        count(lines.len()),
        lines.join("\n")
    )
}

fn count(n: usize) -> String {
    if n == 1 {
        "1 fault".into()
    } else {
        format!("{n} faults")
    }
}
