//! How a visit begins, goes on after a break, and is read again.

use std::path::Path;
use std::sync::Arc;

use serde_json::Value;

use super::Session;
use super::chain::{Record, Torn, sha256};
use super::clock::Clock;
use super::command;
use super::engine::Engine;
use super::error::{ErrorCode, SessionError};
use super::event::{Event, Opened, Resumed, SCHEMA};
use super::log::Log;
use super::view::{OpenAnswer, Warning};
use super::visit::Visit;
use crate::knowledge::Knowledge;
use crate::site::{Known, load_path};

/// The program's version.
const VERSION: &str = env!("CARGO_PKG_VERSION");

/// What is taken to be in the van when nobody says.
const USUAL_KIT: [&str; 9] = [
    "multimeter",
    "low-z-tester",
    "clamp",
    "leakage-clamp",
    "insulation-tester",
    "loop-tester",
    "rcd-tester",
    "proving-unit",
    "test-load",
];

fn said(code: &str, text: impl Into<String>) -> Warning {
    Warning {
        code: code.to_owned(),
        text: text.into(),
    }
}

impl Session {
    /// Opens a visit on a site, with an empty log.
    ///
    /// # Errors
    /// `bad-request` (neither or both of `site` and `path`), `bad-site`, `unknown-word` (kit),
    /// `log-not-empty`, log errors.
    pub fn open(
        knowledge: &Knowledge,
        clock: Clock,
        log: Log,
        ask: &command::Open,
    ) -> Result<(Self, OpenAnswer), SessionError> {
        if log.lines() > 0 {
            return Err(SessionError::new(
                ErrorCode::LogNotEmpty,
                format!("the log holds {} lines of another visit", log.lines()),
                "`resume` goes on with that visit; a new one needs a new log",
            ));
        }
        let site = document(knowledge, ask)?;
        let usual = || USUAL_KIT.map(str::to_owned).to_vec();
        let kit = ask.kit.clone().unwrap_or_else(usual);
        let engine = Arc::new(Engine::new(knowledge, &site, &kit)?);
        let opened = Opened {
            schema: SCHEMA.to_owned(),
            version: VERSION.to_owned(),
            knowledge: knowledge.digest.clone(),
            site,
            kit,
            seed: ask.seed.unwrap_or(1),
        };
        let visit = Visit::new(engine, opened.seed)?;
        let mut session = Self {
            clock,
            log,
            opened: opened.clone(),
            records: Vec::new(),
            visit,
            shown: Vec::new(),
        };
        session.record(Event::Opened(opened))?;
        let mut warnings = session.visit.engine.warnings.clone();
        if ask.kit.is_none() {
            warnings.push(said(
                "kit",
                format!(
                    "no kit was named: taken to be {}",
                    session.opened.kit.join(", ")
                ),
            ));
        }
        let answer = session.open_answer(None, warnings);
        Ok((session, answer))
    }

    /// Goes on with the visit of a log; every proof of dead is void.
    ///
    /// # Errors
    /// `no-session` where the log is missing or empty; log errors; `log-broken` where the site or the
    /// events do not fit this program's knowledge.
    pub fn resume(
        knowledge: &Knowledge,
        clock: Clock,
        path: &Path,
    ) -> Result<(Self, OpenAnswer), SessionError> {
        if !path.exists() {
            let text = format!("there is no log {}", path.display());
            return Err(SessionError::new(
                ErrorCode::NoSession,
                text,
                "`open` begins a visit",
            ));
        }
        let (log, records, torn) = Log::open(path)?;
        Self::resume_with(knowledge, clock, log, records, torn)
    }

    /// Goes on with a log that is open already.
    ///
    /// # Errors
    /// As [`Self::resume`].
    pub fn resume_with(
        knowledge: &Knowledge,
        clock: Clock,
        log: Log,
        records: Vec<Record>,
        torn: Option<Torn>,
    ) -> Result<(Self, OpenAnswer), SessionError> {
        let mut session = Self::replay(knowledge, records, |_, _| {})?;
        session.clock = clock;
        session.log = log;
        let mut warnings = session.visit.engine.warnings.clone();
        if session.opened.knowledge != knowledge.digest {
            warnings.push(said(
                "log",
                "the log was written with other knowledge files: its odds may come out otherwise",
            ));
        }
        if session.opened.version != VERSION {
            let text = format!(
                "the log was written by version {}, this is {VERSION}",
                session.opened.version
            );
            warnings.push(said("log", text));
        }
        if let Some(torn) = &torn {
            let text = format!(
                "line {} was cut off while it was written, before it was said to be recorded; it is left out: {}",
                torn.line, torn.text
            );
            warnings.push(said("log", text));
        }
        let torn = torn.map(|torn| torn.text);
        let entries = session.record(Event::Resumed(Resumed {
            version: VERSION.to_owned(),
            torn,
        }))?;
        let answer = session.open_answer(Some(entries), warnings);
        Ok((session, answer))
    }

