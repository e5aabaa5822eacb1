//! Whether a re-test is within its limits, and which limits those are.
//!
//! A limit that is only remembered or guessed never passes or fails anything by itself: its result is
//! `check-your-standard`. Where the site names no rule set, the widest of the limits counts.

use super::engine::Engine;
use crate::checks::Check;
use crate::knowledge::{LimitRow, Marker};
use crate::quantity::{Parsed, ParsedValue, Word};
use crate::site::{Curve, Feed, Place, holds, place};

/// Classes of places that a test can be at.
const CLASSES: [&str; 9] = [
    "point",
    "circuit",
    "rcd",
    "board",
    "equipment",
    "bond",
    "electrode",
    "source",
    "service",
];

/// A limit as it holds at one place.
#[derive(Clone, Debug, PartialEq)]
pub struct Limit {
    /// Least acceptable, SI.
    pub least: Option<f64>,
    /// Most acceptable, SI.
    pub most: Option<f64>,
    /// Required word.
    pub word: Option<String>,
    /// Whether it belongs to named rule sets only.
    pub named: bool,
    /// The text to show.
    pub text: String,
    /// Standard and clause.
    pub source: String,
    /// How well it is known.
    pub marker: Marker,
}

/// How a reading stands to its limits.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord)]
pub enum Judged {
    /// Within every limit.
    Within,
    /// No limit that was seen in its source decides it.
    CheckYourStandard,
    /// Outside one.
    Outside,
}

impl Judged {
    /// The word of the contract.
    pub fn as_str(self) -> &'static str {
        match self {
            Self::Within => "within",
            Self::CheckYourStandard => "check-your-standard",
            Self::Outside => "outside",
        }
    }
}

/// The place that a test is at, for conditions on places.
pub fn place_of(engine: &Engine, at: &str) -> Option<Place> {
    let first = at.split('+').next().unwrap_or(at);
    let classes = CLASSES.map(str::to_owned);
    place::find(engine.site(), &classes, first)
}

/// The limits that judge a test at its place, under the site's rule set.
pub fn limits(engine: &Engine, check: &Check) -> Vec<Limit> {
    let Some(place) = place_of(engine, &check.at).or_else(|| place_of(engine, &check.place)) else {
        return Vec::new();
    };
    let rules = engine.site().rules.as_deref();
    let ours = |row: &&LimitRow| match rules {
        Some(ours) => row.rules.is_empty() || row.rules.iter().any(|rule| rule == ours),
        None => true,
    };
    let fits = |row: &&LimitRow| {
        let holds = |word: &String| {
            holds(word, &place, engine.site(), &engine.knowledge().equipment) == Some(true)
        };
        row.only.iter().all(holds)
    };
    check
        .limits
        .iter()
        .filter_map(|id| engine.knowledge().limit(id))
        .filter(ours)
        .filter(fits)
        .filter_map(|row| at_place(engine, &place, row))
        .collect()
}

/// A row with its numbers worked out; `None` where the place lacks what they follow from.
fn at_place(engine: &Engine, place: &Place, row: &LimitRow) -> Option<Limit> {
    let site = engine.site();
    let residual = || {
        place
            .rcd(site)
            .and_then(|(_, id)| site.rcd(id))
            .map(|rcd| rcd.amps)
    };
    let (least, most) = match row.computed.as_deref() {
        None => (row.least, row.most),
        Some("loop-disconnection") => {
            let breaker = match place.circuit(site) {
                Some((b, c)) => site.boards.get(b)?.circuits.get(c)?.breaker,
                None => match &site.boards.get(place.board(site))?.feed {
                    Feed::Submain { breaker, .. } => *breaker,
                    Feed::Service => return None,
                },
            };
            let curve = match breaker.curve {
                Curve::B => "B",
                Curve::C => "C",
                Curve::D => "D",
                Curve::Fuse => "fuse",
            };
            let volts = row.share_of_volts.unwrap_or(1.0) * site.supply.volts;
            (None, Some(volts / (row.factors.get(curve)? * breaker.amps)))
        }
        Some("times-rated-residual") => {
            let amps = residual()?;
            (row.least.map(|k| k * amps), row.most.map(|k| k * amps))
        }
        Some("times-nominal-volts") => {
            let volts = site.supply.volts;
            (row.least.map(|k| k * volts), row.most.map(|k| k * volts))
        }
        Some("touch-over-residual") => {
            let amps = residual()?;
            (None, row.most.map(|volts| volts / amps))
        }
        Some(_) => return None,
    };
    Some(Limit {
        least,
        most,
        word: row.word.clone(),
        named: !row.rules.is_empty(),
        text: row.text.clone(),
        source: row.source.clone(),
        marker: row.marker,
    })
}

