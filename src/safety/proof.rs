//! Conditions that readings prove: what gives them, and which places they are about.

use crate::checks::Check;
use crate::knowledge::{Hookup, Proof, Setup};
use crate::quantity::{ParsedValue, Word};
use crate::site::Site;

/// A condition shown by a reading.
#[derive(Clone, Debug, PartialEq)]
pub(super) struct Gained {
    /// Log entry.
    pub entry: u64,
    /// Places of the check that showed it.
    pub places: Vec<String>,
}

impl Gained {
    /// No place in its words: it holds for the whole site.
    pub fn is_site_wide(&self, what: &str) -> bool {
        !self
            .places
            .iter()
            .any(|place| !place.is_empty() && what.split(' ').any(|word| overlaps(word, place)))
    }

    /// Whether it is about a place, or about something within or around it.
    pub fn sits_at(&self, what: &str, place: &str) -> bool {
        what.split(' ').any(|word| overlaps(word, place))
            || self.places.iter().any(|own| overlaps(own, place))
    }
}

/// Whether two places are one, or one lies within the other.
fn overlaps(a: &str, b: &str) -> bool {
    let within = |inner: &str, outer: &str| {
        inner
            .strip_prefix(outer)
            .is_some_and(|rest| rest.starts_with('.'))
    };
    a == b || within(a, b) || within(b, a)
}

/// Whether a reading gives a proof: all of it on the right side, a bound only where the bound says so.
pub(super) fn gives(proof: &Proof, value: &ParsedValue) -> bool {
    let (low, high) = match value {
        ParsedValue::Value { value } => (*value, *value),
        ParsedValue::Range { low, high } => (*low, *high),
        ParsedValue::Over { over } => (*over, f64::INFINITY),
        ParsedValue::Under { under } => (f64::NEG_INFINITY, *under),
        ParsedValue::Word { word } => {
            let infinite = *word == Word::Open;
            let named = proof
                .word
                .as_deref()
                .is_none_or(|wanted| says(*word, wanted));
            return if proof.word.is_some() {
                named
            } else {
                infinite && proof.most.is_none() && proof.least.is_some()
            };
        }
    };
    proof.word.is_none()
        && proof.least.is_none_or(|least| low >= least)
        && proof.most.is_none_or(|most| high <= most)
}

/// Whether a word is written so.
fn says(word: Word, wanted: &str) -> bool {
    serde_json::to_value(word).is_ok_and(|v| v.as_str() == Some(wanted))
}

/// The volts of a reading from the main earth bar to a stake, nothing lifted; else nothing.
pub(super) fn stake_reading(site: &Site, check: &Check, value: &ParsedValue) -> Option<f64> {
    if !is_stake_check(site, check) {
        return None;
    }
    match value {
        ParsedValue::Value { value } => Some(value.abs()),
        ParsedValue::Range { low, high } => Some(low.abs().max(high.abs())),
        ParsedValue::Over { .. } => Some(f64::INFINITY),
        ParsedValue::Under { under } => Some(under.abs()),
        ParsedValue::Word { .. } => None,
    }
}

/// Whether a check reads volts from the main earth bar to an independent stake with everything as found.
pub(super) fn is_stake_check(site: &Site, check: &Check) -> bool {
    let Hookup::Volts { between, .. } = &check.hookup else {
        return false;
    };
    let bar = site
        .boards
        .get(site.main_board)
        .map(|b| format!("{}.PE", b.id));
    let pair =
        between.contains(&"soil".to_owned()) && bar.is_some_and(|bar| between.contains(&bar));
    let as_found = Setup {
        closed: check.setup.closed.clone(),
        ..Setup::default()
    };
    pair && check.setup == as_found
}
