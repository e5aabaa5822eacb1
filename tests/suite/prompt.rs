//! The built binary in a plain pipe: what a script sees, exit codes, a closed pipe, a log that goes on.

use std::io::{Read, Write};
use std::path::Path;
use std::process::{Command, Output, Stdio};

const SITE: &str = r#"{
    "schema": "straypath-site/1", "name": "One circuit",
    "supply": {"system": "TN-C-S", "service": {"metres": 20, "mm2": 16}},
    "earthing": {"board": "msb", "link": true, "main_earth": {"metres": 4, "mm2": 6}},
    "boards": [{"id": "msb", "fed_from": "service", "main_switch": {"id": "main", "amps": 63, "poles": 1},
        "rcds": [{"id": "rcd1", "ma": 30}],
        "circuits": [{"id": "c1", "rcd": "rcd1", "phase": "L1", "breaker": {"curve": "C", "amps": 20},
            "cable": {"mm2": 2.5}, "points": [{"id": "p1", "metres": 9}]}]}]
}"#;

/// The binary, its surroundings fixed.
pub fn straypath() -> Command {
    let mut command = Command::new(env!("CARGO_BIN_EXE_straypath"));
    command
        .env("COLUMNS", "60")
        .env_remove("NO_COLOR")
        .env("TERM", "xterm");
    command
}

/// Writes the small site into a folder.
pub fn site(folder: &Path) -> String {
    let path = folder.join("site.json");
    std::fs::write(&path, SITE).expect("a scratch file");
    path.display().to_string()
}

fn fed(mut command: Command, input: &str) -> Output {
    let mut child = command
        .stdin(Stdio::piped())
        .stdout(Stdio::piped())
        .stderr(Stdio::piped())
        .spawn()
        .expect("the binary starts");
    // A program that ends early closes its input: that is its right.
    let _ = child
        .stdin
        .take()
        .expect("piped")
        .write_all(input.as_bytes());
    child.wait_with_output().expect("it ends")
}

fn text(output: &Output) -> String {
    String::from_utf8_lossy(&output.stdout).into_owned()
}

#[test]
fn a_visit_through_a_pipe_reads_as_it_was_typed_and_can_be_resumed_and_audited() {
    let folder = tempfile::tempdir().expect("a folder");
    let (site, log) = (site(folder.path()), folder.path().join("a.log"));
    let mut attend = straypath();
    attend.args(["attend", "--site", &site, "--log"]).arg(&log);
    let output = fed(attend, "symptom tingle at c1.p1\nnote gate is open\nquit\n");
    let said = text(&output);
    assert!(output.status.success(), "{output:?}");
    assert!(said.contains("live > symptom tingle at c1.p1\n"), "{said}");
    assert!(said.contains("FIRST   Keep everyone off"), "{said}");
    assert!(said.contains("--resume"), "{said}");
    assert!(!said.contains('\u{1b}'), "no colour in a pipe");
    assert!(
        said.lines()
            .filter(|line| !line.contains(" > "))
            .all(|line| line.chars().count() <= 60 || line.contains('/')),
        "{said}"
    );

    let mut again = straypath();
    again.args(["attend", "--site", &site, "--log"]).arg(&log);
    let refused = fed(again, "");
    assert_eq!(refused.status.code(), Some(64));
    assert!(
        String::from_utf8_lossy(&refused.stderr).contains("--resume"),
        "{refused:?}"
    );

    let mut resume = straypath();
    resume.args(["attend", "--resume"]).arg(&log);
    let said = text(&fed(resume, "log\nclose referred\n"));
    assert!(
        said.contains("Every proof of dead is void") && said.contains("note: gate is open"),
        "{said}"
    );
    assert!(said.contains("Closed: referred."), "{said}");

    let mut audit = straypath();
    audit.arg("audit").arg(&log);
    let output = fed(audit, "");
    let said = text(&output);
    assert!(
        said.starts_with("WHOLE: ") && said.contains("Complaint: a tingle"),
        "{said}"
    );
    assert!(said.contains("interrupted and resumed"), "{said}");
    assert_eq!(output.status.code(), Some(1));

    let forged = std::fs::read_to_string(&log)
        .expect("a log")
        .replace("gate is open", "gate is shut");
    std::fs::write(&log, forged).expect("a scratch file");
    let mut audit = straypath();
    audit.arg("audit").arg(&log);
    let output = fed(audit, "");
    assert_eq!(output.status.code(), Some(2), "{output:?}");
    assert!(text(&output).contains("NOT WHOLE"), "{output:?}");
}

