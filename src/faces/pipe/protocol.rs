//! A line of JSON becomes a typed request, or a refusal that names the key, its path and the cure.

use serde::de::DeserializeOwned;
use serde_json::{Map, Value};

use crate::quantity::nearest;
use crate::session::command as c;
use crate::session::{ErrorCode, SessionError};

/// A request of contract §6.
#[derive(Clone, Debug, PartialEq)]
pub enum Request {
    /// Every word.
    Vocabulary,
    /// A site.
    Open(c::Open),
    /// A complaint.
    Symptom(c::Symptom),
    /// Every test.
    Tests,
    /// What next.
    Advise(c::Advise),
    /// A hold point.
    HoldPoint(c::HoldPoint),
    /// A reading.
    Reading(c::Reading),
    /// Cannot be done.
    Cannot(c::Cannot),
    /// Odds.
    Ranking(c::Ranking),
    /// What speaks for it.
    Evidence(c::Evidence),
    /// One reading of the circuit as told.
    Predict(Box<c::Predict>),
    /// Odds as they would be.
    WhatIf(c::WhatIf),
    /// An entry that should not count.
    Retract(c::Retract),
    /// Found and done.
    Repair(c::Repair),
    /// A re-test.
    Recheck(c::Recheck),
    /// Words.
    Note(c::Note),
    /// What is open, lifted, proved, live.
    State,
    /// Go on.
    Resume,
    /// The end.
    Close(c::Close),
}

/// Every `op`.
pub const OPS: [&str; 19] = [
    "vocabulary",
    "open",
    "symptom",
    "tests",
    "advise",
    "hold-point",
    "reading",
    "cannot",
    "ranking",
    "evidence",
    "predict",
    "whatif",
    "retract",
    "repair",
    "recheck",
    "note",
    "state",
    "resume",
    "close",
];

/// Reads a line: the request's `id`, as far as it can be told, and the request.
pub fn read(line: &str) -> (Option<Value>, Result<Request, SessionError>) {
    let value: Value = match serde_json::from_str(line) {
        Ok(value) => value,
        Err(error) => {
            let message = format!("the line is not JSON: {error}");
            return (
                None,
                Err(SessionError::new(
                    ErrorCode::BadJson,
                    message,
                    "send one JSON object a line",
                )),
            );
        }
    };
    let Value::Object(mut keys) = value else {
        let hint = "send an object such as {\"op\":\"vocabulary\"}";
        return (
            None,
            Err(SessionError::new(
                ErrorCode::BadRequest,
                "the line is JSON but not an object",
                hint,
            )),
        );
    };
    let id = keys.remove("id");
    (id, request(keys))
}

fn request(mut keys: Map<String, Value>) -> Result<Request, SessionError> {
    let ops = || format!("one of {}", OPS.join(", "));
    let op = match keys.remove("op") {
        Some(Value::String(op)) => op,
        Some(_) => {
            return Err(SessionError::new(
                ErrorCode::BadRequest,
                "`op` is not a string",
                ops(),
            ));
        }
        None => {
            return Err(SessionError::new(
                ErrorCode::BadRequest,
                "`op` is missing",
                ops(),
            ));
        }
    };
    Ok(match op.as_str() {
        "vocabulary" => bare(&op, &keys, Request::Vocabulary)?,
        "tests" => bare(&op, &keys, Request::Tests)?,
        "state" => bare(&op, &keys, Request::State)?,
        "resume" => bare(&op, &keys, Request::Resume)?,
        "open" => Request::Open(typed(&op, keys)?),
        "symptom" => Request::Symptom(typed(&op, keys)?),
        "advise" => Request::Advise(typed(&op, keys)?),
        "hold-point" => Request::HoldPoint(typed(&op, keys)?),
        "reading" => Request::Reading(typed(&op, keys)?),
        "cannot" => Request::Cannot(typed(&op, keys)?),
        "ranking" => Request::Ranking(typed(&op, keys)?),
        "evidence" => Request::Evidence(typed(&op, keys)?),
        "predict" => Request::Predict(Box::new(typed(&op, keys)?)),
        "whatif" => Request::WhatIf(typed(&op, keys)?),
        "retract" => Request::Retract(typed(&op, keys)?),
        "repair" => Request::Repair(typed(&op, keys)?),
        "recheck" => Request::Recheck(typed(&op, keys)?),
        "note" => Request::Note(typed(&op, keys)?),
        "close" => Request::Close(typed(&op, keys)?),
        _ => return Err(SessionError::unknown(ErrorCode::UnknownOp, "op", &op, OPS)),
    })
}

fn bare(op: &str, keys: &Map<String, Value>, request: Request) -> Result<Request, SessionError> {
    match keys.keys().next() {
        None => Ok(request),
        Some(key) => Err(SessionError::new(
            ErrorCode::UnknownKey,
            format!("`{op}` has no key `{key}`"),
            "it takes `op` and `id` alone",
        )
        .with("key", key.as_str())
        .with("path", key.as_str())),
    }
}

fn typed<T: DeserializeOwned>(op: &str, keys: Map<String, Value>) -> Result<T, SessionError> {
    serde_path_to_error::deserialize(Value::Object(keys)).map_err(|error| {
        let path = error.path().to_string();
        explain(op, &path, &error.inner().to_string())
    })
}

