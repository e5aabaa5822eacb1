//! What is wrong with a site file, where, and the cure.

use crate::quantity::{nearest, nearest_text};

/// The first thing wrong with a site file.
#[derive(Clone, Debug, PartialEq, Eq, thiserror::Error)]
#[error("{path}: {message}")]
pub struct SiteError {
    /// What is wrong.
    pub message: String,
    /// The cure.
    pub hint: String,
    /// Where: a path into the document (`boards[0].circuits[2].cable.mm2`), a line, or a file.
    pub path: String,
}

impl SiteError {
    /// An error at a path.
    pub fn new(
        path: impl Into<String>,
        message: impl Into<String>,
        hint: impl Into<String>,
    ) -> Self {
        let path = path.into();
        Self {
            message: message.into(),
            hint: hint.into(),
            path: if path.is_empty() || path == "." {
                "the document".into()
            } else {
                path
            },
        }
    }

    /// A name that refers to nothing; the hint tells the nearest that would.
    pub fn unknown<I, S>(path: impl Into<String>, what: &str, name: &str, candidates: I) -> Self
    where
        I: IntoIterator<Item = S>,
        S: AsRef<str>,
    {
        let all: Vec<String> = candidates
            .into_iter()
            .map(|c| c.as_ref().to_owned())
            .collect();
        let near = nearest(name, &all, 3);
        let hint = if !near.is_empty() {
            nearest_text(&near)
        } else if all.is_empty() {
            format!("this site has no {what} to name here")
        } else {
            let shown: Vec<&str> = all.iter().take(12).map(String::as_str).collect();
            format!(
                "valid here: {}{}",
                shown.join(", "),
                if all.len() > 12 { ", …" } else { "" }
            )
        };
        Self::new(
            path,
            format!("there is no {what} `{}`", shorten(name)),
            hint,
        )
    }

    /// Turns what serde says into the file's own words.
    pub(super) fn from_serde(error: serde_path_to_error::Error<serde_json::Error>) -> Self {
        let path = error.path().to_string();
        let inner = error.into_inner();
        if inner.is_data() {
            Self::data(&path, &inner)
        } else {
            Self::syntax(&inner)
        }
    }

    /// A document that is not JSON at all.
    pub(super) fn syntax(error: &serde_json::Error) -> Self {
        let text = error.to_string();
        let what = text.split(" at line ").next().unwrap_or(&text);
        let hint = if what.contains("number out of range") {
            "the number there is too large for anything; check it"
        } else if error.is_eof() {
            "the file ends too soon: a bracket or quote is not closed, or it was cut off"
        } else {
            "look just before that place for a missing comma, quote or bracket; JSON has no comments, no NaN and no trailing commas"
        };
        Self::new(
            format!("line {}, column {}", error.line(), error.column()),
            format!("the site file is not JSON: {what}"),
            hint,
        )
    }

    fn data(path: &str, error: &serde_json::Error) -> Self {
        let text = error.to_string();
        let (what, line) = match text.rsplit_once(" at line ") {
            Some((what, at)) => (what, at.split(' ').next().unwrap_or("")),
            None => (text.as_str(), ""),
        };
        let place = if line.is_empty() {
            path.to_owned()
        } else {
            format!("{path} (line {line})")
        };
        let quoted: Vec<&str> = what.split('`').skip(1).step_by(2).collect();
        let (subject, choices) = match quoted.split_first() {
            Some((first, rest)) => (*first, rest),
            None => ("", &[][..]),
        };
        if what.starts_with("unknown field") {
            let near = nearest(subject, choices, 1);
            let cure = match near.first() {
                Some(key) => format!(
                    "nearest valid key: `{key}`; valid here: {}",
                    choices.join(", ")
                ),
                None => format!("valid here: {}", choices.join(", ")),
            };
            Self::new(place, format!("unknown key `{}`", shorten(subject)), cure)
        } else if what.starts_with("unknown variant") {
            let near = nearest(subject, choices, 1);
            let cure = match near.first() {
                Some(word) => format!("nearest: `{word}`; valid here: {}", choices.join(", ")),
                None => format!("valid here: {}", choices.join(", ")),
            };
            Self::new(
                place,
                format!("`{}` is not a word for this", shorten(subject)),
                cure,
            )
        } else if what.starts_with("missing field") {
            Self::new(
                place,
                format!("`{subject}` is missing"),
                format!("add `{subject}`; contract §1 tells its form"),
            )
        } else if what.starts_with("duplicate field") {
            Self::new(
                place,
                format!("key `{subject}` is given twice"),
                "keep one of them",
            )
        } else {
            Self::new(
                place,
                shorten(what),
                "give the kind of value that is expected there, or leave the key out",
            )
        }
    }
}

/// Something worth telling that does not stop the file from being used.
#[derive(Clone, Debug, PartialEq, Eq, serde::Serialize)]
pub struct SiteWarning {
    /// Where.
    pub path: String,
    /// What was taken, and how to say otherwise.
    pub text: String,
}

impl std::fmt::Display for SiteWarning {
    fn fmt(&self, f: &mut std::fmt::Formatter<'_>) -> std::fmt::Result {
        write!(f, "{}: {}", self.path, self.text)
    }
}

/// Quoted input of any length, cut to what fits on a line, control characters shown.
pub(super) fn shorten(text: &str) -> String {
    let mut cut = String::new();
    for c in text.chars().take(120) {
        if c.is_control() {
            cut.extend(c.escape_debug())
        } else {
            cut.push(c)
        }
    }
    if text.chars().nth(120).is_some() {
        cut.push('…');
    }
    cut
}
