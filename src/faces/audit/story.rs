//! The story itself, entry by entry, and what a supervisor should ask about.

use std::collections::{BTreeMap, BTreeSet};

use super::super::text::{Meaning, Page, Text};
use super::super::words::{Names, about, expected, in_100, reading, result, sentence};
use super::{Moment, day};
use crate::quantity::{Parsed, ParsedValue, Unit};
use crate::session::chain::Record;
use crate::session::clock::rfc3339;
use crate::session::event::ReadingTaken;
use crate::session::view::{ExpectView, OddsView};
use crate::session::{Event, Session};

/// Columns of entry number and time.
const MARGIN: usize = 12;

/// A visit that was replayed, and what it looked like at each entry.
pub struct Story<'a> {
    session: &'a mut Session,
    moments: &'a BTreeMap<u64, Moment>,
    remarks: Vec<String>,
}

impl<'a> Story<'a> {
    pub fn new(session: &'a mut Session, moments: &'a BTreeMap<u64, Moment>) -> Self {
        Self {
            session,
            moments,
            remarks: Vec::new(),
        }
    }

    fn names(&self) -> Names<'_> {
        Names(self.session.engine())
    }

    fn remark(&mut self, text: impl Into<String>) {
        self.remarks.push(text.into());
    }

    /// The page, and whether there is anything to remark.
    pub fn tell(mut self, torn: bool) -> (Page, bool) {
        let records: Vec<Record> = self.session.records().to_vec();
        let mut page = Page::new();
        let mut advised = None;
        for record in &records {
            match &record.event {
                Event::Opened(opened) => {
                    let name = self.session.engine().site().name.clone();
                    page.line(
                        Text::new()
                            .with(Meaning::Place, name)
                            .plain(format!(", {}", day(record))),
                    );
                    page.line(Text::new().dim(format!(
                        "kit: {}; seed {}; version {}",
                        opened.kit.join(", "),
                        opened.seed,
                        opened.version
                    )));
                    page.blank();
                }
                Event::Advised(advice) => advised = advice.advice.first().cloned(),
                Event::Reading(taken) => {
                    let asked = advised.take();
                    if asked
                        .as_ref()
                        .is_some_and(|first| first.test != taken.test || first.at != taken.at)
                    {
                        let first = asked
                            .map(|first| self.names().test(&first.test, &first.at))
                            .unwrap_or_default();
                        let text = format!(
                            "entry {}: advised was {first}; another test was taken",
                            record.n
                        );
                        self.remark(text);
                    }
                    self.reading(record, taken, &mut page);
                }
                _ => self.other(record, &mut page),
            }
            self.odds(record, &mut page);
        }
        self.end(&records, torn);
        page.blank().extend(self.verdict(&records));
        page.blank();
        if self.remarks.is_empty() {
            page.line(Text::new().with(
                Meaning::Done,
                "Nothing was skipped, refused, retracted, owed or left open.",
            ));
        } else {
            page.line(Text::new().with(Meaning::Head, "ASK ABOUT"));
            for remark in &self.remarks {
                page.hang("  -", 4, sentence(remark));
            }
        }
        (page, !self.remarks.is_empty())
    }

    fn entry(&self, record: &Record, text: Text, page: &mut Page) {
        let time = rfc3339(record.time);
        let lead = Text::new().dim(format!(
            "{:>4} {}",
            record.n,
            time.get(11..16).unwrap_or_default()
        ));
        let text = if self.session.is_retracted(record.n) {
            text.with(Meaning::Wrong, " (taken back)")
        } else {
            text
        };
        page.hang(lead, MARGIN, text);
    }

    /// A reading against what was expected when it was taken.
    fn reading(&mut self, record: &Record, taken: &ReadingTaken, page: &mut Page) {
        let name = self.names().test(&taken.test, &taken.at);
        let mut text = Text::new()
            .plain(format!("{name}: "))
            .value(reading(&taken.parsed));
        if taken.confirm == Some(true) {
            text = text.plain(", questioned and confirmed");
            self.remark(format!(
                "entry {}: no cause on the list explained this reading; it was confirmed",
                record.n
            ));
        }
        if taken.setup.is_some() {
            text = text.plain(", in a setup of its own");
            self.remark(format!(
                "entry {}: the reading was taken in another setup than the test's",
                record.n
            ));
        }
        self.entry(record, text, page);
        let Some(moment) = self.moments.get(&record.n) else {
            return;
        };
        let unit = self.names().unit(&taken.test, &taken.at);
        let causes = self
            .moments
            .range(..record.n)
            .rev()
            .map(|(_, m)| &m.causes)
            .find(|causes| !causes.is_empty());
        let odds = self.session.odds(super::super::prompt::MANY);
        for band in moment.expected.iter().take(3) {
            let name = self.hypothesis(&odds, about(band));
            let fits = match fits(band, &taken.parsed) {
                true => Text::new().with(Meaning::Done, "fits"),
                false => Text::new().dim("not"),
            };
            let line = Text::new()
                .dim(format!("{}: ", expected(band, unit)))
                .plain(name)
                .plain(" ");
            let mut line = line;
            line.0.extend(fits.0);
            page.hang("", MARGIN + 2, line);
        }
        let none_fits = !moment.expected.is_empty()
            && !moment.expected.iter().any(|band| fits(band, &taken.parsed));
        if none_fits && causes.is_some() {
            self.remark(format!(
                "entry {}: the reading lay outside what every leading cause would read",
                record.n
            ));
        }
    }

    fn hypothesis(&self, odds: &OddsView, id: &str) -> String {
        match odds.ranking.iter().find(|row| row.hypothesis == id) {
            Some(row) => self.names().faults(&row.faults),
            None => id.replace('-', " ").replace('@', " at "),
        }
    }

    fn other(&mut self, record: &Record, page: &mut Page) {
        let n = record.n;
        let line = self.names().event(&record.event);
        let text = match &record.event {
            Event::HoldPoint(point) => {
                let mut text = Text::new();
                if point.done {
                    text = text.with(Meaning::Done, "(x) ").plain(point.point.clone());
                } else {
                    text = text.with(Meaning::Wrong, "( ) ").plain(line.clone());
                    self.remark(format!("entry {n}: {line}"));
                }
                let seen: Vec<String> = point
                    .readings
                    .iter()
                    .flatten()
                    .map(|(name, volts)| format!("{name} {volts}"))
                    .collect();
                if !seen.is_empty() {
                    text = text.plain(format!(": {}", seen.join(", ")));
                }
                match &point.by {
                    Some(by) => text.dim(format!(", by {by}")),
                    None => text,
                }
            }
            Event::Recheck(taken) => {
                if taken.result != "within" {
                    let name = self.names().test(&taken.test, &taken.at);
                    self.remark(format!(
                        "entry {n}: re-test {name}: {}",
                        result(&taken.result)
                    ));
                }
                Text::from(sentence(&line))
            }
            Event::Cannot(_) | Event::Retracted(_) => {
                self.remark(format!("entry {n}: {line}"));
                Text::from(sentence(&line))
            }
            Event::Resumed(_) => {
                self.remark(format!("entry {n}: the visit was interrupted and resumed"));
                Text::from(sentence(&line))
            }
            Event::Verdict(_) => Text::new().value(sentence(&line)),
            _ => Text::from(sentence(&line)),
        };
        self.entry(record, text, page);
    }

    /// The odds behind an entry that moved them.
    fn odds(&self, record: &Record, page: &mut Page) {
        let Some(moment) = self
            .moments
            .get(&record.n)
            .filter(|moment| !moment.causes.is_empty())
        else {
            return;
        };
        if matches!(record.event, Event::HoldPoint(_)) {
            return;
        }
        let said: Vec<String> = moment
            .causes
            .iter()
            .map(|cause| format!("{} {}", cause.name, in_100(cause.p)))
            .collect();
        page.hang(
            "",
            MARGIN + 2,
            Text::new().dim("odds: ").plain(said.join("; ")),
        );
    }

    /// What was left.
    fn end(&mut self, records: &[Record], torn: bool) {
        let closed = records.iter().rev().find_map(|record| match &record.event {
            Event::Closed(closed) => Some(closed.outcome),
            _ => None,
        });
        if closed.is_none() || !self.session.is_closed() {
            self.remark("the visit was not closed");
        }
        if torn {
            self.remark("the last line was cut off");
        }
        let owed = self.session.owed().to_vec();
        for key in owed {
            let name = self.names().test(&key.test, &key.at);
            self.remark(format!("a re-test is owed: {name}"));
        }
        let open = self.session.safety().open();
        let lifted = self.session.safety().lifted().to_vec();
        if !open.is_empty() {
            let text = format!("left open: {}", self.names().places(&open));
            self.remark(text);
        }
        if !lifted.is_empty() {
            let text = format!("left lifted: {}", self.names().places(&lifted));
            self.remark(text);
        }
    }

    /// The last verdict, and what it rests on.
    fn verdict(&self, records: &[Record]) -> Page {
        let mut page = Page::new();
        let last = records.iter().rev().find_map(|record| match &record.event {
            Event::Verdict(verdict) if verdict.group.is_some() => Some((record.n, verdict.clone())),
            _ => None,
        });
        let Some((entry, verdict)) = last else {
            page.line("No verdict was reached.");
            return page;
        };
        page.line(
            Text::new()
                .with(Meaning::Head, "VERDICT")
                .plain(format!(
                    " {}, ",
                    super::super::words::action(&verdict.action)
                ))
                .value(in_100(verdict.p))
                .dim(format!(" (entry {entry})")),
        );
        let odds = self.session.odds(super::super::prompt::MANY);
        let repaired: BTreeSet<u64> = records
            .iter()
            .filter(|r| matches!(r.event, Event::Repair(_)))
            .map(|r| r.n)
            .collect();
        let group = verdict.group.unwrap_or_default();
        let Some(row) = odds.ranking.iter().find(|row| row.group == group) else {
            if !repaired.is_empty() {
                page.hang("", 2, "What was repaired since is no cause any more.");
            }
            return page;
        };
        page.hang("", 2, sentence(&self.names().faults(&row.faults)));
        let ask = crate::session::command::Evidence {
            hypothesis: row.hypothesis.clone(),
        };
        let mut bits = self
            .session
            .evidence(&ask)
            .map(|answer| answer.evidence)
            .unwrap_or_default();
        bits.sort_by(|a, b| {
            b.bits
                .abs()
                .total_cmp(&a.bits.abs())
                .then(a.entry.cmp(&b.entry))
        });
        let rests: Vec<String> = bits
            .iter()
            .take(5)
            .map(|row| format!("entry {} ({:+.1} bits)", row.entry, row.bits))
            .collect();
        if !rests.is_empty() {
            page.hang("", 2, format!("It rests on {}.", rests.join(", ")));
        }
        page
    }
}

