//! The pipe as a program sees it: codes, state kept, logs resumed.

use std::path::Path;
use std::sync::Arc;

use serde_json::{Value, json};

use super::answer::Pipe;
use crate::knowledge::Knowledge;
use crate::session::Clock;

fn site() -> Value {
    json!({
        "schema": "straypath-site/1",
        "supply": {"system": "TN-C-S", "service": {"metres": 20, "mm2": 16}},
        "earthing": {"board": "msb", "link": true, "main_earth": {"metres": 4, "mm2": 6}},
        "boards": [{"id": "msb", "fed_from": "service", "main_switch": {"id": "main", "amps": 63, "poles": 1},
            "rcds": [{"id": "rcd1", "ma": 30}],
            "circuits": [{"id": "c1", "rcd": "rcd1", "phase": "L1", "breaker": {"curve": "C", "amps": 20},
                "cable": {"mm2": 2.5}, "points": [{"id": "p1", "metres": 9}, {"id": "p2", "metres": 14}]}]}],
        "equipment": [{"id": "kettle", "kind": "kettle", "at": "c1.p1", "watts": 2200}]
    })
}

fn pipe(log: Option<&Path>) -> Pipe {
    let knowledge = Arc::new(Knowledge::embedded().unwrap());
    Pipe::new(
        knowledge,
        log.map(Path::to_owned),
        Clock::stepping(1_767_261_600_000, 1000),
    )
}

fn ask(pipe: &mut Pipe, request: Value) -> Value {
    pipe.answer(&request.to_string())
}

fn code(answer: &Value) -> &str {
    answer["error"]["code"].as_str().unwrap_or("ok")
}

fn opened(log: Option<&Path>) -> Pipe {
    let mut pipe = pipe(log);
    let answer = ask(
        &mut pipe,
        json!({"op": "open", "site": site(), "seed": 1, "kit": ["multimeter", "insulation-tester"]}),
    );
    assert_eq!(answer["ok"], true, "{answer}");
    pipe
}

#[test]
fn nothing_but_vocabulary_before_open() {
    let mut pipe = pipe(None);
    for op in ["tests", "advise", "ranking", "state", "resume"] {
        assert_eq!(
            code(&ask(&mut pipe, json!({"op": op}))),
            "no-session",
            "{op}"
        );
    }
    let words = ask(&mut pipe, json!({"op": "vocabulary", "id": "v"}));
    assert_eq!(words["id"], "v");
    assert!(
        words["symptoms"]
            .as_array()
            .unwrap()
            .contains(&json!("tingle"))
    );
    assert!(
        words["errors"]
            .as_array()
            .unwrap()
            .contains(&json!("not-credible"))
    );
}

#[test]
fn what_is_wrong_with_open_is_said() {
    let mut pipe = pipe(None);
    assert_eq!(code(&ask(&mut pipe, json!({"op": "open"}))), "bad-request");
    assert_eq!(
        code(&ask(
            &mut pipe,
            json!({"op": "open", "site": {}, "path": "x"})
        )),
        "bad-request"
    );
    assert_eq!(
        code(&ask(
            &mut pipe,
            json!({"op": "open", "site": {"schema": "straypath-site/1"}})
        )),
        "bad-site"
    );
    let answer = ask(
        &mut pipe,
        json!({"op": "open", "site": site(), "kit": ["multimetre"]}),
    );
    assert_eq!(
        (code(&answer), &answer["error"]["nearest"][0]),
        ("unknown-word", &json!("multimeter"))
    );
}

