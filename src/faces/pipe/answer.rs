//! What each request is answered: a session behind the lines, or a refusal.

use std::panic::{AssertUnwindSafe, catch_unwind};
use std::path::PathBuf;
use std::sync::Arc;

use serde::Serialize;
use serde_json::{Value, json};

use super::protocol::{Request, read};
use super::serve::refusal;
use crate::knowledge::Knowledge;
use crate::session::{Clock, ErrorCode, Log, Session, SessionError, vocabulary};

/// One pipe: at most one visit at a time.
#[derive(Debug)]
pub struct Pipe {
    knowledge: Arc<Knowledge>,
    log: Option<PathBuf>,
    clock: Clock,
    session: Option<Session>,
}

type Answer = Result<Value, SessionError>;

fn shown(answer: impl Serialize) -> Answer {
    serde_json::to_value(answer).map_err(|e| {
        SessionError::new(
            ErrorCode::Internal,
            format!("the answer is not JSON: {e}"),
            "report it",
        )
    })
}

impl Pipe {
    /// A pipe that keeps its visit in a log, or nowhere.
    pub fn new(knowledge: Arc<Knowledge>, log: Option<PathBuf>, clock: Clock) -> Self {
        Self {
            knowledge,
            log,
            clock,
            session: None,
        }
    }

    /// Answers one line.
    pub fn answer(&mut self, line: &str) -> Value {
        let (id, request) = read(line);
        // A fault of this program must not end the visit of whoever is at the other end.
        let answer = request.and_then(|request| {
            catch_unwind(AssertUnwindSafe(|| self.carry_out(request)))
                .unwrap_or_else(|_| Err(self.recover()))
        });
        match answer {
            Ok(Value::Object(mut object)) => {
                object.insert("ok".to_owned(), true.into());
                if let Some(id) = id {
                    object.insert("id".to_owned(), id);
                }
                Value::Object(object)
            }
            Ok(other) => json!({"ok": true, "answer": other}),
            Err(error) => refusal(&error, id),
        }
    }

    /// Puts the visit back to where its events leave it.
    fn recover(&mut self) -> SessionError {
        let kept = self.session.take().and_then(|mut session| {
            let again =
                catch_unwind(AssertUnwindSafe(|| session.rebuild().is_ok())).unwrap_or(false);
            again.then_some(session)
        });
        let hint = match (&kept, &self.log) {
            (Some(_), _) => "the visit stands as its log does: go on, and report this line",
            (None, Some(_)) => {
                "the visit was put down: `resume` goes on with its log; report this line"
            }
            (None, None) => "the visit was put down: `open` begins another; report this line",
        };
        self.session = kept;
        SessionError::new(ErrorCode::Internal, "a fault of this program", hint)
    }

    fn session(&mut self) -> Result<&mut Session, SessionError> {
        let hint = match &self.log {
            Some(_) => "send `open`, or `resume` for the visit of the log",
            None => "send `open` first",
        };
        self.session
            .as_mut()
            .ok_or_else(|| SessionError::new(ErrorCode::NoSession, "no visit is open", hint))
    }

    fn carry_out(&mut self, request: Request) -> Answer {
        match request {
            Request::Vocabulary => Ok(vocabulary(&self.knowledge)),
            Request::Open(ask) => {
                let log = self.new_log()?;
                let (session, answer) =
                    Session::open(&self.knowledge, self.clock.clone(), log, &ask)?;
                self.session = Some(session);
                shown(answer)
            }
            Request::Resume => self.resume(),
            Request::Symptom(ask) => shown(self.session()?.symptom(&ask)?),
            Request::Tests => shown(self.session()?.tests()),
            Request::Advise(ask) => shown(self.session()?.advise(&ask)?),
            Request::HoldPoint(ask) => shown(self.session()?.hold_point(&ask)?),
            Request::Reading(ask) => shown(self.session()?.reading(&ask)?),
            Request::Cannot(ask) => shown(self.session()?.cannot(&ask)?),
            Request::Ranking(ask) => shown(self.session()?.ranking(&ask)),
            Request::Evidence(ask) => shown(self.session()?.evidence(&ask)?),
            Request::Predict(ask) => shown(self.session()?.engine().predict(&ask)?),
            Request::WhatIf(ask) => shown(self.session()?.whatif(&ask)?),
            Request::Retract(ask) => shown(self.session()?.retract(&ask)?),
            Request::Repair(ask) => shown(self.session()?.repair(&ask)?),
            Request::Recheck(ask) => shown(self.session()?.recheck(&ask)?),
            Request::Note(ask) => shown(self.session()?.note(&ask)?),
            Request::State => shown(self.session()?.state()),
            Request::Close(ask) => shown(self.session()?.close(&ask)?),
        }
    }

    /// The log of a visit that begins.
    fn new_log(&self) -> Result<Log, SessionError> {
        let Some(path) = &self.log else {
            return Ok(Log::in_memory());
        };
        if self.session.is_some() {
            let text = format!("the log {} holds the visit that is open", path.display());
            return Err(SessionError::new(
                ErrorCode::LogNotEmpty,
                text,
                "close it, and start another pipe with a new log",
            ));
        }
        let (log, ..) = Log::open(path)?;
        Ok(log)
    }

    fn resume(&mut self) -> Answer {
        if let Some(session) = &mut self.session {
            return shown(session.resume_again()?);
        }
        let Some(path) = &self.log else {
            let hint = "start the pipe with `--log FILE` to keep a visit and go on with it";
            return Err(SessionError::new(
                ErrorCode::NoSession,
                "there is no log to go on with",
                hint,
            ));
        };
        let (session, answer) = Session::resume(&self.knowledge, self.clock.clone(), path)?;
        self.session = Some(session);
        shown(answer)
    }
}
