//! The screen: what is live, what comes first, the one thing to do next, and the verdict.

use super::super::text::wrap::FIRM;
use super::super::text::{Cell, Meaning, Page, Table, Text};
use super::super::words::{
    Cause, about, action, expected, in_100, list, minutes, of_100, sentence,
};
use super::desk::{Desk, Hand, MANY};
use crate::knowledge::Hookup;
use crate::session::Event;
use crate::session::view::{OddsView, VerdictView};

/// Columns of the margin in which FIRST, NEXT and DECIDE stand.
pub const MARGIN: usize = 8;

/// Causes shown without being asked for more.
const FEW: usize = 5;

fn head(word: &str) -> Text {
    Text::new().with(Meaning::Head, word)
}

impl Desk {
    /// Header, FIRST, DECIDE, NEXT.
    pub fn screen(&self) -> Page {
        let mut page = Page::new();
        page.extend(self.header());
        page.blank().extend(self.first());
        if let Some(verdict) = &self.verdict {
            page.blank().extend(self.decide(verdict));
        }
        page.blank().extend(self.next());
        page.line(self.ready());
        page
    }

    /// What is live, open, dead and lifted, and for how long this goes on.
    pub fn header(&self) -> Page {
        let (state, names) = (self.session.state(), self.names());
        let all = self.all_places();
        let dead: Vec<String> = all
            .iter()
            .filter(|place| !state.live.contains(place))
            .cloned()
            .collect();
        let live = match (state.live.len(), dead.len()) {
            (n, _) if n == all.len() => "everything".to_owned(),
            (0, _) => "nothing here, as proved".to_owned(),
            (_, n) if n <= 3 => format!("all but {}", names.places(&dead)),
            (n, _) if n <= 4 => names.places(&state.live),
            (n, _) => format!("{n} of {} boards and circuits", all.len()),
        };
        // Blanks that no line is broken at keep the parts apart.
        let gap = format!("{FIRM}{FIRM} ");
        let text = Text::new()
            .danger(format!("LIVE{FIRM}"))
            .plain(live + &gap)
            .value(format!("OPEN{FIRM}"))
            .plain(names.places(&state.open) + &gap)
            .with(Meaning::Done, format!("DEAD{FIRM}"))
            .plain(names.places(&dead) + &gap)
            .value(format!("LIFTED{FIRM}"))
            .plain(names.places(&state.lifted) + &gap)
            .dim(self.minutes_so_far().replace(' ', &FIRM.to_string()));
        let mut page = Page::new();
        page.line(text);
        page
    }

    /// Orders before anything else.
    pub fn first(&self) -> Page {
        let mut page = Page::new();
        let orders = self.orders();
        if orders.is_empty() {
            return page;
        }
        if let Some(entry) = self.first_done() {
            let codes: Vec<String> = orders
                .iter()
                .map(|order| order.code.replace('-', " "))
                .collect();
            let text = Text::new()
                .with(Meaning::Done, "done")
                .plain(format!(": {} (entry {entry})", list(&codes)));
            page.hang(head("FIRST"), MARGIN, text);
            return page;
        }
        for (at, order) in orders.iter().enumerate() {
            let lead = if at == 0 { head("FIRST") } else { Text::new() };
            page.hang(lead, MARGIN, Text::new().danger(sentence(&order.text)));
        }
        page.hang(
            "",
            MARGIN,
            Text::new().plain("When that is done: ").word("done first"),
        );
        page
    }

    /// The entry that says the orders were carried out, if none came after it.
    fn first_done(&self) -> Option<u64> {
        let mut done = None;
        for record in self.session.records() {
            if self.session.is_retracted(record.n) {
                continue;
            }
            match &record.event {
                Event::Symptom(_) => done = None,
                Event::HoldPoint(point)
                    if point.done && point.point == super::points::MAKE_SAFE =>
                {
                    done = Some(record.n);
                }
                Event::Note(note) if note.text == super::points::ORDERS_DONE => {
                    done = Some(record.n)
                }
                _ => {}
            }
        }
        done
    }

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