/// Judges a reading by its limits; `rules_named`: the site names its rule set.
pub fn judge(limits: &[Limit], rules_named: bool, parsed: &Parsed) -> Judged {
    let general = limits
        .iter()
        .filter(|limit| rules_named || !limit.named)
        .map(|limit| one(limit, parsed))
        .max();
    let widest = limits
        .iter()
        .filter(|limit| !rules_named && limit.named)
        .map(|limit| one(limit, parsed))
        .min();
    general
        .into_iter()
        .chain(widest)
        .max()
        .unwrap_or(Judged::CheckYourStandard)
}

fn one(limit: &Limit, parsed: &Parsed) -> Judged {
    let known = matches!(limit.marker, Marker::Seen | Marker::Computed);
    match inside(limit, parsed) {
        Some(true) if known => Judged::Within,
        Some(false) if known => Judged::Outside,
        _ => Judged::CheckYourStandard,
    }
}

/// Whether a reading is inside; `None` where it does not say.
fn inside(limit: &Limit, parsed: &Parsed) -> Option<bool> {
    let (low, high) = match parsed.value {
        ParsedValue::Value { value } => (value, value),
        ParsedValue::Range { low, high } => (low, high),
        ParsedValue::Over { over } => (over, f64::INFINITY),
        ParsedValue::Under { under } => (f64::NEG_INFINITY, under),
        ParsedValue::Word { word } => {
            return match (&limit.word, word) {
                (Some(wanted), word) => Some(wanted == word.text()),
                (None, Word::Open) => Some(limit.most.is_none()),
                (None, _) => Some(false),
            };
        }
    };
    if limit.word.is_some() && limit.least.is_none() && limit.most.is_none() {
        return Some(false);
    }
    let least = limit.least.unwrap_or(f64::NEG_INFINITY);
    let most = limit.most.unwrap_or(f64::INFINITY);
    if low >= least && high <= most {
        Some(true)
    } else if high < least || low > most || matches!(parsed.value, ParsedValue::Range { .. }) {
        Some(false)
    } else {
        None
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::quantity::Unit;

    fn limit(least: Option<f64>, most: Option<f64>, marker: Marker, named: bool) -> Limit {
        Limit {
            least,
            most,
            word: None,
            named,
            text: String::new(),
            source: String::new(),
            marker,
        }
    }

    fn reads(value: ParsedValue) -> Parsed {
        Parsed {
            value,
            unit: Unit::Ohm,
            rough: false,
        }
    }

    #[test]
    fn a_remembered_limit_decides_nothing() {
        let low = reads(ParsedValue::Value { value: 0.4e6 });
        assert_eq!(
            judge(&[limit(Some(1e6), None, Marker::Seen, false)], true, &low),
            Judged::Outside
        );
        assert_eq!(
            judge(&[limit(Some(1e6), None, Marker::Memory, false)], true, &low),
            Judged::CheckYourStandard
        );
        assert_eq!(judge(&[], true, &low), Judged::CheckYourStandard);
    }

    #[test]
    fn over_range_is_above_a_least_and_nothing_else() {
        let over = reads(ParsedValue::Over { over: 200e6 });
        assert_eq!(
            judge(&[limit(Some(1e6), None, Marker::Seen, false)], true, &over),
            Judged::Within
        );
        assert_eq!(
            judge(&[limit(None, Some(1.0), Marker::Seen, false)], true, &over),
            Judged::Outside
        );
        let under = reads(ParsedValue::Under { under: 0.05 });
        assert_eq!(
            judge(
                &[limit(None, Some(0.03), Marker::Seen, false)],
                true,
                &under
            ),
            Judged::CheckYourStandard
        );
        let open = reads(ParsedValue::Word { word: Word::Open });
        assert_eq!(
            judge(&[limit(None, Some(1.0), Marker::Seen, false)], true, &open),
            Judged::Outside
        );
    }

    #[test]
    fn without_a_rule_set_the_widest_counts() {
        let rows = [
            limit(None, Some(0.3), Marker::Seen, true),
            limit(None, Some(0.5), Marker::Seen, true),
        ];
        let reading = reads(ParsedValue::Value { value: 0.4 });
        assert_eq!(judge(&rows, false, &reading), Judged::Within);
        assert_eq!(judge(&rows[..1], true, &reading), Judged::Outside);
    }
}
