//! The test in hand: what it is, its hold points, how to connect, what it would read and why it.

use super::super::text::{Cell, Meaning, Page, Table, Text};
use super::super::words::{about, expected, in_100, minutes, sentence};
use super::desk::{Desk, Hand, MANY};
use super::screen::{MARGIN, because, head};
use crate::knowledge::Hookup;
use crate::session::Event;
use crate::session::view::{AdviceView, CheckOwed, VerdictView};

impl Desk {
    /// The one thing to do.
    pub fn next(&self) -> Page {
        let mut page = Page::new();
        if let Some(hand) = &self.hand {
            return self.hand_page(hand);
        }
        if !self
            .session
            .records()
            .iter()
            .any(|record| matches!(record.event, Event::Symptom(_)))
        {
            page.hang(
                head("NEXT"),
                MARGIN,
                Text::new()
                    .plain("Say what is wrong: ")
                    .word("symptom KIND at PLACE")
                    .plain(", with one of these kinds:"),
            );
            let mut table = Table::new(1);
            for row in &self.session.engine().knowledge().symptoms {
                table.row(vec![
                    Text::new().word(row.kind.clone()).into(),
                    Cell::from(row.name.clone()),
                ]);
            }
            page.table(MARGIN, table);
            return page;
        }
        if self.verdict.is_none() {
            page.hang(
                head("NEXT"),
                MARGIN,
                sentence(if self.why.is_empty() {
                    "no test is worth doing"
                } else {
                    &self.why
                }),
            );
        }
        page
    }

    pub(super) fn hand_page(&self, hand: &Hand) -> Page {
        let mut page = Page::new();
        let test = &hand.test;
        let word = match (&hand.owed, &self.verdict) {
            (Some(_), _) => "RE-TEST",
            (None, Some(verdict)) if is_confirm(verdict, hand) => "CONFIRM",
            _ => "NEXT",
        };
        page.hang(head(word), MARGIN, Text::new().value(sentence(&test.name)));
        let mut cost = Text::new().dim(format!("{}, ", minutes(test.minutes)));
        match test.energised {
            true => cost.push(Meaning::Danger, "live"),
            false => cost.push(Meaning::Done, "dead"),
        }
        page.hang(
            "",
            MARGIN,
            cost.dim(format!("  [{} {}]", test.test, test.at)),
        );
        if let Some(hazard) = &hand.hazard {
            page.hang(
                "",
                MARGIN,
                Text::new().danger("Danger: ").plain(sentence(hazard)),
            );
        }
        page.extend(self.points_page(hand));
        page.extend(self.measure_page(hand));
        if let Some(advice) = &hand.advice {
            page.hang(
                "",
                MARGIN,
                Text::new().dim("because ").plain(because(&advice.why)),
            );
        }
        page
    }

    /// How to connect, and what may be read.
    pub fn measure_page(&self, hand: &Hand) -> Page {
        let mut page = Page::new();
        let test = &hand.test;
        page.hang(
            "",
            MARGIN,
            Text::new().dim("do: ").plain(sentence(&test.text)),
        );
        page.hang(
            "",
            MARGIN,
            Text::new().dim("probes: ").plain(self.probes(&test.hookup)),
        );
        if let Some(owed) = &hand.owed {
            page.extend(limits(owed));
        }
        if let Some(advice) = &hand.advice {
            page.extend(self.expects_page(advice));
        }
        page
    }

    /// What the leading causes would read, each with its odds.
    fn expects_page(&self, advice: &AdviceView) -> Page {
        let mut page = Page::new();
        let odds = self.session.odds(MANY);
        let unit = self.names().unit(&advice.test.test, &advice.test.at);
        // Causes that would read the same stand together: the test does not part them.
        let mut bands: Vec<(String, Vec<String>, f64)> = Vec::new();
        for expects in &advice.expects {
            let (name, p) = self.hypothesis(&odds, about(expects));
            let (band, p) = (expected(expects, unit), p.unwrap_or(0.0));
            match bands.iter_mut().find(|(same, ..)| *same == band) {
                Some((_, names, sum)) => {
                    names.push(name);
                    *sum += p;
                }
                None => bands.push((band, vec![name], p)),
            }
        }
        let mut table = Table::new(1);
        for (band, names, p) in bands {
            let more = names.len().saturating_sub(2);
            let mut said = names.into_iter().take(2).collect::<Vec<_>>().join("; ");
            if more > 0 {
                said = format!("{said}; {more} more");
            }
            table.row(vec![
                Text::new().value(band).into(),
                Cell::from(said),
                Cell::right(in_100(p)),
            ]);
        }
        if !table.is_empty() {
            page.hang("", MARGIN, Text::new().dim("would read:"));
            page.table(MARGIN + 2, table);
        }
        page
    }

    /// Where the probes go.
    fn probes(&self, hookup: &Hookup) -> String {
        let names = self.names();
        match hookup {
            Hookup::Volts { between, .. }
            | Hookup::Continuity { between }
            | Hookup::Loop { between, .. } => between
                .iter()
                .map(|end| names.place(end))
                .collect::<Vec<_>>()
                .join("; "),
            Hookup::Amps { around } => format!("clamp round {}", names.places(around)),
            Hookup::Insulation {
                between: [a, b],
                test_volts,
            } => {
                format!(
                    "{}; {}; {test_volts:.0} V DC",
                    names.places(a),
                    names.places(b)
                )
            }
            Hookup::TripTime { rcd, at, .. } | Hookup::Ramp { rcd, at } => {
                let at = at
                    .as_ref()
                    .map_or_else(|| "its load side".to_owned(), |at| names.place(at));
                format!("RCD tester on {}, at {at}", names.place(rcd))
            }
            Hookup::Holds { device } => {
                format!("none: close {} and wait a minute", names.place(device))
            }
            Hookup::Lamp { at } => format!("none: watch the lamp at {}", names.place(at)),
            Hookup::Seen { at, what } => format!(
                "none: look at {} for {}",
                names.place(at),
                what.replace('-', " ")
            ),
        }
    }

    /// What may be said now.
    pub fn ready(&self) -> Text {
        let Some(hand) = &self.hand else {
            return Text::new().dim("ready for: symptom, tests, ranking, note, close, help");
        };
        match hand.open().next() {
            Some(_) => Text::new().dim("ready for: done 1 …; or why, other, cannot, help"),
            None => Text::new().dim(format!(
                "ready for {}; or why, other, cannot, help",
                self.wanted(hand)
            )),
        }
    }

    /// What a reading of the test in hand looks like.
    pub fn wanted(&self, hand: &Hand) -> String {
        let engine = self.session.engine();
        engine.asked(&hand.test.hookup, &hand.test.unit).example()
    }
}

fn is_confirm(verdict: &VerdictView, hand: &Hand) -> bool {
    verdict
        .confirm
        .as_ref()
        .is_some_and(|look| look.test == hand.test.test && look.at == hand.test.at)
}

/// What a re-test must show, and how well that is known.
pub fn limits(owed: &CheckOwed) -> Page {
    let mut page = Page::new();
    let limit = owed
        .limit
        .as_deref()
        .unwrap_or("no limit in the knowledge files");
    let known = owed.marker.as_deref().unwrap_or_default();
    let mut text = Text::new().dim("limit: ").value(limit);
    if let Some(source) = &owed.source {
        text = text.dim(format!(" ({source})"));
    }
    if owed.limit.is_none()
        || known.contains("memory")
        || known.contains("guess")
        || known.contains("mixed")
    {
        text = text.plain(" ").with(Meaning::Wrong, "check your standard");
    }
    page.hang("", MARGIN, text);
    page
}
