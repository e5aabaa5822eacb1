//! How numbers, odds, places and faults are said to a person, in the site's words.

use std::collections::BTreeMap;

use crate::faults::{Fault, describe, repair_text};
use crate::quantity::{Parsed, Unit, Word, format, format_parsed};
use crate::session::view::{ExpectView, OddsView};
use crate::session::{Engine, Event};
use crate::site::name_of;

/// Odds as people say them: `71 in 100`.
pub fn in_100(p: f64) -> String {
    match p {
        p if p.is_nan() => "not known".to_owned(),
        p if p < 0.005 => "under 1 in 100".to_owned(),
        p if p > 0.995 => "over 99 in 100".to_owned(),
        p => format!("{:.0} in 100", p * 100.0),
    }
}

/// The same without `in 100`, for a column.
pub fn of_100(p: f64) -> String {
    in_100(p).replace(" in 100", "")
}

/// Minutes as a person plans them.
pub fn minutes(minutes: f64) -> String {
    match minutes {
        m if m < 1.5 => "1 min".to_owned(),
        m => format!("{m:.0} min"),
    }
}

/// A sentence: its first letter large, a full stop at its end.
pub fn sentence(text: &str) -> String {
    let text = text.trim();
    let mut letters = text.chars();
    let Some(first) = letters.next() else {
        return String::new();
    };
    let stop = if text.ends_with(['.', '!', '?', ':']) {
        ""
    } else {
        "."
    };
    first.to_uppercase().chain(letters).collect::<String>() + stop
}

/// Items as a person lists them: `a, b and c`.
pub fn list(items: &[String]) -> String {
    match items {
        [] => "nothing".to_owned(),
        [one] => one.clone(),
        [first @ .., last] => format!("{} and {last}", first.join(", ")),
    }
}

/// A cause with its odds.
#[derive(Clone, Debug, PartialEq)]
pub struct Cause {
    /// Key under which its odds are compared over time.
    pub key: String,
    /// What a person calls it.
    pub name: String,
    /// Probability.
    pub p: f64,
}

/// Names of one site.
#[derive(Clone, Copy, Debug)]
pub struct Names<'a>(pub &'a Engine);

