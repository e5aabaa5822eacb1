//! What a visit stands on and never changes: knowledge, site, circuit, tests, kit.

use std::collections::{BTreeMap, BTreeSet};
use std::sync::Arc;

use serde_json::Value;

use super::error::{ErrorCode, SessionError};
use super::event::TestAt;
use super::view::Warning;
use crate::belief::Model;
use crate::checks::{Check, availability};
use crate::knowledge::procedure::MeterWord;
use crate::knowledge::{Hookup, Knowledge, Meter};
use crate::network::NetworkError;
use crate::quantity::{Asked, Parsed, nearest, parse};
use crate::site::{Known, Site, SiteWarning, load_value};

/// The fixed part of a visit.
#[derive(Debug)]
pub struct Engine {
    /// Knowledge, site, circuit, hypotheses and tests.
    pub model: Arc<Model>,
    /// Instruments.
    pub kit: BTreeSet<String>,
    /// What the site left open.
    pub warnings: Vec<Warning>,
    rows: BTreeMap<(String, String), usize>,
}

impl Engine {
    /// Builds everything from a site document and a kit.
    ///
    /// # Errors
    /// `bad-site` with the path; `unknown-word` for the kit; `internal` for mistakes of knowledge.
    pub fn new(knowledge: &Knowledge, site: &Value, kit: &[String]) -> Result<Self, SessionError> {
        let known = Known::new(
            &knowledge.equipment,
            knowledge.rules.iter().map(|rule| rule.id.as_str()),
        );
        let (site, notes) = load_value(site.clone(), &known).map_err(SessionError::from)?;
        for word in kit {
            if knowledge.kit(word).is_none() {
                let all = knowledge.kit.iter().map(|row| row.kind.as_str());
                return Err(SessionError::unknown(
                    ErrorCode::UnknownWord,
                    "instrument",
                    word,
                    all,
                ));
            }
        }
        let model = Model::new(knowledge.clone(), site).map_err(|e| {
            let hint = "mend the knowledge files, or report the site file";
            SessionError::new(ErrorCode::Internal, e.to_string(), hint)
        })?;
        let key = |(row, check): (usize, &Check)| ((check.test.clone(), check.at.clone()), row);
        let rows = model.checks.iter().enumerate().map(key).collect();
        let said = |note: &SiteWarning| Warning {
            code: "site".to_owned(),
            text: note.to_string(),
        };
        let warnings = notes.iter().map(said).collect();
        Ok(Self {
            model: Arc::new(model),
            kit: kit.iter().cloned().collect(),
            warnings,
            rows,
        })
    }

    /// What the trade knows.
    pub fn knowledge(&self) -> &Knowledge {
        &self.model.knowledge
    }

    /// The installation.
    pub fn site(&self) -> &Site {
        &self.model.site
    }

    /// Every test at every place.
    pub fn checks(&self) -> &[Check] {
        &self.model.checks
    }

    /// Index of a test at a place in [`Self::checks`].
    pub fn row(&self, test: &str, at: &str) -> Option<usize> {
        self.rows.get(&(test.to_owned(), at.to_owned())).copied()
    }

    /// A test at a place.
    ///
    /// # Errors
    /// `unknown-test`, with the nearest tests, or the nearest places of that test.
    pub fn check(&self, test: &str, at: &str) -> Result<&Check, SessionError> {
        if let Some(check) = self.row(test, at).and_then(|row| self.checks().get(row)) {
            return Ok(check);
        }
        let places: Vec<&str> = self
            .checks()
            .iter()
            .filter(|c| c.test == test)
            .map(|c| c.at.as_str())
            .collect();
        if places.is_empty() {
            let tests: BTreeSet<&str> = self.checks().iter().map(|c| c.test.as_str()).collect();
            return Err(SessionError::unknown(
                ErrorCode::UnknownTest,
                "test",
                test,
                tests,
            ));
        }
        let near = nearest(at, &places, 3);
        let shown = if near.is_empty() {
            places.iter().take(6).map(|p| (*p).to_owned()).collect()
        } else {
            near
        };
        Err(SessionError::new(
            ErrorCode::UnknownTest,
            format!("the test `{test}` is not made at `{at}`"),
            format!("it is made at `{}`", shown.join("`, `")),
        )
        .with("nearest", shown))
    }

    /// Why a test cannot be done with this kit and this leave; `None`: it can.
    pub fn why_not(&self, check: &Check) -> Option<String> {
        availability(self.knowledge(), check, &self.kit, self.site()).err()
    }

    /// Understands what was read in a test.
    ///
    /// # Errors
    /// `bad-reading`, `wrong-unit`.
    pub fn understand(&self, check: &Check, value: &str) -> Result<Parsed, SessionError> {
        Ok(parse(value, &self.asked(&check.hookup, &check.unit))?)
    }

    /// What a hookup asks to be read.
    pub fn asked(&self, hookup: &Hookup, unit: &str) -> Asked {
        let over = self.knowledge().error_of(hookup).map(|row| row.over);
        let low_z = matches!(
            hookup,
            Hookup::Volts {
                meter: Some(Meter::Named(MeterWord::LowZ)),
                ..
            }
        );
        Asked::new(hookup.quantity(), unit, low_z, over)
    }

    /// The key of a test at a place.
    pub fn key(check: &Check) -> TestAt {
        TestAt {
            test: check.test.clone(),
            at: check.at.clone(),
        }
    }
}

impl From<crate::quantity::ReadingError> for SessionError {
    fn from(error: crate::quantity::ReadingError) -> Self {
        Self::new(ErrorCode::of(error.code()), error.message, error.hint)
    }
}

impl From<crate::site::SiteError> for SessionError {
    fn from(error: crate::site::SiteError) -> Self {
        Self::new(ErrorCode::BadSite, error.to_string(), error.hint).with("path", error.path)
    }
}

impl From<crate::faults::FaultError> for SessionError {
    fn from(error: crate::faults::FaultError) -> Self {
        let hint = match ErrorCode::of(error.code()) {
            ErrorCode::UnknownWord => "`vocabulary` lists the fault kinds",
            ErrorCode::UnknownPlace => "name a place of this site that the kind can sit at",
            ErrorCode::Conflict => "leave one of them out",
            ErrorCode::NotPredictable => "ask about kinds that change the circuit",
            ErrorCode::BadRequest => "write the fault as `vocabulary` shows its kind",
            _ => "mend the knowledge files",
        };
        Self::new(ErrorCode::of(error.code()), error.to_string(), hint)
    }
}

impl From<NetworkError> for SessionError {
    fn from(error: NetworkError) -> Self {
        let message = error.to_string();
        match error {
            NetworkError::UnknownPlace { nearest, .. } => Self::new(
                ErrorCode::UnknownPlace,
                message,
                "name a place that this site has",
            )
            .with("nearest", nearest),
            NetworkError::Conflict { .. } => {
                Self::new(ErrorCode::Conflict, message, "leave one of them out")
            }
            NetworkError::Bad(_) => {
                Self::new(ErrorCode::BadRequest, message, "ask for what this site has")
            }
        }
    }
}