    fn hand_page(&self, hand: &Hand) -> Page {
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
    fn expects_page(&self, advice: &crate::session::view::AdviceView) -> Page {
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

    /// Name and odds of a hypothesis.
    pub fn hypothesis(&self, odds: &OddsView, id: &str) -> (String, Option<f64>) {
        match id {
            "nothing-wrong" => ("nothing wrong".to_owned(), Some(odds.nothing_wrong)),
            "unlisted" => ("not on the list".to_owned(), Some(odds.unlisted)),
            id => match odds.ranking.iter().find(|row| row.hypothesis == id) {
                Some(row) => (self.names().faults(&row.faults), Some(row.p)),
                None => (id.to_owned(), None),
            },
        }
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

    /// The verdict.
    pub fn decide(&self, verdict: &VerdictView) -> Page {
        let mut page = Page::new();
        let names = self.names();
        let mut text = Text::new().value(sentence(action(&verdict.action)));
        if verdict.action == "repair"
            || verdict.action == "call-network"
            || verdict.action == "isolate"
        {
            text = text.plain(format!(" {}", sentence(&names.repair(&verdict.faults))));
        }
        page.hang(head("DECIDE"), MARGIN, text);
        let what = if verdict.faults.is_empty() {
            "nothing wrong that a test can still find".to_owned()
        } else {
            names.faults(&verdict.faults)
        };
        page.hang(
            "",
            MARGIN,
            Text::new()
                .plain(format!("{what}: "))
                .value(in_100(verdict.p)),
        );
        page.hang(
            "",
            MARGIN,
            Text::new().dim("because ").plain(because(&verdict.why)),
        );
        if let Some(look) = &verdict.confirm {
            page.hang(
                "",
                MARGIN,
                Text::new()
                    .dim("confirm: ")
                    .plain(names.test(&look.test, &look.at)),
            );
        }
        let odds = self.session.odds(MANY);
        let others: Vec<String> = verdict
            .could_also_be
            .iter()
            .filter(|other| other.p >= 0.005)
            .take(4)
            .map(|other| format!("{} ({})", self.group(&odds, &other.group), in_100(other.p)))
            .collect();
        if !others.is_empty() {
            page.hang(
                "",
                MARGIN,
                Text::new().dim("could also be: ").plain(list(&others)),
            );
        }
        let say = match verdict.action.as_str() {
            "repair" => Text::new()
                .plain("Look, then say ")
                .word("repair found")
                .plain(" or ")
                .word("repair not-found"),
            "nothing-found" => Text::new().plain("Then ").word("close nothing-found"),
            "refer" => Text::new().plain("Then ").word("close referred"),
            _ => Text::new()
                .plain("What is found there: ")
                .word("repair found")
                .plain("; left without danger: ")
                .word("close made-safe"),
        };
        page.hang("", MARGIN, say);
        page
    }

    /// The name of a repair group: its likeliest hypothesis.
    pub fn group(&self, odds: &OddsView, group: &str) -> String {
        match odds.ranking.iter().find(|row| row.group == group) {
            Some(row) => self.names().faults(&row.faults),
            None => group.replace('-', " "),
        }
    }

    /// The odds, with what they were.
    pub fn odds_page(&self, odds: &OddsView, most: usize, compare: bool) -> Page {
        let mut page = Page::new();
        let mut table = Table::new(0);
        for (at, Cause { key, name, p }) in self.names().causes(odds, most).into_iter().enumerate()
        {
            let number = if at == 0 { in_100(p) } else { of_100(p) };
            let was = self
                .was
                .get(&key)
                .filter(|_| compare)
                .map(|was| format!("was {}", of_100(*was)));
            let odds = Text::new().value(number);
            table.row(vec![
                Cell::from(name),
                Cell {
                    text: odds,
                    right: false,
                },
                Text::new().dim(was.unwrap_or_default()).into(),
            ]);
        }
        page.table(2, table);
        page
    }

    /// The leading causes; what is shown is what the next odds are compared with.
    pub fn show_odds(&mut self) -> Page {
        let odds = self.session.odds(MANY);
        let page = self.odds_page(&odds, FEW, true);
        self.was = self
            .names()
            .causes(&odds, usize::MAX)
            .into_iter()
            .map(|cause| (cause.key, cause.p))
            .collect();
        page
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

/// A reason behind the word `because`.
fn because(why: &str) -> String {
    let why = why.trim();
    let why = why.strip_prefix("because ").unwrap_or(why);
    if why.ends_with('.') {
        why.to_owned()
    } else {
        format!("{why}.")
    }
}

fn is_confirm(verdict: &VerdictView, hand: &Hand) -> bool {
    verdict
        .confirm
        .as_ref()
        .is_some_and(|look| look.test == hand.test.test && look.at == hand.test.at)
}

/// What a re-test must show, and how well that is known.
pub fn limits(owed: &crate::session::view::CheckOwed) -> Page {
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
