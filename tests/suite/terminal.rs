//! The prompt on a real pseudo-terminal: Ctrl-C, Ctrl-D, Tab, another width, colour and NO_COLOR.

use std::time::Duration;

use expectrl::process::unix::WaitStatus;
use expectrl::session::OsSession;
use expectrl::{ControlCode, Eof, Expect, Session};

use crate::prompt::{site, straypath};

/// A visit on a terminal of so many columns.
fn attend(folder: &tempfile::TempDir, columns: u16, no_color: Option<&str>) -> OsSession {
    let mut command = straypath();
    command
        .env_remove("COLUMNS")
        .args(["attend", "--site", &site(folder.path())]);
    if let Some(value) = no_color {
        command.env("NO_COLOR", value);
    }
    let mut session = Session::spawn(command).expect("a terminal");
    session
        .get_process_mut()
        .set_window_size(columns, 40)
        .expect("a size");
    session.set_expect_timeout(Some(Duration::from_secs(60)));
    session
}

fn ends_well(session: &mut OsSession) {
    session.expect(Eof).expect("the end");
    let status = session.get_process().wait().expect("a status");
    assert!(matches!(status, WaitStatus::Exited(_, 0)), "{status:?}");
}

#[test]
fn ctrl_c_drops_the_line_and_ctrl_d_leaves() {
    let folder = tempfile::tempdir().expect("a folder");
    let mut session = attend(&folder, 80, Some("1"));
    session.expect("live > ").expect("a prompt");
    session.send("note never sent").expect("typed");
    session.send(ControlCode::ETX).expect("Ctrl-C");
    session.expect("live > ").expect("the prompt again");
    session.send_line("log").expect("typed");
    let before = session.expect("live > ").expect("the list");
    assert!(!String::from_utf8_lossy(before.before()).contains("note:"));
    session.send(ControlCode::EOT).expect("Ctrl-D");
    session
        .expect("The visit was not kept.")
        .expect("a farewell");
    ends_well(&mut session);
}

#[test]
fn tab_completes_commands_and_complaints() {
    let folder = tempfile::tempdir().expect("a folder");
    let mut session = attend(&folder, 80, Some("1"));
    session.expect("live > ").expect("a prompt");
    session.send("help symp\t\r").expect("typed");
    session
        .expect("Say what is wrong.")
        .expect("the help of the completed command");
    session.send_line("quit").expect("typed");
    ends_well(&mut session);
}

#[test]
fn a_page_follows_the_width_of_its_terminal() {
    let folder = tempfile::tempdir().expect("a folder");
    let mut session = attend(&folder, 100, Some("1"));
    session.expect("live > ").expect("a prompt");
    session
        .get_process_mut()
        .set_window_size(60, 40)
        .expect("a size");
    session.send_line("help").expect("typed");
    let page = session.expect("Ctrl-D").expect("the end of the help");
    let text = String::from_utf8_lossy(page.before()).into_owned();
    for line in text.lines().filter(|line| !line.contains('\u{1b}')) {
        assert!(line.trim_end().chars().count() <= 60, "{line}");
    }
    session.send_line("quit").expect("typed");
    ends_well(&mut session);
}

#[test]
fn colour_only_where_it_is_wanted() {
    let folder = tempfile::tempdir().expect("a folder");
    for (no_color, coloured) in [(None, true), (Some(""), true), (Some("1"), false)] {
        let mut session = attend(&folder, 80, no_color);
        let page = session.expect("everything").expect("the header");
        let text = String::from_utf8_lossy(page.before()).into_owned();
        assert_eq!(
            text.contains("\u{1b}[31"),
            coloured,
            "NO_COLOR {no_color:?}: {text:?}"
        );
        session.expect("live > ").expect("a prompt");
        session.send_line("quit").expect("typed");
        ends_well(&mut session);
    }
}
