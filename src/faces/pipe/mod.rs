//! The pipe: one JSON object a line in, one line out (contract §6).

pub mod answer;
pub mod protocol;
pub mod serve;

#[cfg(test)]
mod pipe_tests;

use std::io::{self, BufRead, Write};
use std::path::PathBuf;
use std::sync::Arc;

use crate::knowledge::Knowledge;
use crate::session::Clock;

/// Serves one pipe until its input ends or nobody reads its output.
///
/// # Errors
/// The input cannot be read, or the output not written.
pub fn run(
    knowledge: Arc<Knowledge>,
    log: Option<PathBuf>,
    input: impl BufRead,
    output: impl Write,
) -> io::Result<()> {
    let mut pipe = answer::Pipe::new(knowledge, log, Clock::System);
    serve::serve(input, output, |line| pipe.answer(line))
}
