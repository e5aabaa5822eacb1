//! One dim line on standard error while something takes long, gone when it is done.

use std::io::{self, Write};
use std::sync::mpsc::{self, RecvTimeoutError};
use std::thread;
use std::time::Duration;

use super::super::text::{Meaning, Style};

/// Nothing is shown before.
const PATIENCE: Duration = Duration::from_millis(300);

/// Whether and how progress is shown.
#[derive(Clone, Copy, Debug)]
pub struct Progress {
    wanted: bool,
    style: Style,
}

impl Progress {
    /// Shown on a terminal only.
    pub fn new(wanted: bool, style: Style) -> Self {
        Self { wanted, style }
    }

    /// Does something; says so when it takes long.
    pub fn over<T>(&self, what: &str, work: impl FnOnce() -> T) -> T {
        if !self.wanted {
            return work();
        }
        thread::scope(|scope| {
            let (done, waiting) = mpsc::channel::<()>();
            scope.spawn(move || {
                if waiting.recv_timeout(PATIENCE) != Err(RecvTimeoutError::Timeout) {
                    return;
                }
                let mut err = io::stderr().lock();
                // Nobody is harmed when this line cannot be shown.
                let _ = write!(
                    err,
                    "{}",
                    self.style.paint(Meaning::Dim, &format!("{what} …"))
                );
                let _ = err.flush();
                drop(err);
                let _ = waiting.recv();
                let blank = " ".repeat(what.chars().count() + 2);
                let _ = write!(io::stderr().lock(), "\r{blank}\r");
            });
            let result = work();
            drop(done);
            result
        })
    }
}
