//! The log's chain: each line carries the SHA-256 of the bytes of the line before, and of itself.
//!
//! `prev` (contract §7) binds a line to the one before it. The last line has nothing behind it that
//! would show a change, so every line also ends in `sum`: the SHA-256 of its own bytes up to there.

use jiff::Timestamp;
use serde_json::Value;
use sha2::{Digest, Sha256};

use super::clock::rfc3339;
use super::event::{Event, SCHEMA};

/// `prev` of the first line.
pub const START: &str = "0000000000000000000000000000000000000000000000000000000000000000";

/// Bytes of `,"sum":"…"}`.
const SUM_TAIL: usize = 8 + 64 + 2;

/// SHA-256 in hex.
pub fn sha256(bytes: &[u8]) -> String {
    let mut hex = String::with_capacity(64);
    for byte in Sha256::digest(bytes) {
        for half in [byte >> 4, byte & 15] {
            hex.push(char::from_digit(u32::from(half), 16).unwrap_or('0'));
        }
    }
    hex
}

/// A line of the log once understood.
#[derive(Clone, Debug, PartialEq)]
pub struct Record {
    /// Its number, from 1: the `entry` of answers.
    pub n: u64,
    /// When it was written.
    pub time: Timestamp,
    /// What happened.
    pub event: Event,
}

/// The bytes of a line, without its newline.
///
/// # Errors
/// The event cannot be written as JSON.
pub fn write_line(
    n: u64,
    time: Timestamp,
    prev: &str,
    event: &Event,
) -> Result<String, serde_json::Error> {
    let body = serde_json::to_string(event)?;
    let name = event.name();
    let keys = body
        .strip_prefix(&format!("{{\"event\":\"{name}\""))
        .unwrap_or("}");
    let time = rfc3339(time);
    let mut line =
        format!("{{\"n\":{n},\"time\":\"{time}\",\"event\":\"{name}\",\"prev\":\"{prev}\"{keys}");
    line.pop();
    let sum = sha256(line.as_bytes());
    line.push_str(&format!(",\"sum\":\"{sum}\"}}"));
    Ok(line)
}

/// What is wrong with a line.
#[derive(Clone, Debug, PartialEq, Eq)]
pub enum LineFault {
    /// Its bytes are not those that were written.
    Changed(String),
    /// Lines before it are gone, or were put in.
    Missing(String),
    /// The line before it was changed as a whole, or replaced.
    Unchained,
    /// Written by a newer version of the program.
    Newer(String),
}

impl std::fmt::Display for LineFault {
    fn fmt(&self, f: &mut std::fmt::Formatter<'_>) -> std::fmt::Result {
        match self {
            Self::Changed(what) => write!(f, "was changed: {what}"),
            Self::Missing(what) => write!(f, "is out of order: {what}"),
            Self::Unchained => write!(
                f,
                "does not continue the line before it, which was changed or replaced"
            ),
            Self::Newer(what) => write!(f, "was written by a newer version: {what}"),
        }
    }
}

