//! The log of a visit: append, sync, then say so; locked while open; a torn last line recovered.

use std::fs::{File, OpenOptions, TryLockError};
use std::io::{self, Read, Write};
use std::path::{Path, PathBuf};

use jiff::Timestamp;

use super::chain::{self, LineFault, Record, Scan, Torn};
use super::error::{ErrorCode, SessionError};
use super::event::Event;

/// Longest log that is read, bytes: a visit of a hundred thousand entries stays far below.
const LARGEST: u64 = 1 << 28;

/// What is wrong with a log.
#[derive(Debug, thiserror::Error)]
pub enum LogError {
    /// Another program has it open.
    #[error("the log {} is in use by another straypath", .0.display())]
    Locked(PathBuf),
    /// A line is not as it was written.
    #[error("the log {} is broken: line {line} {fault}", path.display())]
    Broken {
        /// File.
        path: PathBuf,
        /// Line, from 1.
        line: u64,
        /// What is wrong.
        fault: LineFault,
    },
    /// The file cannot be read or written.
    #[error("the log {} cannot be {doing}: {source}", path.display())]
    Io {
        /// File.
        path: PathBuf,
        /// `opened`, `read`, `written`, …
        doing: &'static str,
        /// Why.
        source: io::Error,
    },
    /// An event that is not JSON.
    #[error("an event cannot be written: {0}")]
    Json(#[from] serde_json::Error),
}

impl From<LogError> for SessionError {
    fn from(error: LogError) -> Self {
        let message = error.to_string();
        match error {
            LogError::Locked(_) => {
                Self::new(ErrorCode::LogLocked, message, "close the other one, or give this visit a log of its own")
            }
            LogError::Broken { line, fault: LineFault::Newer(_), .. } => Self::new(
                ErrorCode::LogBroken,
                message,
                "go on with the version of straypath that wrote it, or a newer one; nothing was changed",
            )
            .with("line", line),
            LogError::Broken { line, .. } => Self::new(
                ErrorCode::LogBroken,
                message,
                "the file was left as it is: go back to a copy, or start a visit with a new log",
            )
            .with("line", line),
            LogError::Io { source, .. } => Self::new(ErrorCode::Io, message, io_cure(source.kind())),
            LogError::Json(_) => Self::new(ErrorCode::Internal, message, "nothing was recorded"),
        }
    }
}

fn io_cure(kind: io::ErrorKind) -> &'static str {
    match kind {
        io::ErrorKind::NotFound => "check the name; the folder must be there",
        io::ErrorKind::PermissionDenied | io::ErrorKind::ReadOnlyFilesystem => {
            "choose a file in a folder that you may write to"
        }
        io::ErrorKind::StorageFull | io::ErrorKind::QuotaExceeded => {
            "nothing recorded is lost: make room on the disk and say it again"
        }
        io::ErrorKind::IsADirectory => "name a file, not a folder",
        _ => "nothing recorded is lost: put it right and say it again",
    }
}

/// Where lines go.
#[derive(Debug)]
enum Store {
    /// Nowhere: a visit without a log.
    Memory,
    /// A file, locked as long as it is open.
    File {
        file: File,
        path: PathBuf,
        whole: u64,
        ragged: bool,
    },
}

/// The log of one visit, open for writing.
#[derive(Debug)]
pub struct Log {
    store: Store,
    n: u64,
    prev: String,
}

impl Log {
    /// A log that is kept nowhere: entries are numbered all the same.
    pub fn in_memory() -> Self {
        Self {
            store: Store::Memory,
            n: 0,
            prev: chain::START.to_owned(),
        }
    }

