//! Hold points as they are shown: the one to do now in full, what is done or comes later in short.

use super::super::text::{Meaning, Page, Text};
use super::super::words::sentence;
use super::desk::{Answer, Desk, Hand, refused};
use super::points::short;
use super::screen::MARGIN;
use crate::session::SessionError;

impl Desk {
    /// The hold points of the test in hand.
    pub(super) fn points_page(&self, hand: &Hand) -> Page {
        let mut page = Page::new();
        let names = self.names();
        let now = hand.points.iter().position(|point| !point.done);
        for (at, point) in hand.points.iter().enumerate() {
            let mark = if point.done {
                Text::new()
                    .plain(format!("{:>2} ", at + 1))
                    .with(Meaning::Done, "(x)")
            } else {
                Text::new().plain(format!("{:>2} ( )", at + 1))
            };
            let mut lead = Text::new().plain(" ".repeat(MARGIN));
            lead.0.extend(mark.0);
            // What is done, or comes later, is said in short; what is to be done now in full.
            let full = Some(at) == now;
            let mut text = if full {
                sentence(&point.text)
            } else {
                short(&point.text)
            };
            if let (Some(test), Some(place), false) = (&point.test, &point.at, point.done) {
                text = format!("{text} Done by: take {test} {place}");
            }
            page.hang(lead, MARGIN + 7, text);
            if full && !point.wants.is_empty() {
                let wants: Vec<String> = point.wants.iter().map(|want| want.name.clone()).collect();
                let limit = point
                    .wants
                    .iter()
                    .map(|want| want.limit_volts)
                    .fold(f64::INFINITY, f64::min);
                page.hang(
                    "",
                    MARGIN + 7,
                    Text::new()
                        .dim("read, in volts: ")
                        .value(wants.join(", "))
                        .dim(format!("; at most {limit:.0} V each. "))
                        .word(format!("done {}", at + 1))
                        .dim(" asks for each."),
                );
            }
            if full && !point.setup.open.is_empty() {
                let open = names.places(&point.setup.open);
                page.hang("", MARGIN + 7, Text::new().dim("open: ").plain(open));
            }
        }
        page
    }

    /// What is left to do before the reading; behind the last point, how to take it.
    pub(super) fn after_point(&mut self) -> Answer {
        let before = self.hand.as_ref().map(|hand| hand.test.clone());
        self.renew_hand()?;
        let Some(hand) = &self.hand else {
            return Ok(self.screen());
        };
        if before.is_none_or(|test| test.test != hand.test.test || test.at != hand.test.at) {
            return Ok(self.screen());
        }
        let mut page = self.header();
        if hand.open().next().is_some() {
            page.extend(self.points_page(hand));
        } else {
            page.hang(
                Text::new().with(Meaning::Head, "NOW"),
                MARGIN,
                Text::new().value(sentence(&hand.test.name)),
            );
            page.extend(self.measure_page(hand));
        }
        page.line(self.ready());
        Ok(page)
    }

    /// A prove-dead reading over its limit.
    pub(super) fn not_dead(&mut self, error: &SessionError) -> Page {
        let mut page = Page::new();
        page.line(
            Text::new()
                .danger("NOT DEAD: ")
                .plain(sentence(&error.message))
                .plain(" Withdraw your hands. ")
                .plain(sentence(&error.hint)),
        );
        page.extend(self.show_odds());
        match self.advise_anew() {
            Ok(screen) => page.blank().extend(screen),
            Err(error) => page.extend(refused(&error)),
        };
        page
    }
}
