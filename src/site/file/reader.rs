//! What all parts of the check share: knowledge's words, the warnings so far, the ids taken.

use std::collections::BTreeMap;

use super::error::{SiteError, SiteWarning};
use super::form::{ConductorForm, MetalForm};
use super::ids::Ids;
use super::known::Known;
use super::number::{Bounds, METRES, MM2, Num, OHMS};
use crate::site::model::{Conductor, Given, Metal};

/// Zero ohms of the file: so small that no instrument sees it, and still a number to divide by.
const LEAST_OHMS: f64 = 1e-6;

/// The state of one reading of a file.
pub struct Reader<'a> {
    /// Words of knowledge.
    pub known: &'a Known,
    /// Ids taken.
    pub ids: Ids,
    warnings: Vec<SiteWarning>,
    assumed: BTreeMap<&'static str, Vec<String>>,
}

impl<'a> Reader<'a> {
    /// A fresh reader.
    pub fn new(known: &'a Known) -> Self {
        Self {
            known,
            ids: Ids::default(),
            warnings: Vec::new(),
            assumed: BTreeMap::new(),
        }
    }

    /// Adds a warning.
    pub fn warn(&mut self, path: impl Into<String>, text: impl Into<String>) {
        self.warnings.push(SiteWarning {
            path: path.into(),
            text: text.into(),
        });
    }

    /// Notes that `what` was assumed at `place`: one warning in the end, however many places.
    pub fn assume(&mut self, what: &'static str, place: impl Into<String>) {
        self.assumed.entry(what).or_default().push(place.into());
    }

    /// All warnings.
    pub fn finish(mut self) -> Vec<SiteWarning> {
        for (what, places) in std::mem::take(&mut self.assumed) {
            let shown: Vec<&str> = places.iter().take(6).map(String::as_str).collect();
            let more = places.len().saturating_sub(shown.len());
            let tail = if more > 0 {
                format!(" and {more} more")
            } else {
                String::new()
            };
            self.warn(format!("{}{tail}", shown.join(", ")), what);
        }
        self.warnings
    }

    /// A number for which the model has no range: checked; a range is taken at its geometric mean.
    pub fn number(&mut self, path: &str, num: Num, bounds: Bounds) -> Result<f64, SiteError> {
        match num {
            Num::Value(v) => check(path, v, bounds),
            Num::Range(low, high) => {
                let (low, high) = range(path, low, high, bounds)?;
                self.warn(path, "a range here is taken at its geometric mean");
                Ok((low * high).sqrt())
            }
        }
    }

    /// As `number`, with a default that needs no warning.
    pub fn number_or(
        &mut self,
        path: &str,
        num: Option<Num>,
        bounds: Bounds,
        default: f64,
    ) -> Result<f64, SiteError> {
        num.map_or(Ok(default), |n| self.number(path, n, bounds))
    }

    /// A resistance that may be a value, a range or not known.
    pub fn ohms(&mut self, path: &str, num: Option<Num>) -> Result<Given, SiteError> {
        Ok(match num {
            None => Given::Unknown,
            Some(Num::Value(v)) => {
                let v = check(path, v, OHMS)?;
                if v < LEAST_OHMS {
                    self.warn(
                        path,
                        "zero ohms is taken as 1 µΩ; leave the key out if it is not known",
                    );
                }
                Given::Value(v.max(LEAST_OHMS))
            }
            Some(Num::Range(low, high)) => {
                let (low, high) = range(path, low, high, OHMS)?;
                if low == high {
                    Given::Value(low)
                } else {
                    Given::Range(low, high)
                }
            }
        })
    }

    /// A conductor with defaults.
    pub fn conductor(
        &mut self,
        path: &str,
        form: &ConductorForm,
        metres: f64,
        mm2: f64,
    ) -> Result<Conductor, SiteError> {
        Ok(Conductor {
            metres: self.number_or(&format!("{path}.metres"), form.metres, METRES, metres)?,
            mm2: self.number_or(&format!("{path}.mm2"), form.mm2, MM2, mm2)?,
            metal: metal(form.metal),
        })
    }

    /// A name a person reads: given or `default`; no control characters, at most 120 characters.
    pub fn name(
        &mut self,
        path: &str,
        name: Option<&String>,
        default: &str,
    ) -> Result<String, SiteError> {
        let Some(name) = name else {
            return Ok(default.to_owned());
        };
        let name = name.trim();
        if name.chars().any(char::is_control) || name.chars().count() > 120 {
            return Err(SiteError::new(
                format!("{path}{}name", if path.is_empty() { "" } else { "." }),
                "a name must fit on one line: no control characters, at most 120 characters",
                "shorten it, or write it without line breaks",
            ));
        }
        Ok(if name.is_empty() {
            default.to_owned()
        } else {
            name.to_owned()
        })
    }
}

/// Metal with its default.
pub fn metal(form: Option<MetalForm>) -> Metal {
    match form {
        Some(MetalForm::Aluminium) => Metal::Aluminium,
        Some(MetalForm::Copper) | None => Metal::Copper,
    }
}

fn check(path: &str, value: f64, bounds: Bounds) -> Result<f64, SiteError> {
    match bounds.refuse(value) {
        Some((message, hint)) => Err(SiteError::new(path, message, hint)),
        None => Ok(value),
    }
}

fn range(path: &str, low: f64, high: f64, bounds: Bounds) -> Result<(f64, f64), SiteError> {
    let low = check(&format!("{path}.low"), low, bounds)?;
    let high = check(&format!("{path}.high"), high, bounds)?;
    if low <= 0.0 {
        return Err(SiteError::new(
            format!("{path}.low"),
            "a range must begin above zero",
            "give the least value that could be, such as 0.01",
        ));
    }
    if low > high {
        return Err(SiteError::new(
            path,
            format!("low ({low}) is above high ({high})"),
            "exchange them",
        ));
    }
    Ok((low, high))
}