impl Names<'_> {
    /// A place, terminal, device or end.
    pub fn place(self, id: &str) -> String {
        name_of(self.0.site(), id)
    }

    /// Several of them.
    pub fn places(self, ids: &[String]) -> String {
        list(&ids.iter().map(|id| self.place(id)).collect::<Vec<_>>())
    }

    /// Faults, as a person says them.
    pub fn faults(self, faults: &[Fault]) -> String {
        describe(self.0.knowledge(), self.0.site(), faults).unwrap_or_else(|_| {
            let each = faults
                .iter()
                .map(|fault| format!("{} at {}", fault.kind, self.place(&fault.at)));
            each.collect::<Vec<_>>().join(", and ")
        })
    }

    /// What to do about faults.
    pub fn repair(self, faults: &[Fault]) -> String {
        repair_text(self.0.knowledge(), self.0.site(), faults).unwrap_or_default()
    }

    /// A test at a place.
    pub fn test(self, test: &str, at: &str) -> String {
        self.0.check(test, at).map_or_else(
            |_| format!("{test} at {}", self.place(at)),
            |check| check.name.clone(),
        )
    }

    /// A complaint.
    pub fn symptom(self, kind: &str, at: Option<&str>) -> String {
        let name = self
            .0
            .knowledge()
            .symptom(kind)
            .map_or(kind, |row| row.name.as_str());
        match at {
            Some(at) => format!("{name}, {}", self.place(at)),
            None => name.to_owned(),
        }
    }

    /// Repair groups by the likeliest hypothesis in each, likeliest first, then what is beside the list.
    pub fn causes(self, odds: &OddsView, most: usize) -> Vec<Cause> {
        let named = |group: &str, repair: &str| {
            let best = odds.ranking.iter().find(|row| row.group == group);
            best.map_or_else(|| repair.to_owned(), |row| self.faults(&row.faults))
        };
        let mut all: Vec<Cause> = odds
            .groups
            .iter()
            .take(most)
            .map(|row| Cause {
                key: row.group.clone(),
                name: named(&row.group, &row.repair),
                p: row.p,
            })
            .collect();
        let beside = [
            ("nothing-wrong", "nothing wrong", odds.nothing_wrong),
            ("unlisted", "not on the list", odds.unlisted),
            ("not-examined", "not examined (at most)", odds.not_examined),
        ];
        let beside = beside.into_iter().filter(|(_, _, p)| *p >= 0.005);
        all.extend(beside.map(|(key, name, p)| Cause {
            key: key.to_owned(),
            name: name.to_owned(),
            p,
        }));
        all
    }

    /// The unit that a test is read in.
    pub fn unit(self, test: &str, at: &str) -> Unit {
        self.0.check(test, at).map_or(Unit::None, |check| {
            self.0.asked(&check.hookup, &check.unit).unit
        })
    }

    /// What an event says, in a line.
    pub fn event(self, event: &Event) -> String {
        match event {
            Event::Opened(_) => "visit opened".to_owned(),
            Event::Symptom(s) => format!("complaint: {}", self.symptom(&s.kind, s.at.as_deref())),
            Event::Advised(a) => match a.advice.first() {
                Some(first) => format!("advised: {}", self.test(&first.test, &first.at)),
                None => "advised: no test".to_owned(),
            },
            Event::HoldPoint(p) if p.done => format!("hold point {} done", p.point),
            Event::HoldPoint(p) => {
                format!(
                    "hold point {} not done: {}",
                    p.point,
                    p.why.as_deref().unwrap_or("no reason")
                )
            }
            Event::Reading(r) => format!("{}: {}", self.test(&r.test, &r.at), reading(&r.parsed)),
            Event::Cannot(c) if c.undo == Some(true) => {
                format!("can be done after all: {}", self.test(&c.test, &c.at))
            }
            Event::Cannot(c) => format!(
                "cannot: {} ({})",
                self.test(&c.test, &c.at),
                c.why.as_deref().unwrap_or("no reason given")
            ),
            Event::Retracted(r) => format!("entry {} taken back", r.entry),
            Event::Note(n) => format!("note: {}", n.text),
            Event::Verdict(v) if v.group.is_none() => "verdict fell".to_owned(),
            Event::Verdict(v) => format!("verdict: {}, {}", action(&v.action), in_100(v.p)),
            Event::Repair(r) => {
                let what = self.faults(&r.faults);
                match (r.found, r.done.unwrap_or(r.found)) {
                    (false, _) => format!("looked for, not there: {what}"),
                    (true, true) => format!("found and put right: {what}"),
                    (true, false) => format!("found, not put right: {what}"),
                }
            }
            Event::Recheck(r) => {
                format!(
                    "re-test, {}: {}, {}",
                    self.test(&r.test, &r.at),
                    reading(&r.parsed),
                    result(&r.result)
                )
            }
            Event::Closed(c) => {
                let word = serde_json::to_value(c.outcome).ok();
                format!(
                    "closed: {}",
                    word.as_ref()
                        .and_then(|w| w.as_str())
                        .unwrap_or("closed")
                        .replace('-', " ")
                )
            }
            Event::Resumed(_) => "resumed; proofs of dead void".to_owned(),
        }
    }
}

/// A reading as it was understood.
pub fn reading(parsed: &Parsed) -> String {
    format_parsed(parsed)
}

/// The result of a re-test.
pub fn result(word: &str) -> &'static str {
    match word {
        "within" => "within its limit",
        "outside" => "outside its limit",
        _ => "check your standard",
    }
}

/// A verdict's action as an order.
pub fn action(word: &str) -> &'static str {
    match word {
        "repair" => "go and repair",
        "call-network" => "call the network operator",
        "isolate" => "leave it off, locked and tagged",
        "nothing-found" => "stop: nothing found",
        _ => "refer",
    }
}

/// The hypothesis that an expectation is about.
pub fn about(expects: &ExpectView) -> &str {
    match expects {
        ExpectView::Number { hypothesis, .. } | ExpectView::Words { hypothesis, .. } => hypothesis,
    }
}