/// Reads one line against its place in the chain.
///
/// # Errors
/// The first thing that is wrong with it.
pub fn read_line(n: u64, prev: &str, bytes: &[u8]) -> Result<Record, LineFault> {
    let changed = |what: &str| LineFault::Changed(what.to_owned());
    let value: Value =
        serde_json::from_slice(bytes).map_err(|_| changed("it is not a line of JSON"))?;
    let Value::Object(mut keys) = value else {
        return Err(changed("it is not a JSON object"));
    };
    let schema = keys
        .get("schema")
        .and_then(Value::as_str)
        .map(str::to_owned);
    if let Some(newer) = schema.filter(|schema| is_newer(schema)) {
        return Err(LineFault::Newer(newer));
    }
    if let Some(sum) = keys.remove("sum") {
        let head = bytes
            .len()
            .checked_sub(SUM_TAIL)
            .and_then(|end| bytes.get(..end))
            .unwrap_or_default();
        let tail = bytes.get(head.len()..).unwrap_or_default();
        let own = sha256(head);
        if sum.as_str() != Some(own.as_str()) || tail != format!(",\"sum\":\"{own}\"}}").as_bytes()
        {
            return Err(changed("its bytes do not match its own sum"));
        }
    }
    let number = keys
        .remove("n")
        .and_then(|n| n.as_u64())
        .ok_or_else(|| changed("it has no number `n`"))?;
    if number != n {
        return Err(LineFault::Missing(format!(
            "it is numbered {number} where {n} should stand"
        )));
    }
    let time = keys.remove("time");
    let time = time
        .as_ref()
        .and_then(Value::as_str)
        .and_then(|t| t.parse::<Timestamp>().ok());
    let time = time.ok_or_else(|| changed("its `time` is not RFC 3339"))?;
    let before = keys.remove("prev");
    let before = before
        .as_ref()
        .and_then(Value::as_str)
        .ok_or_else(|| changed("it has no `prev`"))?;
    if before != prev {
        return Err(LineFault::Unchained);
    }
    let event = serde_path_to_error::deserialize(Value::Object(keys))
        .map_err(|error| LineFault::Changed(format!("`{}`: {}", error.path(), error.inner())))?;
    Ok(Record { n, time, event })
}

fn is_newer(schema: &str) -> bool {
    let number = |text: &str| {
        text.strip_prefix("straypath-log/")
            .and_then(|n| n.parse::<u64>().ok())
    };
    match (number(schema), number(SCHEMA)) {
        (Some(theirs), Some(ours)) => theirs > ours,
        _ => false,
    }
}

/// The bytes behind the last newline: a line that was being written when the power went.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Torn {
    /// The number it would have had.
    pub line: u64,
    /// Its bytes as text.
    pub text: String,
}

/// A log as read: its good lines, what is wrong, and where it goes on.
#[derive(Clone, Debug, PartialEq)]
pub struct Scan {
    /// Lines that are as written, in order.
    pub records: Vec<Record>,
    /// Lines that are not, by number of line in the file.
    pub faults: Vec<(u64, LineFault)>,
    /// A torn last line.
    pub torn: Option<Torn>,
    /// Bytes up to the last newline.
    pub whole: u64,
    /// `prev` of the next line.
    pub prev: String,
}