    /// Opens and locks a log, made if it is not there, and reads what it holds.
    /// A torn last line stays in the file until the next line takes its place.
    ///
    /// # Errors
    /// [`LogError`]: in use, broken (the file is left as it is), or not readable or writable.
    pub fn open(path: &Path) -> Result<(Self, Vec<Record>, Option<Torn>), LogError> {
        let fail = |doing, source| LogError::Io {
            path: path.to_owned(),
            doing,
            source,
        };
        let fresh = !path.exists();
        let mut file = OpenOptions::new()
            .read(true)
            .append(true)
            .create(true)
            .open(path)
            .map_err(|e| fail("opened for writing", e))?;
        file.try_lock().map_err(|e| match e {
            TryLockError::WouldBlock => LogError::Locked(path.to_owned()),
            TryLockError::Error(e) => fail("locked", e),
        })?;
        if fresh {
            sync_folder(path).map_err(|e| fail("made to last", e))?;
        }
        let found = read(&mut file, path)?;
        if let Some((line, fault)) = found.faults.into_iter().next() {
            return Err(LogError::Broken {
                path: path.to_owned(),
                line,
                fault,
            });
        }
        let n = found.records.len() as u64;
        let ragged = found.torn.is_some();
        let store = Store::File {
            file,
            path: path.to_owned(),
            whole: found.whole,
            ragged,
        };
        Ok((
            Self {
                store,
                n,
                prev: found.prev,
            },
            found.records,
            found.torn,
        ))
    }

    /// Lines written so far.
    pub fn lines(&self) -> u64 {
        self.n
    }

    /// Whether it is a file.
    pub fn is_file(&self) -> bool {
        matches!(self.store, Store::File { .. })
    }

    /// Appends an event and syncs it to the disk; its entry. On an error nothing was recorded, and
    /// the file holds what it held.
    ///
    /// # Errors
    /// [`LogError::Io`]: disk full, unplugged, read-only.
    pub fn append(&mut self, time: Timestamp, event: &Event) -> Result<u64, LogError> {
        let n = self.n + 1;
        let mut line = chain::write_line(n, time, &self.prev, event)?;
        let prev = chain::sha256(line.as_bytes());
        line.push('\n');
        if let Store::File {
            file,
            path,
            whole,
            ragged,
        } = &mut self.store
        {
            let fail = |doing, source| LogError::Io {
                path: path.clone(),
                doing,
                source,
            };
            if *ragged {
                file.set_len(*whole).map_err(|e| fail("mended", e))?;
                *ragged = false;
            }
            let written = file
                .write_all(line.as_bytes())
                .and_then(|()| file.sync_data());
            if let Err(error) = written {
                // What half arrived must not stay in front of the next line.
                *ragged = file.set_len(*whole).is_err();
                return Err(fail("written", error));
            }
            *whole += line.len() as u64;
        }
        self.n = n;
        self.prev = prev;
        Ok(n)
    }
}

fn read(file: &mut File, path: &Path) -> Result<Scan, LogError> {
    let fail = |source| LogError::Io {
        path: path.to_owned(),
        doing: "read",
        source,
    };
    let mut bytes = Vec::new();
    // A device without an end must not fill the memory.
    let kind = file.metadata().map_err(fail)?;
    if kind.is_file() {
        file.take(LARGEST + 1)
            .read_to_end(&mut bytes)
            .map_err(fail)?;
    }
    if bytes.len() as u64 > LARGEST {
        return Err(fail(io::Error::new(
            io::ErrorKind::FileTooLarge,
            "it is larger than any log of a visit",
        )));
    }
    Ok(chain::scan(&bytes))
}

fn sync_folder(path: &Path) -> io::Result<()> {
    let folder = match path.parent() {
        Some(folder) if !folder.as_os_str().is_empty() => folder,
        _ => Path::new("."),
    };
    // Where a folder cannot be opened as a file, the system keeps its own order.
    match File::open(folder) {
        Ok(folder) => folder.sync_all(),
        Err(_) => Ok(()),
    }
}

