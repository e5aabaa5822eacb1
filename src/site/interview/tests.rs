//! Interviews that end in a file that loads, and answers that are refused with a cure.

use proptest::prelude::*;

use super::*;
use crate::site::{Phase, load_value};

fn run(lines: &[&str]) -> Interview {
    let mut interview = Interview::new(Known::contract());
    for line in lines {
        let asked = interview.question().map(|q| q.text);
        interview
            .answer(line)
            .unwrap_or_else(|e| panic!("{asked:?} {line}: {e}"));
    }
    interview
}

const HOUSE: [&str; 21] = [
    "Wombat Flat",
    "au-nz",
    "1",
    "TN-C-S",
    "22 m",
    "16",
    "no",
    "63",
    "no",
    "yes",
    "2",
    "kitchen sockets, 20, 1, 3, 15",
    "kettle, fridge@2",
    "lights, 10, 2, 4, 22",
    "",
    "hot water, 20, none, 1, 9",
    "hot water",
    "",
    "pump shed, 40, 32, 10",
    "yes",
    "1",
];

#[test]
fn a_house_in_a_few_lines() {
    let mut interview = run(&HOUSE);
    for line in ["pump, 16, 1, 1, 6", "pump", "", ""] {
        interview.answer(line).unwrap();
    }
    assert_eq!(interview.question(), None);
    let (site, warnings) = load_value(interview.document(), &Known::contract()).unwrap();
    assert!(warnings.is_empty(), "{warnings:?}");
    assert_eq!(site.boards[0].circuits.len(), 3);
    assert_eq!(site.boards[0].circuits[0].points[2].metres, 15.0);
    assert_eq!(site.boards[0].circuits[1].rcd.as_deref(), Some("rcd2"));
    assert_eq!(site.boards[0].circuits[2].rcd, None);
    assert!(site.boards[1].earthing.as_ref().is_some_and(|e| e.link));
    let heater = site
        .equipment
        .iter()
        .find(|e| e.kind == "storage water heater")
        .unwrap();
    assert!(!heater.plug);
    assert_eq!(heater.touches, [0]);
    assert!(interview.answer("more").is_err());
}

#[test]
fn nothing_known_still_loads() {
    let mut interview = Interview::new(Known::contract());
    for _ in 0..12 {
        interview.answer("?").unwrap();
    }
    while interview.question().is_some() {
        interview.answer("").unwrap();
    }
    let (site, _) = load_value(interview.document(), &Known::contract()).unwrap();
    assert_eq!(site.points().count(), 1);
}

#[test]
fn three_phases() {
    let mut lines = vec![
        "Shop", "iec", "3", "TN-S", "?", "?", "no", "100", "yes", "no", "30, 100S",
    ];
    lines.extend([
        "sockets, 16, 1, 4, 20, L2",
        "",
        "more sockets, 16, 1, 4, 20, L3",
        "",
        "oven, 32, 2, 1, 12, 3",
        "oven",
        "",
        "",
    ]);
    let interview = run(&lines);
    let (site, _) = load_value(interview.document(), &Known::contract()).unwrap();
    assert_eq!(site.boards[0].mains[0].poles, 4);
    assert_eq!(site.boards[0].circuits[2].phase, Phase::Three);
    assert_eq!(
        (site.boards[0].rcds[0].poles, site.boards[0].rcds[1].delayed),
        (4, true)
    );
}

#[test]
fn a_bad_answer_leaves_the_question() {
    let mut interview = run(&["x"]);
    let asked = interview.question();
    assert!(
        interview
            .answer("klingon")
            .unwrap_err()
            .hint
            .contains("iec")
    );
    assert_eq!(interview.question(), asked);
    let mut interview = run(&HOUSE[..11]);
    assert!(
        interview
            .answer("kitchen, 20, 5, 3, 9")
            .unwrap_err()
            .hint
            .contains("1 to 2")
    );
    assert!(
        interview
            .answer("kitchen, -20")
            .unwrap_err()
            .hint
            .contains("A")
    );
    assert!(
        interview
            .answer("kitchen, twenty")
            .unwrap_err()
            .message
            .contains("not a number")
    );
    interview.answer("kitchen, 20, 1, 2").unwrap();
    assert!(
        interview
            .answer("kettel")
            .unwrap_err()
            .hint
            .contains("`kettle`")
    );
    assert!(
        interview
            .answer("kettle@3")
            .unwrap_err()
            .hint
            .contains("1 to 2")
    );
    interview.answer("other bread slicer").unwrap();
    assert!(interview.document().to_string().contains("bread slicer"));
}

#[test]
fn back_takes_the_last_answer_away() {
    let mut interview = run(&HOUSE[..13]);
    let before = run(&HOUSE[..12]);
    assert!(interview.back());
    assert_eq!(interview.question(), before.question());
    assert_eq!(interview.document(), before.document());
    assert!(!Interview::new(Known::contract()).back());
}

proptest! {
    #[test]
    fn whatever_is_typed_the_file_loads(lines in proptest::collection::vec("[a-z0-9,@?. -]{0,24}", 0..60)) {
        let mut interview = Interview::new(Known::contract());
        for line in &lines {
            drop(interview.answer(line));
        }
        // Enter alone leads to the end from everywhere.
        for _ in 0..20 {
            drop(interview.answer(""));
        }
        prop_assert!(interview.question().is_none());
        let loaded = load_value(interview.document(), &Known::contract());
        prop_assert!(loaded.is_ok(), "{:?}", loaded.err());
    }
}
