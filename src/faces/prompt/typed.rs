//! What was typed: a command with its parts, or a reading that answers the test in hand.

use crate::quantity::nearest;

/// A command's name, its parts, and what it does; in the order of `help`.
pub const COMMANDS: &[(&str, &str, &str)] = &[
    (
        "symptom",
        "KIND [at PLACE] [when WORD] [with EQUIPMENT] [text WORDS]",
        "Say what is wrong.",
    ),
    (
        "advise",
        "[--more]",
        "Show the test in hand; with --more the next best too.",
    ),
    ("other", "", "Take the next best test in hand."),
    ("take", "TEST AT", "Take any test in hand."),
    ("why", "", "Say why this test, and what it costs."),
    (
        "hold",
        "[POINT [READINGS]]",
        "List the hold points, or say that one is done.",
    ),
    (
        "done",
        "POINT [READINGS] | first",
        "Say that a hold point is done, its readings in volts, in order.",
    ),
    (
        "read",
        "TEST AT VALUE",
        "Give a reading of any test; a value alone answers the test in hand.",
    ),
    ("sure", "", "Let a reading that was questioned stand."),
    (
        "cannot",
        "[POINT] [WHY]",
        "Say that the test in hand, or a hold point, cannot be done.",
    ),
    ("ranking", "[N]", "Show the odds of every cause."),
    (
        "evidence",
        "[CAUSE]",
        "Show what each entry says for a cause, in bits.",
    ),
    (
        "whatif",
        "VALUE",
        "Show the odds as a reading would leave them; nothing is recorded.",
    ),
    (
        "path",
        "[CAUSE]",
        "Show where the current goes under a cause.",
    ),
    ("verdict", "", "Show what to do now, if that stands."),
    (
        "repair",
        "found | not-found [CAUSE] [NOTE]",
        "Say what was found where the cause should be.",
    ),
    (
        "recheck",
        "[TEST AT] VALUE",
        "Give a re-test that the repair owes.",
    ),
    ("retract", "N", "Take an entry back; the log keeps both."),
    ("note", "TEXT", "Write something into the log."),
    ("tests", "[WORDS]", "List the tests that have these words."),
    (
        "places",
        "[WORDS]",
        "List the places that have these words.",
    ),
    ("kit", "", "List the instruments."),
    (
        "state",
        "",
        "Show what is live, open, proved dead, lifted, owed.",
    ),
    ("log", "", "List the entries so far."),
    (
        "close",
        "repaired | made-safe | referred | nothing-found [NOTE]",
        "End the visit.",
    ),
    ("help", "[COMMAND]", "Explain."),
    ("quit", "", "Leave; a visit with a log can be resumed."),
];

/// A line, understood as far as the prompt can without the visit.
#[derive(Clone, Debug, PartialEq, Eq)]
pub enum Typed {
    /// Nothing.
    Nothing,
    /// A command and the words behind it.
    Command(&'static str, Vec<String>),
    /// A reading of the test in hand.
    Value(String),
    /// None of these; the nearest commands.
    Unknown(String, Vec<String>),
}

/// Other ways to say a command.
const ALSO: &[(&str, &str)] = &[
    ("exit", "quit"),
    ("q", "quit"),
    ("?", "help"),
    ("next", "advise"),
    ("odds", "ranking"),
    ("undo", "retract"),
    ("can't", "cannot"),
    ("complaint", "symptom"),
];

/// Takes a line apart.
pub fn understand(line: &str) -> Typed {
    let line = line.trim();
    let mut words = line.split_whitespace();
    let Some(first) = words.next() else {
        return Typed::Nothing;
    };
    let said = first.to_lowercase();
    let said = ALSO
        .iter()
        .find(|(other, _)| *other == said)
        .map_or(said.as_str(), |(_, own)| own);
    if let Some((name, ..)) = COMMANDS.iter().find(|(name, ..)| *name == said) {
        return Typed::Command(name, words.map(str::to_owned).collect());
    }
    if crate::faces::words::looks_like_reading(line) {
        return Typed::Value(line.to_owned());
    }
    let names = COMMANDS.iter().map(|(name, ..)| *name);
    let begun: Vec<String> = names
        .clone()
        .filter(|name| name.starts_with(said))
        .map(str::to_owned)
        .collect();
    match begun.as_slice() {
        [one] => COMMANDS
            .iter()
            .find(|(name, ..)| name == one)
            .map_or(Typed::Nothing, |(name, ..)| {
                Typed::Command(name, words.map(str::to_owned).collect())
            }),
        [] => Typed::Unknown(first.to_owned(), nearest(said, names, 2)),
        _ => Typed::Unknown(first.to_owned(), begun),
    }
}

/// The words behind `key` up to the next of `keys`, joined.
pub fn part(words: &[String], key: &str, keys: &[&str]) -> Option<String> {
    let start = words.iter().position(|word| word == key)? + 1;
    let rest = words.get(start..).unwrap_or_default();
    let end = rest
        .iter()
        .position(|word| keys.contains(&word.as_str()))
        .unwrap_or(rest.len());
    let text = rest.get(..end).unwrap_or_default().join(" ");
    (!text.is_empty()).then_some(text)
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn commands_values_beginnings_and_slips() {
        assert_eq!(understand("  "), Typed::Nothing);
        assert_eq!(understand("47 V"), Typed::Value("47 V".into()));
        assert_eq!(understand("no trip"), Typed::Value("no trip".into()));
        assert_eq!(
            understand("RANKING 3"),
            Typed::Command("ranking", vec!["3".into()])
        );
        assert_eq!(
            understand("sym tingle"),
            Typed::Command("symptom", vec!["tingle".into()])
        );
        assert_eq!(understand("q"), Typed::Command("quit", vec![]));
        let Typed::Unknown(_, near) = understand("re 5") else {
            panic!()
        };
        assert!(near.contains(&"read".to_owned()) && near.contains(&"repair".to_owned()));
        let Typed::Unknown(_, near) = understand("advice") else {
            panic!()
        };
        assert_eq!(near.first().map(String::as_str), Some("advise"));
    }

    #[test]
    fn parts_run_up_to_the_next_key() {
        let words: Vec<String> = "tingle at laundry tap when in-use"
            .split(' ')
            .map(str::to_owned)
            .collect();
        let keys = ["at", "when", "with", "text"];
        assert_eq!(part(&words, "at", &keys).as_deref(), Some("laundry tap"));
        assert_eq!(part(&words, "when", &keys).as_deref(), Some("in-use"));
        assert_eq!(part(&words, "with", &keys), None);
    }
}
