//! The prompt as a person types at it, on a small site.

use serde_json::json;

use super::super::text::{Paper, Style, columns};
use super::*;

fn desk() -> Desk {
    let site = json!({
        "schema": "straypath-site/1", "name": "Two points", "words": "au-nz",
        "supply": {"system": "TN-C-S", "service": {"metres": 20, "mm2": 16}},
        "earthing": {"board": "msb", "link": true, "main_earth": {"metres": 4, "mm2": 6},
            "bonds": [{"id": "water", "name": "copper water pipe", "metres": 9, "mm2": 4}]},
        "boards": [{"id": "msb", "name": "main switchboard", "fed_from": "service",
            "main_switch": {"id": "main", "amps": 63, "poles": 1}, "rcds": [{"id": "rcd1", "ma": 30}],
            "circuits": [{"id": "c1", "name": "kitchen sockets", "rcd": "rcd1", "phase": "L1",
                "breaker": {"curve": "C", "amps": 20}, "cable": {"mm2": 2.5},
                "points": [{"id": "p1", "name": "bench", "metres": 9}, {"id": "p2", "name": "fridge recess", "metres": 14}]}]}],
        "equipment": [{"id": "kettle", "kind": "kettle", "at": "c1.p1", "watts": 2200}]
    });
    let knowledge = Knowledge::embedded().unwrap();
    let kit = ["multimeter", "insulation-tester", "proving-unit"]
        .map(str::to_owned)
        .to_vec();
    let ask = Open {
        site: Some(site),
        path: None,
        kit: Some(kit),
        seed: Some(1),
    };
    let clock = Clock::stepping(1_767_261_600_000, 30_000);
    Desk::new(
        Session::open(&knowledge, clock, Log::in_memory(), &ask)
            .unwrap()
            .0,
        None,
    )
}

/// What a visit of these lines looks like.
fn visit(desk: &mut Desk, lines: &str, width: usize) -> String {
    let mut all = String::new();
    for line in lines.lines() {
        all += &format!(
            "{}{}\n",
            desk.prompt(),
            super::super::text::Text::from(line).bare()
        );
        all += &desk.take_line(line).render(width, &Style::plain());
    }
    all
}

#[test]
fn the_first_screen_at_60_and_at_100_columns() {
    let mut desk = desk();
    let page = desk.begin();
    let narrow = page.render(60, &Style::plain());
    assert!(
        narrow.starts_with(
            "LIVE everything   OPEN nothing   DEAD nothing\nLIFTED nothing   1 min\n\n\
             NEXT    Say what is wrong: symptom KIND at PLACE, with one\n        of these kinds:\n\
             \u{20}       rcd-trips               the RCD trips\n"
        ),
        "{narrow}"
    );
    let wide = page.render(100, &Style::plain());
    assert!(
        wide.starts_with(
            "LIVE everything   OPEN nothing   DEAD nothing   LIFTED nothing   1 min\n\n\
             NEXT    Say what is wrong: symptom KIND at PLACE, with one of these kinds:\n"
        ),
        "{wide}"
    );
}

#[test]
fn danger_comes_first_and_stands_until_it_is_done() {
    let mut desk = desk();
    let text = visit(
        &mut desk,
        "symptom tingle at copper water pipe when in-use\ndone first\nstate\n",
        60,
    );
    let first = text.find("FIRST   Keep everyone off").expect(&text);
    let next = text.find("NEXT    ").expect(&text);
    assert!(first < next, "{text}");
    assert!(text.contains("When that is done: done first"), "{text}");
    assert!(text.contains("Noted (entry"), "{text}");
    assert!(
        desk.first()
            .render(80, &Style::plain())
            .contains("FIRST   done: keep off metal")
    );
}

#[test]
fn a_bar_that_stands_above_its_limit_stops_everything() {
    let mut desk = desk();
    let text = visit(
        &mut desk,
        "symptom tingle at water\ndone first\ndone 2\ndone 3\n47\nsure\n",
        80,
    );
    assert!(
        text.contains("STOP    47 V from the earth bar to a stake"),
        "{text}"
    );
    assert!(text.contains("withdraw"), "{text}");
}

#[test]
fn every_line_fits_and_nothing_is_called_safe() {
    for width in [60, 100] {
        let lines = "symptom rcd-trips at rcd1 when now-and-then\nadvise --more\nwhy\nranking\nevidence\npath\nplaces\nkit\n\
                     state\nlog\ntests insulation\nhelp\nhelp done\n";
        let text = visit(&mut desk(), lines, width);
        for line in text.lines().filter(|line| !line.contains(" > ")) {
            let wide = super::super::text::width_of(&line.into());
            assert!(wide <= width, "{wide} columns: {line}");
        }
        let words = text.to_lowercase();
        assert!(
            !words.contains("is safe") && !words.contains("safe to"),
            "{text}"
        );
    }
}