#[test]
fn failures_have_their_codes_and_name_the_cure() {
    for (arguments, code, said) in [
        (&["attend", "--site", "no-such-file"][..], 65, "site new"),
        (&["attend", "--kit", "spanner"][..], 64, "spanner"),
        (&["attend", "--what"][..], 64, "--what"),
        (&["site", "check", "no-such-file"][..], 65, "no-such-file"),
        (&["audit", "no-such-file"][..], 74, "no-such-file"),
        (
            &["knowledge", "check", "--knowledge", "no-such-folder"][..],
            65,
            "no-such-folder",
        ),
        (&[][..], 64, "Usage"),
    ] {
        let mut command = straypath();
        command.args(arguments);
        let output = fed(command, "");
        let error = String::from_utf8_lossy(&output.stderr);
        assert_eq!(output.status.code(), Some(code), "{arguments:?}: {error}");
        assert!(error.contains(said), "{arguments:?}: {error}");
    }
}

#[test]
fn nobody_reading_is_no_failure() {
    let folder = tempfile::tempdir().expect("a folder");
    let mut command = straypath();
    command.args(["attend", "--site", &site(folder.path())]);
    let mut child = command
        .stdin(Stdio::piped())
        .stdout(Stdio::piped())
        .stderr(Stdio::piped())
        .spawn()
        .expect("the binary starts");
    drop(child.stdout.take());
    let _ = child
        .stdin
        .take()
        .expect("piped")
        .write_all(b"help\nhelp\n");
    let mut error = String::new();
    child
        .stderr
        .take()
        .expect("piped")
        .read_to_string(&mut error)
        .expect("text");
    assert!(child.wait().expect("it ends").success(), "{error}");
    assert_eq!(error, "");
}

#[test]
fn site_check_and_knowledge_check_pass_on_what_is_built_in() {
    for arguments in [
        &["site", "check", "house"][..],
        &["knowledge", "check"][..],
        &["knowledge", "list"][..],
        &["--help"][..],
    ] {
        let mut command = straypath();
        command.args(arguments);
        let output = fed(command, "");
        assert!(
            output.status.success() && !output.stdout.is_empty(),
            "{arguments:?}: {output:?}"
        );
    }
}

#[test]
fn an_interview_writes_a_site_that_can_be_checked() {
    let folder = tempfile::tempdir().expect("a folder");
    let out = folder.path().join("new.json");
    let mut new = straypath();
    new.args(["site", "new", "--out"]).arg(&out);
    // Enter takes every default, the empty circuit that ends the list too.
    let output = fed(new, &"\n".repeat(60));
    assert!(output.status.success(), "{output:?}");
    let mut check = straypath();
    check.args(["site", "check"]).arg(&out);
    assert!(fed(check, "").status.success());

    let mut again = straypath();
    again.args(["site", "new", "--out"]).arg(&out);
    assert_eq!(
        fed(again, "").status.code(),
        Some(64),
        "a site file is not overwritten"
    );

    let early = folder.path().join("early.json");
    let mut short = straypath();
    short.args(["site", "new", "--out"]).arg(&early);
    assert_eq!(fed(short, "a name\n").status.code(), Some(64));
    assert!(
        !early.exists(),
        "an interview that ends early writes nothing"
    );
}
