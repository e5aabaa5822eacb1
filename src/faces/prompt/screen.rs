//! The screen: what is live, what comes first, the one thing to do next, and the verdict.

use super::super::text::wrap::FIRM;
use super::super::text::{Cell, Meaning, Page, Table, Text};
use super::super::words::{Cause, action, in_100, list, of_100, sentence};
use super::desk::{Desk, MANY};
use crate::quantity::{Unit, format};
use crate::session::Event;
use crate::session::view::{OddsView, VerdictView};

/// Columns of the margin in which FIRST, NEXT and DECIDE stand.
pub const MARGIN: usize = 8;

/// Causes shown without being asked for more.
const FEW: usize = 5;

pub(super) fn head(word: &str) -> Text {
    Text::new().with(Meaning::Head, word)
}

impl Desk {
    /// Header, FIRST, DECIDE, NEXT.
    pub fn screen(&self) -> Page {
        let mut page = Page::new();
        page.extend(self.header());
        page.blank().extend(self.first());
        // Nothing is closed while re-tests are owed.
        let closes = |verdict: &&VerdictView| {
            verdict.action == "nothing-found" && !self.session.owed().is_empty()
        };
        if let Some(verdict) = self.verdict.as_ref().filter(|verdict| !closes(verdict)) {
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
        let mut page = self.withdraw();
        page.extend(self.orders_page());
        page
    }

    /// What a stake has shown of the earth bar, while it stands.
    fn withdraw(&self) -> Page {
        let mut page = Page::new();
        let safety = self.session.safety();
        let limit = self.session.engine().knowledge().safety.touch_volts;
        let Some(stake) = safety
            .stake()
            .filter(|stake| stake.volts > limit && !safety.network_attended())
        else {
            return page;
        };
        let text = format!(
            "{} from the earth bar to a stake (entry {}), above {}: withdraw, keep everyone off metal, and test nothing \
             more live here until the supply has been made dead.",
            format(stake.volts, Unit::Volt),
            stake.entry,
            format(limit, Unit::Volt)
        );
        page.hang(head("STOP"), MARGIN, Text::new().danger(text));
        page
    }

    fn orders_page(&self) -> Page {
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
}

/// A reason behind the word `because`.
pub(super) fn because(why: &str) -> String {
    let why = why.trim();
    let why = why.strip_prefix("because ").unwrap_or(why);
    if why.ends_with('.') {
        why.to_owned()
    } else {
        format!("{why}.")
    }
}