#[test]
fn a_reading_waits_for_its_hold_points() {
    let mut desk = desk();
    let text = visit(&mut desk, "symptom tingle at water\n1\n", 80);
    assert!(
        text.contains("Not yet: the reading was not taken; hold points"),
        "{text}"
    );
    assert!(text.contains("open > 1\n"), "{text}");
    assert!(
        !desk
            .session()
            .records()
            .iter()
            .any(|r| matches!(r.event, crate::session::Event::Reading(_)))
    );
}

#[test]
fn prove_dead_readings_are_asked_for_and_never_filled_in() {
    let mut desk = desk();
    let check = desk.session().tests().tests.into_iter().find(|t| {
        t.available
            && !t.energised
            && t.hookup.quantity() == "insulation"
            && t.setup.lift.is_empty()
    });
    let check = check.expect("a dead test that lifts nothing");
    visit(
        &mut desk,
        &format!("take {} {}\n", check.test, check.at),
        80,
    );
    let hand = desk.hand.clone().expect("a test in hand");
    let at = hand
        .points
        .iter()
        .position(|point| point.wants.len() > 1)
        .expect("a prove-dead point");
    let before: String = (1..=at).map(|n| format!("done {n}\n")).collect();
    visit(&mut desk, &before, 80);
    let wants = hand.points[at].wants.len();
    // Too few at once, one given up half-way, a word for a voltage: the point stays open.
    let text = visit(
        &mut desk,
        &format!("done {0} 0.0\ndone {0}\n0.1\n\n", at + 1),
        80,
    );
    assert!(
        text.contains("readings, and 1 came") && text.contains("stays open"),
        "{text}"
    );
    let text = visit(&mut desk, &format!("done {}\ndead\n\n", at + 1), 80);
    assert!(text.contains("`dead` is no voltage"), "{text}");
    assert!(!desk.hand.as_ref().expect("in hand").points[at].done);
    let text = visit(
        &mut desk,
        &format!("done {}\n{}", at + 1, "0.1\n".repeat(wants)),
        80,
    );
    assert!(text.contains("Dead: 0.1 V "), "{text}");
    assert!(
        desk.hand.as_ref().expect("in hand").points[at].done,
        "{text}"
    );
    assert!(!desk.session().safety().proved_dead().is_empty());
}

#[test]
fn bad_input_is_answered_with_a_way_on() {
    let mut desk = desk();
    let text = visit(
        &mut desk,
        "symptm tingle\nsymptom tingel at water\nsymptom rcd-trips at rcd9\nsymptom rcd-trips rcd1\nread\ntake x y\nretract 99\n\
         retract x\nclose home\n47\nsure\nrepair\nranking many\nrecheck 1\nnote\nhelp me\n\u{1b}[31mred\nhold 3\ncannot\nevidence 9999\n",
        80,
    );
    for said in [
        "Type symptom",
        "`tingle`",
        "`rcd1`",
        "stands where `at`",
        "read TEST AT VALUE",
        "there is no entry 99",
        "close as repaired",
        "No test is in hand",
        "No reading was questioned",
        "is no number of causes",
        "no command `me`",
        "The note is empty",
    ] {
        assert!(
            text.to_lowercase().contains(&said.to_lowercase()),
            "{said} in {text}"
        );
    }
    assert!(!text.contains('\u{1b}'), "{text}");
    assert_eq!(desk.session().records().len(), 1, "nothing was recorded");
}

#[test]
fn what_cannot_be_done_costs_nothing_and_comes_back() {
    let mut desk = desk();
    let text = visit(
        &mut desk,
        "symptom rcd-trips at rcd1\ncannot no access\n",
        80,
    );
    assert!(text.contains("Noted; it costs nothing."), "{text}");
    let (first, then) = (
        desk.session().records()[2].event.clone(),
        desk.hand.clone().expect("another test"),
    );
    let crate::session::Event::Advised(advised) = first else {
        panic!("{first:?}")
    };
    assert!(advised.advice[0].test != then.test.test || advised.advice[0].at != then.test.at);
}

#[test]
fn leaving_says_where_the_visit_is() {
    let mut paper = Paper::new(Vec::new(), 80, Style::plain());
    serve(
        &mut desk(),
        &b"note hello\nquit\nnote more\n"[..],
        &mut paper,
    )
    .unwrap();
    let text = String::from_utf8(paper.into_inner()).unwrap();
    assert!(text.ends_with("The visit was not kept.\n"), "{text}");
    assert!(!text.contains("note more"), "nothing is read behind `quit`");
    assert_eq!(columns(None, None), 80);
}

#[test]
fn completion_knows_commands_kinds_places_and_tests() {
    let words = complete::Vocabulary::of(&desk());
    assert_eq!(words.next("symp"), ["symptom"]);
    assert_eq!(words.next("symptom ting"), ["tingle"]);
    assert_eq!(words.next("symptom tingle at wat"), ["water"]);
    assert!(words.next("symptom tingle ").contains(&"when".to_owned()));
    let tests = words.next("take ");
    let test = tests.first().expect("tests");
    assert!(!words.next(&format!("take {test} ")).is_empty());
}
