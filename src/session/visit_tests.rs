//! A visit from its commands: points before readings, corrections, re-tests, and the same state from its log.

use serde_json::{Value, json};

use super::command::{self, CloseOutcome};
use super::{Clock, ErrorCode, Log, Session, SessionError};
use crate::checks::Check;
use crate::knowledge::Knowledge;

fn site() -> Value {
    json!({
        "schema": "straypath-site/1",
        "supply": {"system": "TN-C-S", "service": {"metres": 20, "mm2": 16}},
        "earthing": {"board": "msb", "link": true, "main_earth": {"metres": 4, "mm2": 6},
            "bonds": [{"id": "water", "metres": 9, "mm2": 4}]},
        "boards": [{"id": "msb", "fed_from": "service", "main_switch": {"id": "main", "amps": 63, "poles": 1},
            "rcds": [{"id": "rcd1", "ma": 30}],
            "circuits": [{"id": "c1", "rcd": "rcd1", "phase": "L1", "breaker": {"curve": "C", "amps": 20},
                "cable": {"mm2": 2.5}, "points": [{"id": "p1", "metres": 9}, {"id": "p2", "metres": 14}]}]}],
        "equipment": [{"id": "kettle", "kind": "kettle", "at": "c1.p1", "watts": 2200}]
    })
}

fn opened() -> Session {
    let ask = command::Open {
        site: Some(site()),
        seed: Some(7),
        ..command::Open::default()
    };
    let knowledge = Knowledge::embedded().unwrap();
    Session::open(&knowledge, Clock::stepping(0, 1000), Log::in_memory(), &ask)
        .unwrap()
        .0
}

fn reading(check: &Check, value: &str, confirm: bool) -> command::Reading {
    command::Reading {
        test: check.test.clone(),
        at: check.at.clone(),
        value: value.to_owned(),
        setup: None,
        confirm: Some(confirm),
    }
}

/// A check whose first reading is stopped by hold points that are done by hand.
fn held(session: &mut Session) -> (Check, SessionError) {
    held_of(session, |_| true)
}

fn held_of(session: &mut Session, fits: impl Fn(&Check) -> bool) -> (Check, SessionError) {
    for check in session.engine().checks().to_vec() {
        if fits(&check)
            && let Err(error) = session.reading(&reading(&check, value_for(&check), true))
            && error.code == ErrorCode::HoldPointOpen
            && error.extra["points"]
                .as_array()
                .unwrap()
                .iter()
                .all(|point| point["test"].is_null())
        {
            return (check, error);
        }
    }
    panic!("no check of knowledge has hold points of its own");
}

fn value_for(check: &Check) -> &'static str {
    match check.hookup.quantity() {
        "seen" => "no",
        "holds" => "holds",
        "lamp" => "none",
        "trip-time" => "24 ms",
        _ => "0.1",
    }
}

fn done(point: &Value, volts: &str) -> command::HoldPoint {
    let wants = point["wants"].as_array().unwrap();
    let readings = wants
        .iter()
        .map(|want| (want["name"].as_str().unwrap().to_owned(), volts.to_owned()))
        .collect();
    command::HoldPoint {
        point: point["point"].as_str().unwrap().to_owned(),
        done: true,
        readings: Some(readings),
        why: None,
        by: Some("A. N. Other".to_owned()),
    }
}

/// Does every point in order until the reading is let in.
fn take(session: &mut Session, check: &Check, value: &str) -> u64 {
    for _ in 0..40 {
        match session.reading(&reading(check, value, true)) {
            Ok(answer) => return answer.entry,
            Err(error) if error.code == ErrorCode::HoldPointOpen => {
                let points = error.extra["points"].as_array().unwrap().clone();
                session.hold_point(&done(&points[0], "0.1 V")).unwrap();
            }
            Err(error) => panic!("{error:?}"),
        }
    }
    panic!("the points of {} never end", check.test);
}

#[test]
fn a_reading_waits_for_its_points_and_counts_once_they_are_done() {
    let mut session = opened();
    let (check, error) = held(&mut session);
    assert_eq!(
        session.records().len(),
        1,
        "a refused reading is not recorded"
    );
    assert!(!error.extra["points"].as_array().unwrap().is_empty());
    let entry = take(&mut session, &check, value_for(&check));
    assert!(
        session
            .records()
            .iter()
            .any(|record| record.n == entry && record.event.name() == "reading")
    );
}

#[test]
fn a_point_that_cannot_be_done_closes_its_tests_and_needs_a_reason() {
    let mut session = opened();
    let (check, error) = held(&mut session);
    let mut said = done(&error.extra["points"][0], "0 V");
    said.done = false;
    assert_eq!(
        session.hold_point(&said).unwrap_err().code,
        ErrorCode::BadRequest
    );
    said.why = Some("the cover is sealed".to_owned());
    session.hold_point(&said).unwrap();
    let error = session
        .reading(&reading(&check, value_for(&check), true))
        .unwrap_err();
    assert_eq!(error.code, ErrorCode::Unavailable);
    assert!(error.message.contains("sealed"), "{error}");
}

#[test]
fn unknown_is_cannot_and_comes_back() {
    let mut session = opened();
    let check = session
        .engine()
        .checks()
        .iter()
        .find(|c| session.why_not(c).is_none())
        .unwrap()
        .clone();
    session.reading(&reading(&check, "unknown", false)).unwrap();
    assert!(session.why_not(&check).is_some());
    let back = command::Cannot {
        test: check.test.clone(),
        at: check.at.clone(),
        why: None,
        undo: Some(true),
    };
    session.cannot(&back).unwrap();
    assert!(session.why_not(&check).is_none());
    assert_eq!(
        session.cannot(&back).unwrap_err().code,
        ErrorCode::UnknownEntry
    );
}