/// Reads a log's bytes; goes on behind a line that is wrong, so that each is named once.
pub fn scan(bytes: &[u8]) -> Scan {
    let whole = bytes
        .iter()
        .rposition(|&b| b == b'\n')
        .map_or(0, |at| at + 1);
    let (lines, tail) = bytes.split_at(whole);
    let mut found = Scan {
        records: Vec::new(),
        faults: Vec::new(),
        torn: None,
        whole: whole as u64,
        prev: START.to_owned(),
    };
    let mut line_number = 0;
    let mut expected = 1;
    let mut sound = true;
    for line in lines.split_inclusive(|&b| b == b'\n') {
        let line = line.strip_suffix(b"\n").unwrap_or(line);
        line_number += 1;
        let mut read = read_line(expected, &found.prev, line);
        // Behind a line that was already named, a broken link or a jump in the count says nothing new.
        if !sound && matches!(read, Err(LineFault::Unchained | LineFault::Missing(_))) {
            let claims = serde_json::from_slice::<Value>(line).unwrap_or_default();
            if let (Some(n), Some(prev)) = (claims["n"].as_u64(), claims["prev"].as_str()) {
                read = read_line(n, prev, line);
            }
        }
        sound = read.is_ok();
        match read {
            Ok(record) => {
                expected = record.n + 1;
                if let Event::Closed(closed) = &record.event
                    && closed.lines != record.n
                {
                    let what = format!(
                        "it closes {} lines and stands at {}",
                        closed.lines, record.n
                    );
                    found.faults.push((line_number, LineFault::Missing(what)));
                }
                found.records.push(record);
            }
            Err(fault) => {
                expected += 1;
                found.faults.push((line_number, fault));
            }
        }
        found.prev = sha256(line);
    }
    if !tail.is_empty() {
        let text = String::from_utf8_lossy(tail).into_owned();
        // Another file that was named by mistake is not a torn log, and must not be cut.
        let start = "{\"n\":1,\"time\":\"";
        if line_number == 0 && !(start.starts_with(&text) || text.starts_with(start)) {
            found.faults.push((
                1,
                LineFault::Changed("it is not a line of a log".to_owned()),
            ));
        }
        found.torn = Some(Torn {
            line: line_number + 1,
            text,
        });
    }
    found
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::session::command::Note;

    fn lines(count: u64) -> String {
        let mut prev = START.to_owned();
        let mut text = String::new();
        for n in 1..=count {
            let event = Event::Note(Note {
                text: format!("note {n}, 0.1 Ω"),
            });
            let line = write_line(n, Timestamp::UNIX_EPOCH, &prev, &event).unwrap();
            prev = sha256(line.as_bytes());
            text.push_str(&line);
            text.push('\n');
        }
        text
    }

    #[test]
    fn keys_stand_in_the_contract_s_order_and_the_chain_is_sha256sum_s() {
        let text = lines(2);
        let (first, second) = text.split_once('\n').unwrap();
        let start = format!(
            "{{\"n\":1,\"time\":\"1970-01-01T00:00:00.000Z\",\"event\":\"note\",\"prev\":\"{START}\",\"text\""
        );
        assert!(first.starts_with(&start), "{first}");
        assert!(second.contains(&format!("\"prev\":\"{}\"", sha256(first.as_bytes()))));
        assert_eq!(
            sha256(b"abc"),
            "ba7816bf8f01cfea414140de5dae2223b00361a396177a9cb410ff61f20015ad"
        );
    }

    #[test]
    fn one_byte_flipped_anywhere_is_named_with_its_line() {
        let text = lines(4);
        assert!(scan(text.as_bytes()).faults.is_empty());
        let mut line = 1;
        for at in 0..text.len() {
            for flip in [1_u8, 0x20, 0x80] {
                let mut bytes = text.clone().into_bytes();
                bytes[at] ^= flip;
                let found = scan(&bytes);
                let named: Vec<u64> = found
                    .faults
                    .iter()
                    .map(|f| f.0)
                    .chain(found.torn.map(|t| t.line))
                    .collect();
                assert_eq!(
                    named.first(),
                    Some(&line),
                    "byte {at} flipped by {flip}: {:?}",
                    found.faults
                );
            }
            if text.as_bytes()[at] == b'\n' {
                line += 1;
            }
        }
    }

    #[test]
    fn a_missing_line_and_a_swapped_pair_are_named() {
        let text = lines(5);
        let all: Vec<&str> = text.lines().collect();
        let without = [all[0], all[1], all[3], all[4], ""].join("\n");
        let found = scan(without.as_bytes());
        assert_eq!(
            found.faults,
            [(
                3,
                LineFault::Missing("it is numbered 4 where 3 should stand".into())
            )]
        );
        let swapped = [all[0], all[2], all[1], all[3], ""].join("\n");
        assert_eq!(scan(swapped.as_bytes()).faults[0].0, 2);
    }

    #[test]
    fn a_line_rewritten_with_its_own_sum_breaks_the_link_behind_it() {
        let text = lines(3);
        let all: Vec<&str> = text.lines().collect();
        let forged = write_line(
            2,
            Timestamp::UNIX_EPOCH,
            &sha256(all[0].as_bytes()),
            &Event::Note(Note { text: "x".into() }),
        )
        .unwrap();
        let found = scan([all[0], &forged, all[2], ""].join("\n").as_bytes());
        assert_eq!(found.faults, [(3, LineFault::Unchained)]);
    }

    #[test]
    fn a_newer_log_is_told_from_a_broken_one() {
        let line = r#"{"n":1,"time":"2026-01-01T10:00:00Z","event":"opened","schema":"straypath-log/2","new":1}"#;
        assert!(matches!(
            read_line(1, START, line.as_bytes()),
            Err(LineFault::Newer(_))
        ));
    }

    #[test]
    fn another_file_is_no_torn_log() {
        assert_eq!(scan(b"minutes of the meeting").faults.len(), 1);
        assert!(scan(b"{\"n\":1,\"ti").faults.is_empty());
    }
}
