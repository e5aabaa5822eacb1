//! The edits of one fault, and what of the circuit each of them claims for itself.

use super::error::FaultError;
use super::fault::Fault;
use super::valid::{conductor, filled};
use crate::knowledge::{Amount, EditForm, FaultKind};
use crate::network::Edit;
use crate::network::params::median;
use crate::site::{Place, Site};

/// Volts and hertz at which a standing leakage or a neighbour's current is named (contract §5).
const RATED_VOLTS: f64 = 230.0;
const RATED_HERTZ: f64 = 50.0;

/// Fills the edit forms of a kind at a place.
///
/// # Errors
/// [`FaultError::Knowledge`] where a template or an amount has no meaning.
pub(crate) fn build(
    kind: &FaultKind,
    site: &Site,
    fault: &Fault,
    at: &Place,
    to: Option<&Place>,
) -> Result<Vec<Edit>, FaultError> {
    let amiss = |why: String| FaultError::Knowledge {
        kind: kind.kind.clone(),
        why,
    };
    let line = conductor(kind, site, fault, at);
    let text = |form: &str| -> Result<String, FaultError> {
        let text = filled(kind, site, fault, at, to, form)?;
        Ok(site.on_line(&text, Some(&line)))
    };
    let both = |forms: &[String; 2]| -> Result<[String; 2], FaultError> {
        Ok([text(&forms[0])?, text(&forms[1])?])
    };
    let value = || -> Result<f64, FaultError> {
        let row = kind
            .value
            .as_ref()
            .ok_or_else(|| amiss("an edit uses `value`, but there is no [value]".to_owned()))?;
        Ok(fault.value.unwrap_or_else(|| median(&row.prior)))
    };
    let number = |amount: &Amount| -> Result<f64, FaultError> {
        match amount {
            Amount::Number(x) => Ok(*x),
            Amount::Word(word) => match word.as_str() {
                "open" => Ok(f64::INFINITY),
                "value" => value(),
                "230/value" => Ok(RATED_VOLTS / value()?),
                other => Err(amiss(format!(
                    "the amount `{other}` is none of open, value, 230/value"
                ))),
            },
        }
    };
    kind.edits
        .iter()
        .map(|form| {
            Ok(match form {
                EditForm::Series { branch, ohms } => Edit::Series {
                    branch: text(branch)?,
                    ohms: number(ohms)?,
                },
                EditForm::Replace { branch, ohms } => Edit::Replace {
                    branch: text(branch)?,
                    ohms: number(ohms)?,
                },
                EditForm::Shunt {
                    between,
                    ohms,
                    when,
                } => Edit::Shunt {
                    between: both(between)?,
                    ohms: number(ohms)?,
                    when: *when,
                },
                EditForm::Capacitor { between, amps } => {
                    let farads =
                        number(amps)? / (std::f64::consts::TAU * RATED_HERTZ * RATED_VOLTS);
                    Edit::Capacitor {
                        between: both(between)?,
                        farads,
                    }
                }
                EditForm::Swap { at, conductors } => {
                    let at = text(at)?;
                    let line_of = |c: &String| {
                        let terminal = site.on_line(&format!("{at}.{c}"), Some(&line));
                        terminal.rsplit('.').next().unwrap_or(c).to_owned()
                    };
                    Edit::Swap {
                        conductors: [line_of(&conductors[0]), line_of(&conductors[1])],
                        at,
                    }
                }
                EditForm::SwapService {} => Edit::SwapService,
                EditForm::Move { end, to } => match to {
                    Amount::Word(to) => Edit::Move {
                        end: text(end)?,
                        to: text(to)?,
                    },
                    Amount::Number(_) => {
                        return Err(amiss(
                            "a moved end lands on a terminal, not a number".to_owned(),
                        ));
                    }
                },
                EditForm::SourceVolts { volts } => Edit::SourceVolts(number(volts)?),
                EditForm::NetworkInjection { ohms } => {
                    let street = site
                        .bonds
                        .iter()
                        .find(|bond| bond.street_metal == Some(true));
                    Edit::NetworkInjection {
                        bond: street.map(|bond| bond.id.clone()),
                        ohms: number(ohms)?,
                    }
                }
                EditForm::Element { equipment, ohms } => Edit::Element {
                    equipment: text(equipment)?,
                    position: fault.position.unwrap_or(0.5),
                    ohms: number(ohms)?,
                },
                EditForm::Device { id, what, value } => {
                    let rcd = text(id)?;
                    let amount =
                        || number(value.as_ref().unwrap_or(&Amount::Word("value".to_owned())));
                    match what.as_str() {
                        "trip-amps" => Edit::TripAmps {
                            rcd,
                            amps: amount()?,
                        },
                        "trip-seconds" => Edit::TripSeconds {
                            rcd,
                            seconds: amount()?,
                        },
                        "dead" => Edit::DeadRcd { rcd },
                        other => {
                            return Err(amiss(format!(
                                "a device has no `{other}`: trip-amps, trip-seconds, dead"
                            )));
                        }
                    }
                }
            })
        })
        .collect()
}

/// How an edit holds what it claims.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(crate) enum Claim {
    /// Alone: a branch, an end, a device's property is something else than it was.
    Sole,
    /// Beside others: paths that add up.
    Beside,
}

/// What an edit claims: branches, ends, points' terminals, properties.
pub(crate) fn claims(edit: &Edit) -> Vec<(String, Claim)> {
    let one = |key: String, claim| vec![(key, claim)];
    match edit {
        Edit::Series { branch, .. } | Edit::Replace { branch, .. } => {
            one(same_branch(branch), Claim::Sole)
        }
        Edit::Shunt { between, .. } | Edit::Capacitor { between, .. } => {
            let mut ends = between.clone();
            ends.sort();
            one(format!("{} to {}", ends[0], ends[1]), Claim::Beside)
        }
        Edit::Swap { at, conductors } => conductors
            .iter()
            .map(|c| (format!("terminal {at}.{c}"), Claim::Sole))
            .collect(),
        Edit::SwapService => one("service terminals".to_owned(), Claim::Sole),
        Edit::Move { end, .. } => one(same_branch(end), Claim::Sole),
        Edit::SourceVolts(_) => one("supply volts".to_owned(), Claim::Sole),
        Edit::Element { equipment, .. } => one(format!("element {equipment}"), Claim::Beside),
        Edit::NetworkInjection { .. } => one("the network's return".to_owned(), Claim::Beside),
        Edit::TripAmps { rcd, .. } => one(format!("{rcd} trip current"), Claim::Sole),
        Edit::TripSeconds { rcd, .. } => one(format!("{rcd} trip time"), Claim::Sole),
        Edit::DeadRcd { rcd } => {
            vec![
                (format!("{rcd} trip current"), Claim::Sole),
                (format!("{rcd} trip time"), Claim::Sole),
            ]
        }
    }
}

/// A circuit's or submain's end by one name: what reaches a circuit's `c1.N` is `c1.N@board`.
fn same_branch(key: &str) -> String {
    match key.strip_prefix("into ") {
        Some(inner) if inner.matches('.').count() == 1 => format!("{inner}@board"),
        _ => key.to_owned(),
    }
}