#[test]
fn a_refusal_leaves_the_visit_as_it_was() {
    let mut pipe = opened(None);
    let before = ask(&mut pipe, json!({"op": "state"}));
    let requests = [
        (json!({"op": "symptom", "kind": "tingel"}), "unknown-word"),
        (
            json!({"op": "symptom", "kind": "rcd-trips", "at": "rcd9"}),
            "unknown-place",
        ),
        (
            json!({"op": "symptom", "kind": "rcd-trips", "at": "rcd1", "detail": {"when": "often"}}),
            "unknown-word",
        ),
        (
            json!({"op": "reading", "test": "no-such", "at": "msb", "value": "1"}),
            "unknown-test",
        ),
        (
            json!({"op": "cannot", "test": "no-such", "at": "msb", "why": "x"}),
            "unknown-test",
        ),
        (json!({"op": "retract", "entry": 99}), "unknown-entry"),
        (json!({"op": "retract", "entry": 1}), "unknown-entry"),
        (json!({"op": "evidence", "hypothesis": "x"}), "unknown-word"),
        (json!({"op": "note", "text": " "}), "bad-request"),
        (
            json!({"op": "repair", "faults": [], "found": true}),
            "bad-request",
        ),
        (
            json!({"op": "hold-point", "point": "x", "done": true}),
            "unknown-word",
        ),
        (
            json!({"op": "predict", "hookup": {"quantity": "continuity", "between": ["c1.p1.N", "c1.p9.N"]}}),
            "unknown-place",
        ),
        (
            json!({"op": "predict", "hookup": {"quantity": "continuity", "between": ["c1.p1.N", "c1.N"]},
            "parameters": {"supply.volts": null}}),
            "bad-request",
        ),
    ];
    for (request, expected) in requests {
        let answer = ask(&mut pipe, request.clone());
        assert_eq!(code(&answer), expected, "{request}: {answer}");
        assert!(
            !answer["error"]["hint"].as_str().unwrap().is_empty(),
            "{answer}"
        );
    }
    assert_eq!(ask(&mut pipe, json!({"op": "state"})), before);
    assert_eq!(
        ask(&mut pipe, json!({"op": "note", "text": "a"}))["entry"],
        2
    );
}

#[test]
fn predict_solves_the_circuit_as_told() {
    let mut pipe = opened(None);
    let request = json!({"op": "predict", "setup": {"open": ["c1.breaker"]}, "parameters": {"contact_ohms": 0, "joint_ohms": 0},
        "hookup": {"quantity": "continuity", "between": ["c1.N", "c1.p2.N"]}});
    let ohms = ask(&mut pipe, request)["value"].as_f64().unwrap();
    assert!((ohms - 14.0 * 7.41e-3).abs() < 1e-9, "{ohms}");
    let request = json!({"op": "predict", "setup": {"open": ["c1.breaker"], "lift": ["c1.N@board"]},
        "hookup": {"quantity": "continuity", "between": ["c1.N", "msb.N"]}, "parameters": {"cable.insulation_ohm_metres": null}});
    assert_eq!(ask(&mut pipe, request)["value"], "open");
}

#[test]
fn a_visit_goes_on_from_its_log_and_the_log_takes_no_other() {
    let folder = tempfile::tempdir().unwrap();
    let log = folder.path().join("a.log");
    let mut first = opened(Some(&log));
    assert_eq!(
        ask(&mut first, json!({"op": "symptom", "kind": "tingle"}))["warnings"][0]["code"],
        "keep-off-metal"
    );
    assert_eq!(
        code(&ask(&mut first, json!({"op": "open", "site": site()}))),
        "log-not-empty"
    );
    let mut second = pipe(Some(&log));
    assert_eq!(
        code(&ask(&mut second, json!({"op": "resume"}))),
        "log-locked"
    );
    let odds = ask(&mut first, json!({"op": "ranking", "count": 1000}));
    drop(first);
    assert_eq!(
        code(&ask(&mut second, json!({"op": "open", "site": site()}))),
        "log-not-empty"
    );
    assert_eq!(
        code(&ask(&mut second, json!({"op": "note", "text": "a"}))),
        "no-session"
    );
    let resumed = ask(&mut second, json!({"op": "resume"}));
    assert_eq!(resumed["ok"], true, "{resumed}");
    assert_eq!(
        ask(&mut second, json!({"op": "ranking", "count": 1000})),
        odds
    );
}

#[test]
fn a_closed_visit_takes_nothing_more() {
    let mut pipe = opened(None);
    assert_eq!(
        ask(
            &mut pipe,
            json!({"op": "close", "outcome": "nothing-found"})
        )["entry"],
        2
    );
    assert_eq!(
        code(&ask(&mut pipe, json!({"op": "note", "text": "a"}))),
        "no-session"
    );
    assert_eq!(
        code(&ask(&mut pipe, json!({"op": "open", "site": site()}))),
        "ok"
    );
}