/// Turns serde's words into a refusal. Its messages quote the given word first and the valid ones
/// behind it; the tests below hold them to that.
fn explain(op: &str, path: &str, message: &str) -> SessionError {
    let mut quoted = message.split('`').skip(1).step_by(2);
    let given = quoted.next().unwrap_or_default();
    let valid: Vec<&str> = quoted.collect();
    let near = nearest(given, &valid, 1);
    let cure = |what: &str| match near.first() {
        Some(word) => format!("the nearest valid {what} is `{word}`"),
        None => format!("valid here: {}", valid.join(", ")),
    };
    let at = if path == "." {
        op.to_owned()
    } else {
        format!("{op}: {path}")
    };
    if message.starts_with("unknown field") {
        // Some serde paths end in the key itself, others in the object that holds it.
        let full = match path {
            "." => given.to_owned(),
            _ if path == given || path.ends_with(&format!(".{given}")) => path.to_owned(),
            _ => format!("{path}.{given}"),
        };
        let text = format!("`{op}` has no key `{full}`");
        return SessionError::new(ErrorCode::UnknownKey, text, cure("key"))
            .with("key", given)
            .with("path", full)
            .with("nearest", near);
    }
    if message.starts_with("unknown variant") {
        let text = format!("{at}: there is no word `{given}` here");
        return SessionError::new(ErrorCode::UnknownWord, text, cure("word"))
            .with("path", path)
            .with("nearest", near);
    }
    if message.starts_with("missing field") {
        let full = if path == "." {
            given.to_owned()
        } else {
            format!("{path}.{given}")
        };
        return SessionError::new(
            ErrorCode::BadRequest,
            format!("`{op}` lacks the key `{full}`"),
            "add it",
        )
        .with("path", full);
    }
    let what = if message.contains("did not match any variant") {
        "has the wrong form"
    } else {
        message
    };
    SessionError::new(
        ErrorCode::BadRequest,
        format!("{at}: {what}"),
        "give the key in the form that the protocol page shows",
    )
    .with("path", path)
}

#[cfg(test)]
mod tests {
    use super::*;

    fn refused(line: &str) -> SessionError {
        read(line).1.unwrap_err()
    }

    #[test]
    fn requests_are_typed_and_their_id_comes_back() {
        let (id, request) = read(
            r#"{"op":"reading","id":[7],"test":"T01","at":"msb","value":"0,35","confirm":true}"#,
        );
        assert_eq!(id, Some(serde_json::json!([7])));
        assert!(matches!(
            request,
            Ok(Request::Reading(c::Reading {
                confirm: Some(true),
                ..
            }))
        ));
        let line = r#"{"op":"predict","hookup":{"quantity":"volts","between":["msb.N","soil"]},"parameters":{"cable.insulation_ohm_metres":null},"setup":{"unplug":"all"}}"#;
        assert!(matches!(read(line).1, Ok(Request::Predict(_))));
    }

    #[test]
    fn each_fault_of_a_line_has_its_code() {
        let cases = [
            ("", ErrorCode::BadJson),
            ("{\"op\":\"open\"", ErrorCode::BadJson),
            ("[1]", ErrorCode::BadRequest),
            ("{}", ErrorCode::BadRequest),
            (r#"{"op":7}"#, ErrorCode::BadRequest),
            (r#"{"op":"raeding"}"#, ErrorCode::UnknownOp),
            (r#"{"op":"note"}"#, ErrorCode::BadRequest),
            (r#"{"op":"note","text":5}"#, ErrorCode::BadRequest),
            (r#"{"op":"retract","entry":-1}"#, ErrorCode::BadRequest),
            (
                r#"{"op":"note","text":"a","txet":1}"#,
                ErrorCode::UnknownKey,
            ),
            (r#"{"op":"state","x":1}"#, ErrorCode::UnknownKey),
            (
                r#"{"op":"close","outcome":"fixed"}"#,
                ErrorCode::UnknownWord,
            ),
            (
                r#"{"op":"predict","hookup":{"quantity":"voltz","between":["a","b"]}}"#,
                ErrorCode::UnknownWord,
            ),
        ];
        for (line, code) in cases {
            let error = refused(line);
            assert_eq!(error.code, code, "{line}: {error:?}");
            assert!(!error.hint.is_empty(), "{line}");
        }
    }

    #[test]
    fn a_key_is_named_with_its_path_and_the_nearest_valid_one() {
        let error = refused(r#"{"op":"reading","test":"a","at":"b","vlaue":"1"}"#);
        assert_eq!(
            (&error.extra["key"], &error.extra["nearest"][0]),
            (&"vlaue".into(), &"value".into())
        );
        let error = refused(
            r#"{"op":"predict","hookup":{"quantity":"continuity","between":["a","b"]},"setup":{"opne":["main"]}}"#,
        );
        assert_eq!(
            (error.code, &error.extra["path"], &error.extra["nearest"][0]),
            (ErrorCode::UnknownKey, &"setup.opne".into(), &"open".into())
        );
        let error =
            refused(r#"{"op":"predict","hookup":{"quantity":"continuity","betwixt":["a","b"]}}"#);
        assert_eq!(
            (error.code, &error.extra["path"]),
            (ErrorCode::UnknownKey, &"hookup.betwixt".into())
        );
        let error =
            refused(r#"{"op":"repair","found":true,"faults":[{"kind":"x","at":"y","vaule":1}]}"#);
        assert_eq!(&error.extra["path"], "faults[0].vaule");
        let error = refused(
            r#"{"op":"predict","hookup":{"quantity":"continuity","between":["a","b"]},"setup":{"unplug":5}}"#,
        );
        assert_eq!(
            (error.code, &error.extra["path"]),
            (ErrorCode::BadRequest, &"setup.unplug".into())
        );
    }
}
