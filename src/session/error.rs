//! What a visit refuses, with the code of contract §6, what is wrong, and the cure.

use std::collections::BTreeMap;

use serde_json::Value;

/// Error codes of contract §6.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord)]
pub enum ErrorCode {
    /// The line is not JSON.
    BadJson,
    /// The line is longer than the pipe takes.
    TooLarge,
    /// No such request.
    UnknownOp,
    /// A key is missing or has the wrong type.
    BadRequest,
    /// A key that the request does not have.
    UnknownKey,
    /// Nothing is open.
    NoSession,
    /// The site file is wrong.
    BadSite,
    /// No such place on this site.
    UnknownPlace,
    /// No such test at such a place.
    UnknownTest,
    /// A word outside its vocabulary.
    UnknownWord,
    /// A reading in the wrong kind of unit.
    WrongUnit,
    /// A reading that cannot be understood.
    BadReading,
    /// The test cannot be done now.
    Unavailable,
    /// A hold point of the test is still open.
    HoldPointOpen,
    /// A prove-dead reading is over its limit.
    NotDead,
    /// A reading that nothing still likely explains; held back once.
    NotCredible,
    /// Two faults contradict each other.
    Conflict,
    /// The fault kind has no circuit of its own.
    NotPredictable,
    /// No such entry, or not one that can be retracted.
    UnknownEntry,
    /// Re-tests are still owed.
    RecheckOwed,
    /// The log is in use.
    LogLocked,
    /// The log is not empty.
    LogNotEmpty,
    /// The log was changed, cut, or is of another version.
    LogBroken,
    /// A file cannot be read or written.
    Io,
    /// A fault of this program.
    Internal,
}

impl ErrorCode {
    /// Every code, in the order of the contract.
    pub const ALL: [Self; 25] = [
        Self::BadJson,
        Self::TooLarge,
        Self::UnknownOp,
        Self::BadRequest,
        Self::UnknownKey,
        Self::NoSession,
        Self::BadSite,
        Self::UnknownPlace,
        Self::UnknownTest,
        Self::UnknownWord,
        Self::WrongUnit,
        Self::BadReading,
        Self::Unavailable,
        Self::HoldPointOpen,
        Self::NotDead,
        Self::NotCredible,
        Self::Conflict,
        Self::NotPredictable,
        Self::UnknownEntry,
        Self::RecheckOwed,
        Self::LogLocked,
        Self::LogNotEmpty,
        Self::LogBroken,
        Self::Io,
        Self::Internal,
    ];

    /// The code of a word of the contract; [`Self::Internal`] for any other.
    pub fn of(word: &str) -> Self {
        Self::ALL
            .into_iter()
            .find(|code| code.as_str() == word)
            .unwrap_or(Self::Internal)
    }

    /// The word of the contract.
    pub fn as_str(self) -> &'static str {
        match self {
            Self::BadJson => "bad-json",
            Self::TooLarge => "too-large",
            Self::UnknownOp => "unknown-op",
            Self::BadRequest => "bad-request",
            Self::UnknownKey => "unknown-key",
            Self::NoSession => "no-session",
            Self::BadSite => "bad-site",
            Self::UnknownPlace => "unknown-place",
            Self::UnknownTest => "unknown-test",
            Self::UnknownWord => "unknown-word",
            Self::WrongUnit => "wrong-unit",
            Self::BadReading => "bad-reading",
            Self::Unavailable => "unavailable",
            Self::HoldPointOpen => "hold-point-open",
            Self::NotDead => "not-dead",
            Self::NotCredible => "not-credible",
            Self::Conflict => "conflict",
            Self::NotPredictable => "not-predictable",
            Self::UnknownEntry => "unknown-entry",
            Self::RecheckOwed => "recheck-owed",
            Self::LogLocked => "log-locked",
            Self::LogNotEmpty => "log-not-empty",
            Self::LogBroken => "log-broken",
            Self::Io => "io",
            Self::Internal => "internal",
        }
    }
}

/// A refusal: the state is as before.
#[derive(Clone, Debug, PartialEq, thiserror::Error)]
#[error("{message}")]
pub struct SessionError {
    /// The contract's code.
    pub code: ErrorCode,
    /// What is wrong, and where.
    pub message: String,
    /// The cure.
    pub hint: String,
    /// Further keys of the answer's `error`, such as `points`.
    pub extra: BTreeMap<String, Value>,
}

impl SessionError {
    /// A refusal with its cure.
    pub fn new(code: ErrorCode, message: impl Into<String>, hint: impl Into<String>) -> Self {
        Self {
            code,
            message: message.into(),
            hint: hint.into(),
            extra: BTreeMap::new(),
        }
    }

    /// The same with one more key.
    #[must_use]
    pub fn with(mut self, key: &str, value: impl Into<Value>) -> Self {
        self.extra.insert(key.to_owned(), value.into());
        self
    }

    /// A word outside its vocabulary, with the nearest valid ones.
    pub fn unknown<'a>(
        code: ErrorCode,
        what: &str,
        given: &str,
        valid: impl IntoIterator<Item = &'a str>,
    ) -> Self {
        let nearest = crate::quantity::nearest(given, valid, 3);
        let hint = match nearest.as_slice() {
            [] => "see `vocabulary` and `tests` for what there is".to_owned(),
            [one] => format!("the nearest is `{one}`"),
            more => format!("the nearest are `{}`", more.join("`, `")),
        };
        Self::new(code, format!("there is no {what} `{given}`"), hint).with("nearest", nearest)
    }

    /// The `error` object of an answer.
    pub fn to_json(&self) -> Value {
        let mut object = serde_json::Map::new();
        for (key, value) in &self.extra {
            object.insert(key.clone(), value.clone());
        }
        object.insert("code".to_owned(), self.code.as_str().into());
        object.insert("message".to_owned(), self.message.clone().into());
        object.insert("hint".to_owned(), self.hint.clone().into());
        Value::Object(object)
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn each_code_has_its_own_word() {
        let words: std::collections::BTreeSet<_> =
            ErrorCode::ALL.iter().map(|c| c.as_str()).collect();
        assert_eq!(words.len(), 25);
    }

    #[test]
    fn extra_keys_never_hide_the_code() {
        let json = SessionError::new(ErrorCode::Io, "m", "h")
            .with("code", "x")
            .with("points", 3)
            .to_json();
        assert_eq!(json["code"], "io");
        assert_eq!(json["points"], 3);
    }
}