/// What would be read: `0 to 2 V`, `above 200 MΩ`, `holds (9 in 10)`.
pub fn expected(expects: &ExpectView, unit: Unit) -> String {
    match expects {
        ExpectView::Number { p05, p50, p95, .. } => {
            // Far below the other end no instrument tells it from nothing.
            let low = if p05.abs() < p95.abs() / 1000.0 {
                0.0
            } else {
                *p05
            };
            let (low, middle, high) =
                (rounded(low, unit), rounded(*p50, unit), rounded(*p95, unit));
            if low == high {
                middle
            } else {
                span(&low, &high)
            }
        }
        ExpectView::Words { outcomes, .. } => words_of(outcomes),
    }
}

/// A forecast is not known to more than two figures.
fn rounded(value: f64, unit: Unit) -> String {
    format(format!("{value:.1e}").parse().unwrap_or(value), unit)
}

/// `0 to 2 V` where both ends have one unit.
fn span(low: &str, high: &str) -> String {
    match (low.split_once(' '), high.split_once(' ')) {
        (Some((number, a)), Some((_, b))) if a == b => format!("{number} to {high}"),
        _ => format!("{low} to {high}"),
    }
}

fn words_of(outcomes: &BTreeMap<String, f64>) -> String {
    let mut likely: Vec<(&String, f64)> = outcomes
        .iter()
        .map(|(word, p)| (word, *p))
        .filter(|(_, p)| *p >= 0.05)
        .collect();
    likely.sort_by(|a, b| b.1.total_cmp(&a.1));
    match likely.as_slice() {
        [(word, _)] => (*word).clone(),
        more => more
            .iter()
            .map(|(word, p)| format!("{word} ({})", in_100(*p)))
            .collect::<Vec<_>>()
            .join(", "),
    }
}

/// Whether a line could be a reading: a number in any of its forms, or a word that an instrument says.
pub fn looks_like_reading(line: &str) -> bool {
    let number = line.trim_start_matches(['<', '>', '~', '=', ' ', '-', '+']);
    let words = [
        Word::Holds,
        Word::Trips,
        Word::NoTrip,
        Word::Yes,
        Word::No,
        Word::Dims,
        Word::Brightens,
        Word::None,
        Word::Open,
        Word::Unknown,
    ];
    number.starts_with(|c: char| c.is_ascii_digit() || c == '.')
        || line.eq_ignore_ascii_case("ol")
        || words
            .iter()
            .any(|word| line.eq_ignore_ascii_case(word.text()))
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn odds_as_people_say_them() {
        assert_eq!(
            [0.001, 0.004, 0.714, 0.9999].map(in_100),
            [
                "under 1 in 100",
                "under 1 in 100",
                "71 in 100",
                "over 99 in 100"
            ]
        );
        assert_eq!(of_100(0.02), "2");
    }

    #[test]
    fn readings_are_told_from_commands() {
        for yes in [
            "47", "0.35 MΩ", ">200 MΩ", "~230 V", "OL", "no trip", "Yes", "40..60", ".5", "<0.05",
        ] {
            assert!(looks_like_reading(yes), "{yes}");
        }
        for no in ["rank", "hold 1", "", "note 5"] {
            assert!(!looks_like_reading(no), "{no}");
        }
    }

    #[test]
    fn one_unit_is_said_once() {
        let expects = ExpectView::Number {
            hypothesis: "x".into(),
            p05: 0.1,
            p50: 1.0,
            p95: 2.0,
        };
        assert_eq!(expected(&expects, Unit::Volt), "0.1 to 2 V");
        let expects = ExpectView::Number {
            hypothesis: "x".into(),
            p05: 3e5,
            p50: 1e6,
            p95: 2e9,
        };
        assert_eq!(expected(&expects, Unit::Ohm), "0 Ω to 2 GΩ");
        let expects = ExpectView::Number {
            hypothesis: "x".into(),
            p05: 2e-5,
            p50: 1.0,
            p95: 53.4,
        };
        assert_eq!(expected(&expects, Unit::Volt), "0 to 53 V");
    }
}