#[test]
fn what_was_taken_back_is_off_the_lists() {
    let mut session = opened();
    let check = session.engine().checks()[0].clone();
    let cannot = command::Cannot {
        test: check.test.clone(),
        at: check.at.clone(),
        why: Some("wet".into()),
        undo: None,
    };
    let entry = session.cannot(&cannot).unwrap().entry;
    session.retract(&command::Retract { entry }).unwrap();
    assert!(
        session
            .why_not(&check)
            .is_none_or(|why| !why.contains("wet"))
    );
    assert!(session.is_retracted(entry));
    assert_eq!(
        session
            .retract(&command::Retract { entry })
            .unwrap_err()
            .code,
        ErrorCode::UnknownEntry
    );
}

#[test]
fn a_repair_owes_its_re_tests_before_the_visit_may_end_repaired() {
    let mut session = opened();
    let kinds = &session.engine().knowledge().faults;
    let kind = kinds
        .iter()
        .find(|k| !k.repair.rechecks.is_empty() && k.at == ["service"])
        .unwrap();
    let fault = json!({"kind": kind.kind, "at": "service", "conductor": kind.conductors.first()});
    let fault: crate::faults::Fault = serde_json::from_value(fault).unwrap();
    let mut ask = command::Repair {
        faults: vec![fault],
        found: false,
        done: Some(true),
        note: None,
    };
    assert_eq!(
        session.repair(&ask).unwrap_err().code,
        ErrorCode::BadRequest
    );
    ask.found = true;
    let answer = session.repair(&ask).unwrap();
    assert!(!answer.checks.unwrap().is_empty());
    let close = |outcome| command::Close {
        outcome,
        note: None,
    };
    let error = session.close(&close(CloseOutcome::Repaired)).unwrap_err();
    assert_eq!(error.code, ErrorCode::RecheckOwed);
    session.close(&close(CloseOutcome::Referred)).unwrap();
    assert!(session.is_closed());
}

#[test]
fn a_replay_stands_where_the_visit_stood() {
    let mut session = opened();
    session
        .symptom(&command::Symptom {
            kind: "lamps-dim".into(),
            at: None,
            detail: None,
        })
        .unwrap();
    let (check, _) = held(&mut session);
    take(&mut session, &check, value_for(&check));
    session
        .advise(&command::Advise {
            count: Some(2),
            within_ms: Some(1),
        })
        .unwrap();
    let knowledge = session.engine().knowledge().clone();
    let mut again = Session::replay(&knowledge, session.records().to_vec(), |_, _| {}).unwrap();
    let all = command::Ranking {
        count: Some(100_000),
    };
    assert_eq!(again.state(), session.state());
    assert_eq!(
        serde_json::to_string(&again.ranking(&all)).unwrap(),
        serde_json::to_string(&session.ranking(&all)).unwrap()
    );
}

#[test]
fn all_odds_and_the_three_beside_them_sum_to_one() {
    let mut session = opened();
    let (check, _) = held(&mut session);
    take(&mut session, &check, value_for(&check));
    let odds = session
        .ranking(&command::Ranking {
            count: Some(1_000_000),
        })
        .odds;
    let listed: f64 = odds.ranking.iter().map(|row| row.p).sum();
    let all = listed + odds.nothing_wrong + odds.unlisted + odds.not_examined;
    assert!((all - 1.0).abs() < 1e-9, "{all}");
    let grouped: f64 = odds.groups.iter().map(|row| row.p).sum();
    assert!((grouped - listed).abs() < 1e-9, "{grouped} {listed}");
}

#[test]
fn a_reading_that_nothing_explains_is_asked_about_once() {
    let mut session = opened();
    let (check, _) = held_of(&mut session, |check| check.hookup.quantity() == "volts");
    take_points(&mut session, &check);
    let lines = session.records().len();
    let error = session
        .reading(&reading(&check, "900 V", false))
        .unwrap_err();
    assert_eq!(error.code, ErrorCode::NotCredible, "{error:?}");
    assert_eq!(
        session.records().len(),
        lines,
        "a reading held back is not recorded"
    );
    session.reading(&reading(&check, "900 V", true)).unwrap();
}

/// Does every point of a check, and reads nothing.
fn take_points(session: &mut Session, check: &Check) {
    for _ in 0..40 {
        match session.reading(&reading(check, "900 V", false)) {
            Err(error) if error.code == ErrorCode::HoldPointOpen => {
                let points = error.extra["points"].as_array().unwrap().clone();
                session.hold_point(&done(&points[0], "0.1 V")).unwrap();
            }
            _ => return,
        }
    }
}

#[test]
fn what_if_and_evidence_record_nothing() {
    let mut session = opened();
    let (check, _) = held(&mut session);
    let entry = take(&mut session, &check, value_for(&check));
    let before = session.ranking(&command::Ranking { count: Some(50) });
    let lines = session.records().len();
    let value = value_for(&check).to_owned();
    session
        .whatif(&command::WhatIf {
            test: check.test.clone(),
            at: check.at.clone(),
            value,
        })
        .unwrap();
    let hypothesis = before.odds.ranking[0].hypothesis.clone();
    let said = session
        .evidence(&command::Evidence { hypothesis })
        .unwrap()
        .evidence;
    assert_eq!(
        said.iter().map(|row| row.entry).collect::<Vec<_>>(),
        [entry]
    );
    assert_eq!(session.records().len(), lines);
    assert_eq!(
        session.ranking(&command::Ranking { count: Some(50) }),
        before
    );
}