/// Whether a reading lies within what a cause would read, nine times in ten.
fn fits(band: &ExpectView, parsed: &Parsed) -> bool {
    match (band, parsed.value) {
        (ExpectView::Number { p05, p95, .. }, value) => {
            let slack = if parsed.unit == Unit::None { 0.0 } else { 0.02 };
            let (low, high) = (p05 * (1.0 - slack), p95 * (1.0 + slack));
            match value {
                ParsedValue::Value { value } => (low..=high).contains(&value),
                ParsedValue::Range {
                    low: from,
                    high: to,
                } => to >= low && from <= high,
                ParsedValue::Over { over } => high >= over,
                ParsedValue::Under { under } => low <= under,
                ParsedValue::Word { .. } => false,
            }
        }
        (ExpectView::Words { outcomes, .. }, ParsedValue::Word { word }) => {
            outcomes.get(word.text()).is_some_and(|p| *p >= 0.05)
        }
        (ExpectView::Words { .. }, _) => false,
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::quantity::Word;

    #[test]
    fn a_reading_is_held_against_the_band() {
        let band = ExpectView::Number {
            hypothesis: "x".into(),
            p05: 40.0,
            p50: 47.0,
            p95: 55.0,
        };
        let volts = |value| Parsed {
            value,
            unit: Unit::Volt,
            rough: false,
        };
        assert!(fits(&band, &volts(ParsedValue::Value { value: 47.0 })));
        assert!(!fits(&band, &volts(ParsedValue::Value { value: 60.0 })));
        assert!(fits(&band, &volts(ParsedValue::Over { over: 50.0 })));
        assert!(!fits(&band, &volts(ParsedValue::Over { over: 60.0 })));
        let band = ExpectView::Words {
            hypothesis: "x".into(),
            outcomes: [("trips".to_owned(), 0.9)].into(),
        };
        assert!(fits(&band, &volts(ParsedValue::Word { word: Word::Trips })));
        assert!(!fits(
            &band,
            &volts(ParsedValue::Word { word: Word::Holds })
        ));
    }
}
