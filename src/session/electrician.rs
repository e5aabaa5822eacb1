//! A simulated electrician who follows the advice to the letter and answers from a hidden installation.

use serde_json::Value;

use super::Session;
use super::command;
use super::error::{ErrorCode, SessionError};
use super::hidden::Hidden;
use super::view::{AdviceView, MovedAnswer, VerdictView};

/// One thing that happened on a simulated visit.
#[derive(Clone, Debug)]
pub enum Step {
    /// A complaint was told.
    Complaint(command::Symptom, Box<MovedAnswer>),
    /// Advice was taken up.
    Advice(Box<AdviceView>),
    /// A hold point was done, with what was read.
    Hold(String, Vec<(String, String)>),
    /// A reading was taken.
    Read {
        /// Test.
        test: String,
        /// Place.
        at: String,
        /// As written.
        value: String,
        /// What came of it.
        moved: Box<MovedAnswer>,
    },
    /// A reading was questioned and taken again.
    Again(String, String, String),
    /// A test could not be done.
    Cannot(String, String, String),
    /// A verdict stood; whether the cause was there.
    Verdict(Box<VerdictView>, bool),
    /// A re-test after the repair: test, value, result.
    Recheck(String, String, String),
    /// Nothing more to do.
    Stuck(String),
}

/// How a simulated visit ended.
#[derive(Clone, Debug, Default, PartialEq)]
pub struct Outcome {
    /// The cause that was proved had the truth's repair group.
    pub right: bool,
    /// The first verdict acted on was right.
    pub first_right: bool,
    /// Probability of the first verdict.
    pub first_p: f64,
    /// Readings taken.
    pub tests: usize,
    /// Working minutes.
    pub minutes: f64,
    /// Group of the first verdict acted on.
    pub first_group: String,
}

/// Most readings on a visit.
const BUDGET: usize = 40;
/// Wrong repairs before the visit counts as failed.
const TRIALS: usize = 2;

/// Plays a visit to its end, telling each step.
///
/// # Errors
/// Whatever the visit refuses that following its own advice should not have met.
pub fn play(
    session: &mut Session,
    hidden: &mut Hidden,
    tell: &mut dyn FnMut(&Step),
) -> Result<Outcome, SessionError> {
    let symptom = hidden.complaint();
    let moved = session.symptom(&symptom)?;
    tell(&Step::Complaint(symptom, Box::new(moved)));
    let mut out = Outcome::default();
    let mut trials = 0;
    while out.tests < BUDGET {
        let answer = session.advise(&command::Advise {
            count: Some(3),
            within_ms: Some(0),
        })?;
        if let Some(verdict) = answer.verdict.filter(|v| v.confirm.is_none()) {
            let harmless = hidden
                .truth
                .as_ref()
                .is_none_or(|h| h.harmless || h.action == "nothing-found");
            let there = verdict.group == hidden.group()
                || hidden
                    .group()
                    .split(" + ")
                    .any(|part| part == verdict.group)
                || (verdict.action == "nothing-found" && harmless);
            if trials == 0 {
                out.first_right = there;
                out.first_p = verdict.p;
                out.first_group = verdict.group.clone();
            }
            tell(&Step::Verdict(Box::new(verdict.clone()), there));
            out.minutes += 10.0;
            if there {
                out.right = true;
                finish(session, hidden, &verdict, tell)?;
                return Ok(out);
            }
            trials += 1;
            if trials > TRIALS || verdict.faults.is_empty() {
                return Ok(out);
            }
            session.repair(&command::Repair {
                faults: verdict.faults,
                found: false,
                done: None,
                note: None,
            })?;
            continue;
        }
        let Some(advice) = answer.advice.into_iter().next() else {
            tell(&Step::Stuck(answer.why));
            return Ok(out);
        };
        out.minutes += advice.test.minutes;
        out.tests += 1;
        let (test, at) = (advice.test.test.clone(), advice.test.at.clone());
        tell(&Step::Advice(Box::new(advice)));
        attempt(session, hidden, &test, &at, 0, tell)?;
    }
    Ok(out)
}

/// Does a test with all its hold points, those done by other tests included.
fn attempt(
    session: &mut Session,
    hidden: &mut Hidden,
    test: &str,
    at: &str,
    depth: usize,
    tell: &mut dyn FnMut(&Step),
) -> Result<bool, SessionError> {
    let give_up = |session: &mut Session,
                   why: &str,
                   tell: &mut dyn FnMut(&Step)|
     -> Result<bool, SessionError> {
        session.cannot(&command::Cannot {
            test: test.to_owned(),
            at: at.to_owned(),
            why: Some(why.to_owned()),
            undo: None,
        })?;
        tell(&Step::Cannot(
            test.to_owned(),
            at.to_owned(),
            why.to_owned(),
        ));
        Ok(false)
    };
    let check = session.engine().check(test, at)?.clone();
    let Some(mut value) = hidden.read(&check) else {
        return give_up(session, "no access", tell);
    };
    let mut confirm = None;
    for _ in 0..24 {
        let ask = command::Reading {
            test: test.to_owned(),
            at: at.to_owned(),
            value: value.clone(),
            setup: None,
            confirm,
        };
        match session.reading(&ask) {
            Ok(moved) => {
                tell(&Step::Read {
                    test: test.to_owned(),
                    at: at.to_owned(),
                    value,
                    moved: Box::new(moved),
                });
                return Ok(true);
            }
            Err(e) if e.code == ErrorCode::HoldPointOpen => {
                let points = open_points(&e);
                let Some(point) = points.first() else {
                    return give_up(session, "hold points unclear", tell);
                };
                if let (Some(t), Some(a)) = (&point.test, &point.at) {
                    if depth >= 6 || !attempt(session, hidden, t, a, depth + 1, tell)? {
                        return give_up(session, "a proof it needs could not be had", tell);
                    }
                    if still_open(session, &ask, &point.point) {
                        return give_up(session, "the proof it needs was not given", tell);
                    }
                    continue;
                }
                if !do_point(session, hidden, point, tell)? {
                    return give_up(session, "not dead", tell);
                }
            }
            Err(e) if e.code == ErrorCode::NotCredible => {
                tell(&Step::Again(test.to_owned(), at.to_owned(), value.clone()));
                if let Some(again) = hidden.read(&check) {
                    value = again;
                }
                confirm = Some(true);
            }
            Err(e) if e.code == ErrorCode::Unavailable => {
                return give_up(session, &e.message, tell);
            }
            Err(e) => return Err(e),
        }
    }
    give_up(session, "its hold points do not close", tell)
}

