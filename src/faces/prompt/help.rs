//! What each command does, and how a reading may be written.

use super::super::text::{Cell, Page, Table, Text};
use super::desk::Answer;
use super::typed::COMMANDS;
use crate::session::{ErrorCode, SessionError};

/// Help about everything, or one command.
pub fn help(about: Option<&str>) -> Answer {
    let mut page = Page::new();
    let Some(about) = about else {
        let mut table = Table::new(1);
        for (name, _, what) in COMMANDS {
            table.row(vec![Text::new().word(*name).into(), Cell::from(*what)]);
        }
        page.table(1, table);
        page.line(
            Text::new()
                .plain("A value alone (47 V, 0.35 MΩ, >200, OL, no trip, 40..60 V, ~230 V) answers the test in hand. ")
                .word("help COMMAND")
                .plain(" says more. Tab completes; Ctrl-C drops the line; Ctrl-D leaves."),
        );
        return Ok(page);
    };
    let Some((name, parts, what)) = COMMANDS.iter().find(|(name, ..)| *name == about) else {
        let names = COMMANDS.iter().map(|(name, ..)| *name);
        return Err(SessionError::unknown(
            ErrorCode::UnknownWord,
            "command",
            about,
            names,
        ));
    };
    page.line(Text::new().word(format!("{name} {parts}")));
    page.line(*what);
    page.line(Text::new().dim(more(name)));
    Ok(page)
}

fn more(name: &str) -> &'static str {
    match name {
        "symptom" => {
            "PLACE is an id or a name (`places` lists both). WORD: always, at-once, in-use, switching-on, now-and-then, \
             rain, once."
        }
        "hold" | "done" => {
            "POINT is its number in the list. Without readings, each one is asked for. The tool never fills one in."
        }
        "cannot" => "With the number of a hold point it is about that point, and needs a reason.",
        "repair" => {
            "found: there, and put right; found-only: there, not put right; not-found: looked, and it is not there. CAUSE is \
             its number in `ranking`; without it the verdict's."
        }
        "evidence" | "path" => "CAUSE is its number in `ranking`; without it the first.",
        "read" => "A reading whose hold points are open is not taken. A wrong one: `retract N`.",
        "recheck" => "Without TEST AT: the first that is owed.",
        "close" => "With re-tests owed only made-safe and referred are taken.",
        _ => "",
    }
}