/// Reads a log without locking or changing it, for a review: what it holds and what is wrong with it.
///
/// # Errors
/// [`LogError::Io`] when it cannot be read at all.
pub fn verify(path: &Path) -> Result<Scan, LogError> {
    let mut file = File::open(path).map_err(|source| LogError::Io {
        path: path.to_owned(),
        doing: "opened",
        source,
    })?;
    read(&mut file, path)
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::session::command::Note;

    fn note(text: &str) -> Event {
        Event::Note(Note {
            text: text.to_owned(),
        })
    }

    fn code(error: LogError) -> ErrorCode {
        SessionError::from(error).code
    }

    #[test]
    fn what_was_appended_is_read_back_and_goes_on() {
        let folder = tempfile::tempdir().unwrap();
        let path = folder.path().join("a.log");
        let (mut log, records, _) = Log::open(&path).unwrap();
        assert!(records.is_empty());
        assert_eq!(
            log.append(Timestamp::UNIX_EPOCH, &note("eins\nzwei"))
                .unwrap(),
            1
        );
        drop(log);
        let (mut log, records, torn) = Log::open(&path).unwrap();
        assert_eq!(
            (records.len(), &records[0].event, torn),
            (1, &note("eins\nzwei"), None)
        );
        assert_eq!(log.append(Timestamp::UNIX_EPOCH, &note("b")).unwrap(), 2);
        assert!(verify(&path).unwrap().faults.is_empty());
    }

    #[test]
    fn cut_at_any_byte_no_acknowledged_line_is_lost() {
        let folder = tempfile::tempdir().unwrap();
        let path = folder.path().join("a.log");
        let (mut log, ..) = Log::open(&path).unwrap();
        for n in 0..3 {
            log.append(Timestamp::UNIX_EPOCH, &note(&format!("n{n} Ω")))
                .unwrap();
        }
        drop(log);
        let whole = std::fs::read(&path).unwrap();
        for cut in 0..=whole.len() {
            std::fs::write(&path, &whole[..cut]).unwrap();
            let kept = whole[..cut].iter().filter(|&&b| b == b'\n').count();
            let (mut log, records, torn) = Log::open(&path).unwrap();
            assert_eq!(records.len(), kept, "cut at {cut}");
            assert_eq!(torn.is_some(), cut > 0 && whole[cut - 1] != b'\n');
            assert_eq!(
                log.append(Timestamp::UNIX_EPOCH, &note("after")).unwrap(),
                kept as u64 + 1
            );
            drop(log);
            let found = verify(&path).unwrap();
            assert_eq!(
                (found.records.len(), found.faults, found.torn),
                (kept + 1, vec![], None)
            );
        }
    }

    #[test]
    fn a_log_in_use_is_refused_and_can_still_be_reviewed() {
        let folder = tempfile::tempdir().unwrap();
        let path = folder.path().join("a.log");
        let (mut log, ..) = Log::open(&path).unwrap();
        log.append(Timestamp::UNIX_EPOCH, &note("a")).unwrap();
        assert_eq!(code(Log::open(&path).unwrap_err()), ErrorCode::LogLocked);
        assert_eq!(verify(&path).unwrap().records.len(), 1);
    }

    #[test]
    fn a_changed_log_is_refused_and_left_alone() {
        let folder = tempfile::tempdir().unwrap();
        let path = folder.path().join("a.log");
        let (mut log, ..) = Log::open(&path).unwrap();
        log.append(Timestamp::UNIX_EPOCH, &note("0.35")).unwrap();
        drop(log);
        let forged = std::fs::read_to_string(&path)
            .unwrap()
            .replace("0.35", "0.36");
        std::fs::write(&path, &forged).unwrap();
        let error = SessionError::from(Log::open(&path).unwrap_err());
        assert_eq!(
            (error.code, &error.extra["line"]),
            (ErrorCode::LogBroken, &1.into())
        );
        assert_eq!(std::fs::read_to_string(&path).unwrap(), forged);
    }

    #[test]
    fn a_full_disk_is_said_and_nothing_counts() {
        let full = Path::new("/dev/full");
        if !full.exists() {
            return;
        }
        let (mut log, ..) = Log::open(full).unwrap();
        for _ in 0..2 {
            assert_eq!(
                code(log.append(Timestamp::UNIX_EPOCH, &note("a")).unwrap_err()),
                ErrorCode::Io
            );
        }
        assert_eq!(log.lines(), 0);
    }

    #[test]
    fn no_folder_a_folder_and_no_file_are_named() {
        let folder = tempfile::tempdir().unwrap();
        let nowhere = folder.path().join("no/such/a.log");
        let error = SessionError::from(Log::open(&nowhere).unwrap_err());
        assert_eq!(error.code, ErrorCode::Io);
        assert!(
            error.message.contains("a.log") && error.hint.contains("folder"),
            "{error:?}"
        );
        assert_eq!(code(Log::open(folder.path()).unwrap_err()), ErrorCode::Io);
        assert_eq!(code(verify(&nowhere).unwrap_err()), ErrorCode::Io);
    }
}