fn still_open(session: &mut Session, ask: &command::Reading, point: &str) -> bool {
    match session.reading(&command::Reading {
        value: "unreadable".to_owned(),
        ..ask.clone()
    }) {
        Err(e) => open_points(&e).iter().any(|p| p.point == point),
        Ok(_) => false,
    }
}

/// A hold point as an error carries it.
struct Open {
    point: String,
    setup: crate::knowledge::Setup,
    wants: Vec<(String, [String; 2])>,
    test: Option<String>,
    at: Option<String>,
}

fn open_points(error: &SessionError) -> Vec<Open> {
    let Some(Value::Array(points)) = error.extra.get("points") else {
        return Vec::new();
    };
    points
        .iter()
        .filter(|p| p.get("done") != Some(&Value::Bool(true)))
        .filter_map(|p| {
            let text = |key: &str| p.get(key).and_then(Value::as_str).map(str::to_owned);
            let wants = p
                .get("wants")
                .and_then(Value::as_array)
                .into_iter()
                .flatten()
                .filter_map(|w| {
                    let name = w.get("name")?.as_str()?.to_owned();
                    let between = serde_json::from_value(w.get("between")?.clone()).ok()?;
                    Some((name, between))
                })
                .collect();
            Some(Open {
                point: text("point")?,
                setup: serde_json::from_value(p.get("setup")?.clone()).unwrap_or_default(),
                wants,
                test: text("test"),
                at: text("at"),
            })
        })
        .collect()
}

fn do_point(
    session: &mut Session,
    hidden: &mut Hidden,
    point: &Open,
    tell: &mut dyn FnMut(&Step),
) -> Result<bool, SessionError> {
    let readings: Vec<(String, String)> = point
        .wants
        .iter()
        .map(|(name, between)| (name.clone(), hidden.volts(&point.setup, between)))
        .collect();
    let ask = |done: bool, why: Option<String>| command::HoldPoint {
        point: point.point.clone(),
        done,
        readings: (!readings.is_empty() && done).then(|| readings.iter().cloned().collect()),
        why,
        by: Some("simulated".to_owned()),
    };
    match session.hold_point(&ask(true, None)) {
        Ok(_) => {
            tell(&Step::Hold(point.point.clone(), readings));
            Ok(true)
        }
        Err(e) if e.code == ErrorCode::NotDead => {
            tell(&Step::Hold(point.point.clone(), readings.clone()));
            session.hold_point(&ask(false, Some("not dead".to_owned())))?;
            Ok(false)
        }
        Err(e) => Err(e),
    }
}

/// Repair, re-tests, close.
fn finish(
    session: &mut Session,
    hidden: &mut Hidden,
    verdict: &VerdictView,
    tell: &mut dyn FnMut(&Step),
) -> Result<(), SessionError> {
    let nothing = verdict.faults.is_empty() || verdict.action == "nothing-found";
    if nothing {
        session.close(&command::Close {
            outcome: command::CloseOutcome::NothingFound,
            note: None,
        })?;
        return Ok(());
    }
    hidden.mended = true;
    let moved = session.repair(&command::Repair {
        faults: verdict.faults.clone(),
        found: true,
        done: Some(true),
        note: None,
    })?;
    let mut all = true;
    for owed in moved.checks.unwrap_or_default() {
        let check = session
            .engine()
            .check(&owed.test.test, &owed.test.at)?
            .clone();
        for _ in 0..24 {
            let Some(value) = hidden.read(&check) else {
                break;
            };
            let ask = command::Recheck {
                test: owed.test.test.clone(),
                at: owed.test.at.clone(),
                value: value.clone(),
            };
            match session.recheck(&ask) {
                Ok(answer) => {
                    let result = serde_json::to_value(&answer)
                        .ok()
                        .and_then(|v| v.get("result").and_then(Value::as_str).map(str::to_owned))
                        .unwrap_or_default();
                    tell(&Step::Recheck(owed.test.name.clone(), value, result));
                    break;
                }
                Err(e) if e.code == ErrorCode::HoldPointOpen => {
                    let points = open_points(&e);
                    let Some(point) = points.first() else { break };
                    if let (Some(t), Some(a)) = (&point.test, &point.at) {
                        if !attempt(session, hidden, t, a, 1, tell)? {
                            all = false;
                            break;
                        }
                    } else if !do_point(session, hidden, point, tell)? {
                        all = false;
                        break;
                    }
                }
                Err(_) => {
                    all = false;
                    break;
                }
            }
        }
    }
    let outcome = if all {
        command::CloseOutcome::Repaired
    } else {
        command::CloseOutcome::MadeSafe
    };
    if session
        .close(&command::Close {
            outcome,
            note: None,
        })
        .is_err()
    {
        session.close(&command::Close {
            outcome: command::CloseOutcome::MadeSafe,
            note: None,
        })?;
    }
    Ok(())
}
