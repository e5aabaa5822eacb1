//! Where the current goes under a cause, as a person would follow it with a clamp.

use super::super::text::{Cell, Meaning, Page, Table, Text};
use super::desk::{Answer, Desk};
use crate::quantity::{Unit, format};
use crate::session::path::PathView;

/// Rows that fit what a person follows.
const MOST: usize = 12;

/// Above this metal is not to be touched with wet skin, V.
const TOUCH_VOLTS: f64 = 25.0;

impl Desk {
    /// `path [CAUSE]`.
    pub(super) fn path(&mut self, words: &[String]) -> Answer {
        let (_, faults) = self.cause(words.first().map_or("1", String::as_str))?;
        let view = self.session.current_path(&faults)?;
        let mut page = Page::new();
        page.line(format!(
            "With {}, in service, everything switched on, nothing tripped:",
            self.names().faults(&faults)
        ));
        page.extend(self.path_page(&view));
        Ok(page)
    }

    fn path_page(&self, view: &PathView) -> Page {
        let mut page = Page::new();
        let names = self.names();
        let amps = |amps: f64| format(amps, Unit::Ampere);
        let mut table = Table::new(0);
        for row in view.conductors.iter().take(MOST) {
            table.row(vec![
                Cell::from(names.place(&row.at)),
                Cell::right(Text::new().value(amps(row.amps))),
                Text::new().dim(format!("sound {}", amps(row.sound))).into(),
            ]);
        }
        if table.is_empty() {
            page.hang(
                "",
                2,
                "Every conductor carries what it carries in a sound installation.",
            );
        }
        page.table(2, table);
        let mut table = Table::new(0);
        for row in &view.rcds {
            let trips = row.amps >= row.rated / 2.0;
            let (meaning, word) = if trips {
                (Meaning::Danger, "trips, or is near it")
            } else {
                (Meaning::Dim, "stays in")
            };
            table.row(vec![
                Cell::from(format!("{} sees", names.place(&row.rcd))),
                Cell::right(Text::new().value(amps(row.amps))),
                Cell::from(format!("of {}", amps(row.rated))),
                Text::new().with(meaning, word).into(),
            ]);
        }
        for row in &view.metal {
            let meaning = if row.volts > TOUCH_VOLTS {
                Meaning::Danger
            } else {
                Meaning::Value
            };
            table.row(vec![
                Cell::from(format!("{} to earth", names.place(&row.at))),
                Cell::right(Text::new().with(meaning, format(row.volts, Unit::Volt))),
            ]);
        }
        page.table(2, table);
        page
    }
}
