//! Proofs of conditions: gained by readings on the right side, withdrawn by what touches their place.

use super::*;

fn earth() -> Check {
    let mut c = check(
        "r2",
        "c1.p1",
        r#"{"open": ["main"]}"#,
        continuity("msb.PE", "c1.p1.PE"),
    );
    c.proves = vec![proof("earth continuity c1.p1", 1.0)];
    c
}

fn supply() -> Check {
    let mut c = check("stage", "msb", "{}", volts("msb.PE", "soil"));
    c.proves = vec![proof("supply neutral", 6.0)];
    c
}

fn proved() -> Visit {
    let mut visit = Visit::new(house(), vec![earth(), supply()]);
    visit.read(&supply(), 0.3);
    visit.read(&earth(), 0.2);
    assert!(visit.state.has("supply neutral") && visit.state.has("earth continuity c1.p1"));
    visit
}

#[test]
fn a_bad_reading_takes_the_proof_back() {
    let mut visit = proved();
    visit.read(&earth(), 3.0);
    assert!(!visit.state.has("earth continuity c1.p1"));
    visit.apply(&StateEvent::Reading {
        check: &earth(),
        value: &ParsedValue::Under { under: 0.05 },
        entry: 90,
    });
    assert!(visit.state.has("earth continuity c1.p1"));
    visit.apply(&StateEvent::Reading {
        check: &earth(),
        value: &ParsedValue::Over { over: 0.9 },
        entry: 91,
    });
    assert!(
        !visit.state.has("earth continuity c1.p1"),
        "over 0.9 may be anything"
    );
}

#[test]
fn a_repair_or_a_lift_touches_the_proofs_of_its_place() {
    let mut visit = proved();
    visit.apply(&StateEvent::Repaired {
        places: &["c2.p1".to_owned()],
        by_network: false,
    });
    assert!(visit.state.has("earth continuity c1.p1") && visit.state.has("supply neutral"));
    visit.apply(&StateEvent::Arranged(&setup(
        r#"{"open": ["main"], "lift": ["c1.PE@board"]}"#,
    )));
    assert!(!visit.state.has("earth continuity c1.p1") && visit.state.has("supply neutral"));

    let mut visit = proved();
    visit.apply(&StateEvent::Repaired {
        places: &["c1".to_owned()],
        by_network: false,
    });
    assert!(!visit.state.has("earth continuity c1.p1"));

    let mut visit = proved();
    visit.apply(&StateEvent::Arranged(&setup(
        r#"{"open": ["main"], "lift": ["msb.link"]}"#,
    )));
    assert!(!visit.state.has("supply neutral") && visit.state.has("earth continuity c1.p1"));
}

#[test]
fn resuming_voids_proofs_of_dead_and_of_the_supply() {
    let mut visit = proved();
    let dead = check(
        "ins",
        "c1",
        r#"{"open": ["main"]}"#,
        insulation(&["c1.L"], &["c1.PE"]),
    );
    visit.do_all(&dead);
    assert!(!visit.state.proved_dead().is_empty());
    visit.apply(&StateEvent::Resumed);
    assert!(visit.state.proved_dead().is_empty() && !visit.state.has("supply neutral"));
    assert!(visit.state.has("earth continuity c1.p1"));
    assert!(visit.open(&dead).len() >= 5);
}

#[test]
fn retracting_an_entry_takes_what_it_proved() {
    let mut visit = proved();
    let entry = visit
        .state
        .proofs()
        .find(|(what, _)| *what == "supply neutral")
        .map(|(_, entry)| entry);
    visit.apply(&StateEvent::Retracted(entry.expect("an entry")));
    assert!(!visit.state.has("supply neutral") && visit.state.has("earth continuity c1.p1"));
}

#[test]
fn a_device_found_tripped_counts_as_open_until_it_holds() {
    use crate::quantity::Word;
    let mut visit = Visit::new(house(), Vec::new());
    let holds = check(
        "holds",
        "rcd1",
        "{}",
        Hookup::Holds {
            device: "rcd1".to_owned(),
        },
    );
    let word = |word| ParsedValue::Word { word };
    visit.apply(&StateEvent::Reading {
        check: &holds,
        value: &word(Word::Trips),
        entry: 1,
    });
    assert_eq!(visit.state.open(), ["rcd1"]);
    visit.apply(&StateEvent::Reading {
        check: &holds,
        value: &word(Word::Holds),
        entry: 2,
    });
    assert!(visit.state.open().is_empty());
}

#[test]
fn a_clamp_in_the_opened_state_frees_the_main_earth() {
    let clamp = check(
        "clamp",
        "msb",
        r#"{"open": ["main"]}"#,
        amps("msb.main-earth"),
    );
    let lift = check(
        "electrode",
        "msb",
        r#"{"open": ["main"], "lift": ["msb.main-earth"]}"#,
        continuity("msb.PE", "electrode"),
    );
    let mut visit = Visit::new(house(), vec![clamp.clone(), lift.clone()]);
    let waits = |visit: &Visit| {
        visit
            .points(&lift)
            .into_iter()
            .find(|p| p.test.is_some())
            .map(|p| p.done)
    };
    assert_eq!(waits(&visit), Some(false));
    visit.read(&clamp, 0.8);
    assert_eq!(waits(&visit), Some(false), "0.8 A flows: it stays");
    visit.read(&clamp, 0.012);
    assert_eq!(waits(&visit), Some(true));
    let limit = visit
        .points(&lift)
        .iter()
        .flat_map(|p| p.wants.clone())
        .find(|w| w.between == pair("msb.PE", "soil"));
    assert_eq!(limit.map(|w| w.limit_volts), Some(2.0));
    visit.apply(&StateEvent::Arranged(&Setup::default()));
    assert_eq!(waits(&visit), Some(false), "the state was left");
}
