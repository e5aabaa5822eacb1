//! The pipe as a process: killed at any moment, fed rubbish, left alone.

use std::fs;
use std::io::{BufRead, BufReader, Read, Write};
use std::path::Path;
use std::process::{Child, Command, Stdio};

use serde_json::{Value, json};
use straypath::session::log::verify;

/// A site small enough that opening it costs next to nothing.
fn site() -> Value {
    json!({
        "schema": "straypath-site/1",
        "supply": {"system": "TN-C-S", "service": {"metres": 20, "mm2": 16}},
        "earthing": {"board": "msb", "link": true, "main_earth": {"metres": 4, "mm2": 6}},
        "boards": [{"id": "msb", "fed_from": "service", "main_switch": {"id": "main", "amps": 63, "poles": 1},
            "circuits": [{"id": "c1", "phase": "L1", "breaker": {"curve": "C", "amps": 20},
                "cable": {"mm2": 2.5}, "points": [{"id": "p1", "metres": 9}]}]}]
    })
}

fn start(log: Option<&Path>) -> Child {
    let mut command = Command::new(env!("CARGO_BIN_EXE_straypath"));
    command.arg("pipe");
    if let Some(log) = log {
        command.arg("--log").arg(log);
    }
    command
        .stdin(Stdio::piped())
        .stdout(Stdio::piped())
        .stderr(Stdio::null())
        .spawn()
        .expect("the program starts")
}

fn say(pipe: &mut Child, request: &Value) {
    let line = format!("{request}\n");
    pipe.stdin
        .as_mut()
        .expect("an input")
        .write_all(line.as_bytes())
        .expect("a reader");
}

fn answers(pipe: &mut Child) -> impl Iterator<Item = Value> + use<> {
    let output = BufReader::new(pipe.stdout.take().expect("an output"));
    // A line that the kill cut short says nothing.
    output
        .lines()
        .map_while(Result::ok)
        .map_while(|line| serde_json::from_str(&line).ok())
}

#[test]
fn killed_at_any_moment_nothing_that_was_said_to_be_recorded_is_lost() {
    let folder = tempfile::tempdir().unwrap();
    let log = folder.path().join("a.log");
    let mut most = 0;
    for round in 0..20 {
        let mut pipe = start(Some(&log));
        let begin = if round == 0 {
            json!({"op": "open", "site": site(), "kit": ["multimeter"]})
        } else {
            json!({"op": "resume"})
        };
        say(&mut pipe, &begin);
        let mut replies = answers(&mut pipe);
        let opened = replies.next().expect("an answer");
        assert_eq!(opened["ok"], true, "round {round}: {opened}");
        let mut input = pipe.stdin.take().expect("an input");
        let writer = std::thread::spawn(move || {
            for n in 0..400 {
                if input
                    .write_all(
                        format!("{}\n", json!({"op": "note", "text": format!("note {n}")}))
                            .as_bytes(),
                    )
                    .is_err()
                {
                    break;
                }
            }
        });
        for reply in replies.by_ref().take(1 + round * 7 % 90) {
            most = most.max(reply["entry"].as_u64().expect("an entry"));
        }
        pipe.kill().expect("it can be killed");
        most = replies
            .filter_map(|reply| reply["entry"].as_u64())
            .fold(most, u64::max);
        pipe.wait().expect("it ends");
        writer.join().expect("the writer ends");
        let found = verify(&log).unwrap();
        assert!(found.faults.is_empty(), "round {round}: {:?}", found.faults);
        let kept = found.records.last().map_or(0, |record| record.n);
        assert!(
            kept >= most,
            "round {round}: {most} was said to be recorded, {kept} is there"
        );
    }
}

#[test]
fn rubbish_is_answered_line_by_line_and_the_end_of_input_ends_it() {
    let mut pipe = start(None);
    let mut input = pipe.stdin.take().expect("an input");
    let writer = std::thread::spawn(move || {
        for _ in 0..2000 {
            input
                .write_all(b"{\"op\":\"state\",\"id\":1}\n")
                .expect("a reader");
        }
        input
            .write_all(b"\x00\xff\n{}\n[]\nnull\n")
            .expect("a reader");
        input.write_all(&vec![b'{'; 10 << 20]).expect("a reader");
        input
            .write_all(b"\n{\"op\":\"note\",\"te")
            .expect("a reader");
    });
    let codes: Vec<String> = answers(&mut pipe)
        .map(|reply| reply["error"]["code"].as_str().expect("a code").to_owned())
        .collect();
    writer.join().expect("the writer ends");
    assert!(pipe.wait().expect("it ends").success());
    assert!(codes[..2000].iter().all(|code| code == "no-session"));
    assert_eq!(
        codes[2000..],
        [
            "bad-json",
            "bad-request",
            "bad-request",
            "bad-request",
            "too-large",
            "bad-json"
        ]
    );
}

#[test]
fn nobody_listening_is_no_failure() {
    let mut pipe = start(None);
    drop(pipe.stdout.take());
    let mut input = pipe.stdin.take().expect("an input");
    for _ in 0..100 {
        if input.write_all(b"{\"op\":\"vocabulary\"}\n").is_err() {
            break;
        }
    }
    drop(input);
    assert!(pipe.wait().expect("it ends").success());
}

#[test]
fn a_log_changed_by_one_byte_is_named_and_left_alone() {
    let folder = tempfile::tempdir().unwrap();
    let log = folder.path().join("a.log");
    let mut pipe = start(Some(&log));
    say(
        &mut pipe,
        &json!({"op": "open", "site": site(), "kit": ["multimeter"]}),
    );
    say(&mut pipe, &json!({"op": "note", "text": "0.35"}));
    say(&mut pipe, &json!({"op": "note", "text": "0.45"}));
    drop(pipe.stdin.take());
    let mut text = String::new();
    pipe.stdout
        .take()
        .expect("an output")
        .read_to_string(&mut text)
        .unwrap();
    pipe.wait().unwrap();
    let forged = fs::read_to_string(&log).unwrap().replace("0.35", "0.36");
    fs::write(&log, &forged).unwrap();
    let mut pipe = start(Some(&log));
    say(&mut pipe, &json!({"op": "resume"}));
    drop(pipe.stdin.take());
    let answer = answers(&mut pipe).next().expect("an answer");
    pipe.wait().unwrap();
    assert_eq!(
        (&answer["error"]["code"], &answer["error"]["line"]),
        (&json!("log-broken"), &json!(2)),
        "{answer}"
    );
    assert_eq!(fs::read_to_string(&log).unwrap(), forged);
}
