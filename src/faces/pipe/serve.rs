//! Lines in, lines out: bounded, whatever the bytes, quiet when nobody listens any more.

use std::io::{self, BufRead, Write};

use serde_json::{Value, json};

use crate::session::{ErrorCode, SessionError};

/// Longest line taken, bytes.
pub const LONGEST: usize = 1 << 20;

/// One line of input.
#[derive(Debug, PartialEq, Eq)]
enum Line {
    /// Its bytes, without the newline.
    Whole(Vec<u8>),
    /// Longer than [`LONGEST`]; its bytes were dropped as they came.
    TooLong,
    /// The input has ended.
    End,
}

fn next_line(input: &mut impl BufRead) -> io::Result<Line> {
    let mut line = Vec::new();
    let mut seen = false;
    let mut too_long = false;
    loop {
        let chunk = match input.fill_buf() {
            Err(error) if error.kind() == io::ErrorKind::Interrupted => continue,
            other => other?,
        };
        if chunk.is_empty() {
            return Ok(match (seen, too_long) {
                (false, _) => Line::End,
                (true, true) => Line::TooLong,
                (true, false) => Line::Whole(line),
            });
        }
        seen = true;
        let end = chunk.iter().position(|&b| b == b'\n');
        let part = end.map_or(chunk, |at| chunk.get(..at).unwrap_or_default());
        too_long = too_long || line.len() + part.len() > LONGEST;
        if too_long {
            line = Vec::new();
        } else {
            line.extend_from_slice(part);
        }
        let used = part.len() + usize::from(end.is_some());
        input.consume(used);
        if end.is_some() {
            return Ok(if too_long {
                Line::TooLong
            } else {
                Line::Whole(line)
            });
        }
    }
}

/// An answer that refuses.
pub fn refusal(error: &SessionError, id: Option<Value>) -> Value {
    let mut answer = json!({"ok": false, "error": error.to_json()});
    if let (Some(id), Some(object)) = (id, answer.as_object_mut()) {
        object.insert("id".to_owned(), id);
    }
    answer
}

/// Answers every line of `input` with one line of `output`, until the input ends or nobody reads.
///
/// # Errors
/// The input cannot be read, or the output cannot be written for another reason than a closed pipe.
pub fn serve(
    mut input: impl BufRead,
    mut output: impl Write,
    mut answer: impl FnMut(&str) -> Value,
) -> io::Result<()> {
    loop {
        let reply = match next_line(&mut input)? {
            Line::End => return Ok(()),
            Line::TooLong => refusal(
                &SessionError::new(
                    ErrorCode::TooLarge,
                    format!("the line is longer than {LONGEST} bytes"),
                    "give a large site by `path`",
                ),
                None,
            ),
            Line::Whole(bytes) => match std::str::from_utf8(&bytes) {
                Ok(text) => answer(text.trim_start_matches('\u{feff}')),
                Err(error) => refusal(
                    &SessionError::new(
                        ErrorCode::BadJson,
                        format!("the line is not UTF-8 behind byte {}", error.valid_up_to()),
                        "send one JSON object a line, in UTF-8",
                    ),
                    None,
                ),
            },
        };
        let mut line = reply.to_string();
        line.push('\n');
        match output
            .write_all(line.as_bytes())
            .and_then(|()| output.flush())
        {
            Err(error) if error.kind() == io::ErrorKind::BrokenPipe => return Ok(()),
            other => other?,
        }
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    fn run(input: &[u8]) -> Vec<Value> {
        let mut output = Vec::new();
        // A small buffer, so that lines come in pieces.
        let reader = io::BufReader::with_capacity(7, input);
        serve(
            reader,
            &mut output,
            |line| json!({"ok": true, "line": line}),
        )
        .unwrap();
        String::from_utf8(output)
            .unwrap()
            .lines()
            .map(|l| serde_json::from_str(l).unwrap())
            .collect()
    }

    #[test]
    fn every_line_is_answered_even_half_a_line_at_the_end() {
        let answers = run(b"a\n\n\xff\xfe\n\xef\xbb\xbfb\nhal");
        let lines: Vec<_> = answers
            .iter()
            .map(|a| a["line"].as_str().unwrap_or("-"))
            .collect();
        assert_eq!(lines, ["a", "", "-", "b", "hal"]);
        assert_eq!(answers[2]["error"]["code"], "bad-json");
    }

    #[test]
    fn a_huge_line_is_refused_and_the_next_is_taken() {
        let mut input = vec![b'x'; 10 * LONGEST];
        input.extend_from_slice(b"\nb\n");
        input.extend(vec![b'y'; LONGEST]);
        let answers = run(&input);
        assert_eq!(answers.len(), 3);
        assert_eq!(answers[0]["error"]["code"], "too-large");
        assert_eq!(answers[1]["line"], "b");
        assert_eq!(answers[2]["line"].as_str().map(str::len), Some(LONGEST));
    }

    #[test]
    fn nobody_listening_ends_quietly() {
        struct Closed;
        impl Write for Closed {
            fn write(&mut self, _: &[u8]) -> io::Result<usize> {
                Err(io::ErrorKind::BrokenPipe.into())
            }
            fn flush(&mut self) -> io::Result<()> {
                Ok(())
            }
        }
        assert!(serve(&b"a\nb\n"[..], Closed, |_| Value::Null).is_ok());
    }
}