    /// The same visit goes on: proofs of dead are void.
    ///
    /// # Errors
    /// Log errors.
    pub fn resume_again(&mut self) -> Result<OpenAnswer, SessionError> {
        let resumed = Resumed {
            version: VERSION.to_owned(),
            torn: None,
        };
        let entries = self.record(Event::Resumed(resumed))?;
        Ok(self.open_answer(Some(entries), self.visit.engine.warnings.clone()))
    }

    /// Reads a visit again from its events, in memory; `each` sees the state behind every one.
    ///
    /// # Errors
    /// `no-session` where there are no events; `log-broken` naming the line that does not fit.
    pub fn replay(
        knowledge: &Knowledge,
        records: Vec<Record>,
        mut each: impl FnMut(&mut Self, &Record),
    ) -> Result<Self, SessionError> {
        let Some(first) = records.first() else {
            return Err(SessionError::new(
                ErrorCode::NoSession,
                "the log is empty",
                "`open` begins a visit",
            ));
        };
        let Event::Opened(opened) = &first.event else {
            let text = "line 1 of the log opens no visit";
            return Err(
                SessionError::new(ErrorCode::LogBroken, text, "go back to a whole copy")
                    .with("line", 1),
            );
        };
        let unfit = |line: u64, error: &SessionError| {
            let hint = "read it with the knowledge files that it was written with";
            SessionError::new(
                ErrorCode::LogBroken,
                format!("line {line} does not fit: {error}"),
                hint,
            )
            .with("line", line)
        };
        let engine = Engine::new(knowledge, &opened.site, &opened.kit).map_err(|e| unfit(1, &e))?;
        let mut session = Self {
            clock: Clock::System,
            log: Log::in_memory(),
            opened: opened.clone(),
            records: Vec::with_capacity(records.len()),
            visit: Visit::new(Arc::new(engine), opened.seed)?,
            shown: Vec::new(),
        };
        for record in records {
            session
                .visit
                .apply(&record, &session.records)
                .map_err(|e| unfit(record.n, &e))?;
            session.records.push(record.clone());
            each(&mut session, &record);
        }
        Ok(session)
    }

    fn open_answer(&self, entries: Option<u64>, warnings: Vec<Warning>) -> OpenAnswer {
        // The same for a visit and its replay: from what was opened, and when.
        let time = self
            .records
            .first()
            .map(|first| first.time.to_string())
            .unwrap_or_default();
        let mark = sha256(format!("{}{}{time}", self.opened.site, self.opened.seed).as_bytes());
        OpenAnswer {
            session: mark.chars().take(12).collect(),
            hypotheses: self.visit.mind.hypotheses(),
            tests: self.visit.engine.checks().len(),
            entries,
            warnings,
        }
    }
}

/// The site document that a request names.
fn document(knowledge: &Knowledge, ask: &command::Open) -> Result<Value, SessionError> {
    match (&ask.site, &ask.path) {
        (Some(site), None) => Ok(site.clone()),
        (None, Some(path)) => {
            if let Err(error) = std::fs::File::open(path) {
                let text = format!("the site file {path} cannot be read: {error}");
                let hint = "check the name, and that this user may read it";
                return Err(SessionError::new(ErrorCode::Io, text, hint));
            }
            let known = Known::new(
                &knowledge.equipment,
                knowledge.rules.iter().map(|rule| rule.id.as_str()),
            );
            Ok(load_path(Path::new(path), &known)?.given)
        }
        (Some(_), Some(_)) => Err(SessionError::new(
            ErrorCode::BadRequest,
            "`open` has both `site` and `path`",
            "give one of them",
        )),
        (None, None) => Err(SessionError::new(
            ErrorCode::BadRequest,
            "`open` has neither `site` nor `path`",
            "give the site document, or the file that holds it",
        )),
    }
}
