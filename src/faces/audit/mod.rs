//! The story of a saved visit: whether its log is whole, what was done and seen, and what was left open.

mod story;

use std::collections::BTreeMap;
use std::io::Write;
use std::path::Path;

use super::Trouble;
use super::text::{Meaning, Page, Paper, Text};
use super::words::sentence;
use crate::knowledge::Knowledge;
use crate::session::chain::{Record, Scan};
use crate::session::clock::rfc3339;
use crate::session::log::verify;
use crate::session::view::ExpectView;
use crate::session::{Event, Session, SessionError};
use story::Story;

/// What an audit comes to.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord)]
pub enum Finding {
    /// Whole, and nothing to remark.
    Clean,
    /// Whole; something was skipped, refused, retracted, owed, or left open.
    Remarks,
    /// A line was changed, cut, or is missing.
    NotWhole,
}

impl Finding {
    /// Exit code: 0, 1, 2.
    pub fn code(self) -> u8 {
        match self {
            Self::Clean => 0,
            Self::Remarks => 1,
            Self::NotWhole => 2,
        }
    }
}

/// What the visit looked like just before and behind an entry.
#[derive(Clone, Debug, Default)]
struct Moment {
    /// Causes with their odds behind it.
    causes: Vec<super::words::Cause>,
    /// Before a reading: what the leading causes would read.
    expected: Vec<ExpectView>,
}

/// Causes whose odds are followed.
const FOLLOWED: usize = 3;

/// Hypotheses that a reading is held against.
const AGAINST: usize = 6;

/// Tells the story of a log.
///
/// # Errors
/// A log that cannot be read at all; output that cannot be written.
pub fn run(
    knowledge: &Knowledge,
    path: &Path,
    paper: &mut Paper<impl Write>,
) -> Result<Finding, Trouble> {
    let scan = verify(path).map_err(SessionError::from)?;
    let (page, finding) = tell(knowledge, &scan);
    paper.show(&page)?;
    Ok(finding)
}

/// The story as a page.
pub fn tell(knowledge: &Knowledge, scan: &Scan) -> (Page, Finding) {
    let mut page = whole(scan);
    let broken = !scan.faults.is_empty() || scan.records.is_empty();
    // Behind a broken line nothing can be replayed in good faith: what stood before it can.
    let sound = match scan.faults.first() {
        None => scan.records.clone(),
        Some((line, _)) => {
            let before = usize::try_from(line.saturating_sub(1)).unwrap_or(usize::MAX);
            scan.records.iter().take(before).cloned().collect()
        }
    };
    if sound.is_empty() {
        return (page, Finding::NotWhole);
    }
    let mut moments: BTreeMap<u64, Moment> = BTreeMap::new();
    let coming: BTreeMap<u64, Record> = sound
        .iter()
        .map(|record| (record.n.saturating_sub(1), record.clone()))
        .collect();
    let each = |session: &mut Session, record: &Record| {
        let moment = moments.entry(record.n).or_default();
        if moves(&record.event) {
            let odds = session.odds(super::prompt::MANY);
            moment.causes = super::words::Names(session.engine()).causes(&odds, FOLLOWED);
        }
        if let Some(Event::Reading(next)) = coming.get(&record.n).map(|next| &next.event) {
            let expected = session
                .expected(&next.test, &next.at, AGAINST)
                .unwrap_or_default();
            moments.entry(record.n + 1).or_default().expected = expected;
        }
    };
    match Session::replay(knowledge, sound, each) {
        Ok(mut session) => {
            let (told, remarks) = Story::new(&mut session, &moments).tell(scan.torn.is_some());
            page.blank().extend(told);
            let finding = match (broken, remarks) {
                (true, _) => Finding::NotWhole,
                (false, true) => Finding::Remarks,
                (false, false) => Finding::Clean,
            };
            (page, finding)
        }
        Err(error) => {
            page.line(
                Text::new()
                    .with(Meaning::Wrong, "It cannot be replayed: ")
                    .plain(sentence(&error.message)),
            );
            page.line(sentence(&error.hint));
            (
                page,
                if broken {
                    Finding::NotWhole
                } else {
                    Finding::Remarks
                },
            )
        }
    }
}

/// Whether an event moves the odds.
fn moves(event: &Event) -> bool {
    matches!(
        event,
        Event::Symptom(_)
            | Event::Reading(_)
            | Event::Recheck(_)
            | Event::Repair(_)
            | Event::Retracted(_)
            | Event::HoldPoint(_)
    )
}

/// Whether the chain is whole.
fn whole(scan: &Scan) -> Page {
    let mut page = Page::new();
    let lines = scan.records.len();
    let span = scan.records.first().zip(scan.records.last());
    let span = span
        .map(|(first, last)| format!(", {} to {}", day(first), day(last)))
        .unwrap_or_default();
    if scan.faults.is_empty() && lines > 0 {
        page.line(Text::new().with(Meaning::Done, "WHOLE").plain(format!(
            ": {lines} lines{span}, each bound to the one before by its SHA-256."
        )));
    } else {
        page.line(
            Text::new()
                .danger("NOT WHOLE")
                .plain(format!(": {lines} lines can be read{span}.")),
        );
        for (line, fault) in &scan.faults {
            page.hang("  -", 4, format!("line {line} {fault}"));
        }
        if lines == 0 && scan.faults.is_empty() {
            page.hang("  -", 4, "it holds no line of a visit");
        }
        page.line("Rely on nothing behind the first of these; ask for the copy that was made at the time.");
    }
    if let Some(torn) = &scan.torn {
        page.line(format!(
            "Line {} was cut off while it was written; it was never said to be recorded.",
            torn.line
        ));
    }
    page
}

fn day(record: &Record) -> String {
    let time = rfc3339(record.time);
    time.get(..16).unwrap_or(&time).replace('T', " ") + " UTC"
}
