//! Each rule of trade.md D.3 and D.4: refused in its forbidden state, allowed in the right one.

use super::*;

fn house_visit() -> Visit {
    Visit::new(house(), Vec::new())
}

#[test]
fn main_earth_and_link_stay_while_a_supply_is_on() {
    let visit = house_visit();
    for end in ["msb.main-earth", "msb.link", "water.bond"] {
        let lift = |open: &str| {
            check(
                "ins",
                "msb",
                &format!(r#"{{"open": [{open}], "lift": ["{end}"]}}"#),
                continuity("msb.PE", "electrode"),
            )
        };
        assert!(visit.refused(&lift("")), "{end} with the supply on");
        assert!(
            visit.refused(&lift(r#""rcd1", "c3.breaker""#)),
            "{end} with one RCD still fed"
        );
        assert!(
            !visit.refused(&lift(r#""main""#)),
            "{end} with the main open"
        );
    }
}

#[test]
fn every_tariff_is_open_before_the_link_is_parted() {
    let text = r#"{"schema": "straypath-site/1", "supply": {"system": "TN-C-S"},
        "earthing": {"board": "msb", "main_earth": {"metres": 4, "mm2": 6}},
        "boards": [{"id": "msb", "fed_from": "service",
            "main_switches": [{"id": "main", "amps": 63, "poles": 1}, {"id": "night", "amps": 32, "poles": 1, "tariff": "night"}],
            "circuits": [{"id": "c1", "name": "a", "main": "main", "breaker": {"curve": "C", "amps": 20}, "cable": {"mm2": 2.5},
                "points": [{"id": "p1", "metres": 9}]},
              {"id": "c2", "name": "b", "main": "night", "breaker": {"curve": "C", "amps": 20}, "cable": {"mm2": 2.5},
                "points": [{"id": "p1", "metres": 9}]}]}]}"#;
    let visit = Visit::new(site(text), Vec::new());
    let lift = |open: &str| {
        check(
            "x",
            "msb",
            &format!(r#"{{"open": [{open}], "lift": ["msb.link"]}}"#),
            insulation(&["msb.N"], &["msb.PE"]),
        )
    };
    assert!(visit.refused(&lift(r#""main""#)));
    assert!(!visit.refused(&lift(r#""main", "night""#)));
}

#[test]
fn a_neutral_is_not_parted_before_its_lines() {
    let visit = house_visit();
    let lift = |open: &str| {
        let text = format!(r#"{{"open": [{open}], "lift": ["c1.N@board"]}}"#);
        check(
            "holds",
            "rcd1",
            &text,
            Hookup::Holds {
                device: "rcd1".to_owned(),
            },
        )
    };
    assert!(visit.refused(&lift("")));
    assert!(visit.refused(&lift(r#""c2.breaker""#)));
    assert!(!visit.refused(&lift(r#""c1.breaker""#)));
}

#[test]
fn the_incoming_neutral_waits_for_the_fuse_and_every_main() {
    let mut visit = house_visit();
    let lift = |open: &str| {
        let text = format!(r#"{{"open": [{open}], "lift": ["msb.main-neutral"]}}"#);
        check("x", "msb", &text, insulation(&["msb.N"], &["msb.PE"]))
    };
    assert!(visit.refused(&lift(r#""main""#)));
    assert!(visit.refused(&lift(r#""service.fuse""#)));
    assert!(!visit.refused(&lift(r#""main", "service.fuse""#)));
    visit.site.may_isolate_supply = false;
    assert!(
        visit.refused(&lift(r#""main", "service.fuse""#)),
        "the fuse is not theirs to open"
    );
}

fn staged() -> Check {
    let load = r#"{"load": [{"at": "msb", "watts": 2000}]}"#;
    let mut stage = check("stage", "msb", load, volts("msb.PE", "soil"));
    stage.proves = vec![proof("supply neutral", 6.0)];
    stage.staged = true;
    stage
}

#[test]
fn loads_and_loops_wait_for_the_supply_neutral() {
    let mut visit = Visit::new(house(), vec![staged()]);
    let load = |watts: u32| {
        check(
            "load",
            "c1.p1",
            &format!(r#"{{"load": [{{"at": "c1.p1", "watts": {watts}}}]}}"#),
            volts("c1.p1.L", "c1.p1.N"),
        )
    };
    let waits =
        |visit: &Visit, c: &Check| visit.open(c).contains(&"proof-supply-neutral".to_owned());
    assert!(waits(&visit, &load(100)));
    assert!(!waits(&visit, &load(25)));
    assert!(waits(
        &visit,
        &check(
            "kettle",
            "c1.p1",
            r#"{"on": ["kettle"]}"#,
            volts("c1.p1.L", "c1.p1.N")
        )
    ));
    assert!(waits(
        &visit,
        &check("loop", "c1.p1", "{}", loop_test("c1.p1.L", "c1.p1.N", None))
    ));
    assert!(!waits(
        &visit,
        &check(
            "loop",
            "c1.p1",
            "{}",
            loop_test("c1.p1.L", "c1.p1.N", Some(0.015))
        )
    ));
    assert!(!waits(&visit, &staged()), "a stage of the proof itself");
    visit.read(&staged(), 9.0);
    assert!(waits(&visit, &load(100)), "9 V is no proof");
    visit.read(&staged(), 0.4);
    assert!(!waits(&visit, &load(100)));
}

#[test]
fn a_proof_that_nothing_gives_refuses() {
    let visit = house_visit();
    assert!(visit.refused(&check(
        "loop",
        "c1.p1",
        "{}",
        loop_test("c1.p1.L", "c1.p1.N", None)
    )));
}

#[test]
fn tests_through_the_protective_conductor_wait_for_its_continuity() {
    let mut earth = check(
        "r2",
        "c1.p1",
        r#"{"open": ["main"]}"#,
        continuity("msb.PE", "c1.p1.PE"),
    );
    earth.proves = vec![proof("earth continuity c1.p1", 1.0)];
    let mut visit = Visit::new(house(), vec![earth.clone(), staged()]);
    let through = [
        check(
            "loop",
            "c1.p1",
            "{}",
            loop_test("c1.p1.L", "c1.p1.PE", Some(0.015)),
        ),
        check("low", "c1.p1", "{}", low_z("c1.p1.L", "c1.p1.PE")),
        check(
            "rcd",
            "c1.p1",
            "{}",
            Hookup::TripTime {
                rcd: "rcd1".to_owned(),
                at: Some("c1.p1".to_owned()),
                multiple: 1.0,
                half_cycle: None,
            },
        ),
    ];
    for c in &through {
        let point = visit
            .points(c)
            .into_iter()
            .find(|p| p.point == "proof-earth-continuity-c1.p1")
            .expect("its proof");
        assert_eq!(
            (point.test.as_deref(), point.at.as_deref(), point.done),
            (Some("r2"), Some("c1.p1"), false)
        );
    }
    visit.read(&earth, 0.2);
    assert!(
        through
            .iter()
            .all(|c| visit.points(c).iter().all(|p| p.test.is_none() || p.done))
    );
    assert!(!visit.refused(&check("high", "c1.p1", "{}", volts("c1.p1.L", "c1.p1.PE"))));
}

#[test]
fn insulation_between_line_and_neutral_wants_bare_conductors() {
    let visit = house_visit();
    let test = |unplug: &str| {
        check(
            "ins",
            "c1",
            &format!(r#"{{"open": ["main"]{unplug}}}"#),
            insulation(&["c1.L"], &["c1.N"]),
        )
    };
    assert!(visit.refused(&test("")));
    assert!(!visit.refused(&test(r#", "unplug": "all""#)));
    let joined = check(
        "ins",
        "c1",
        r#"{"open": ["main"]}"#,
        insulation(&["c1.L", "c1.N"], &["c1.PE"]),
    );
    assert!(!visit.refused(&joined));
}

#[test]
fn dead_tests_are_for_dead_conductors() {
    let visit = house_visit();
    assert!(visit.refused(&check(
        "ins",
        "c1",
        "{}",
        insulation(&["c1.L", "c1.N"], &["c1.PE"])
    )));
    assert!(!visit.refused(&check(
        "ins",
        "c1",
        r#"{"open": ["c1.breaker"]}"#,
        insulation(&["c1.L"], &["c1.PE"])
    )));
}

#[test]
fn what_can_backfeed_is_off_first() {
    let mut visit = house_visit();
    let text = r#"{"schema": "straypath-site/1", "supply": {"system": "TN-C-S"},
        "boards": [{"id": "msb", "fed_from": "service", "main_switch": {"id": "main", "amps": 63, "poles": 2},
            "circuits": [{"id": "c1", "name": "a", "breaker": {"curve": "C", "amps": 20}, "cable": {"mm2": 2.5},
                "points": [{"id": "p1", "metres": 9}]}]}],
        "sources": [{"id": "bat", "kind": "battery", "at": "msb", "watts": 5000, "backup": true}]}"#;
    visit.site = site(text);
    let test = |sources: &str| {
        check(
            "ins",
            "c1",
            &format!(r#"{{"open": ["main"]{sources}}}"#),
            insulation(&["c1.L"], &["c1.PE"]),
        )
    };
    assert!(visit.refused(&test("")));
    assert!(visit.refused(&test(r#", "sources": {"bat": "backup"}"#)));
    assert!(!visit.refused(&test(r#", "sources": {"bat": "off"}"#)));
}

#[test]
fn a_tingle_is_met_with_the_stake_first_and_its_volts_decide() {
    let stake = check("stake", "msb", "{}", volts("msb.PE", "soil"));
    let point = check("volts", "c1.p1", "{}", volts("c1.p1.L", "c1.p1.N"));
    let small = check(
        "loop",
        "c1.p1",
        "{}",
        loop_test("c1.p1.L", "c1.p1.N", Some(0.015)),
    );
    let dead = check(
        "ins",
        "c1",
        r#"{"open": ["main"]}"#,
        insulation(&["c1.L"], &["c1.PE"]),
    );
    let fuse = check(
        "ins",
        "c1",
        r#"{"open": ["main", "service.fuse"]}"#,
        insulation(&["c1.L"], &["c1.PE"]),
    );
    let mut visit = Visit::new(house(), vec![stake.clone()]);
    visit.apply(&StateEvent::Standing);
    assert!([&point, &small, &dead].iter().all(|c| visit.refused(c)));
    assert!(!visit.refused(&stake) && !visit.refused(&fuse));
    assert_eq!(
        visit.points(&stake).first().map(|p| p.point.as_str()),
        Some("make-safe")
    );

    visit.read(&check("ne", "msb", "{}", volts("msb.N", "msb.PE")), 0.0);
    assert!(
        visit.refused(&point),
        "0 V between neutral and earth clears nothing"
    );

    visit.read(&stake, 12.0);
    assert!(
        visit.refused(&small) && !visit.refused(&point),
        "6 to 25 V: nothing that draws"
    );
    visit.read(&stake, 47.0);
    assert!(
        [&point, &small, &dead].iter().all(|c| visit.refused(c)),
        "above 25 V: withdraw"
    );
    assert!(!visit.refused(&fuse), "dead upstream");
    visit.apply(&StateEvent::Repaired {
        places: &[],
        by_network: true,
    });
    assert!(visit.refused(&point), "read the stake anew after a repair");
    visit.read(&stake, 47.0);
    assert!(
        visit.refused(&point) && !visit.refused(&dead),
        "network seen to: the main may be opened"
    );
    visit.read(&stake, 0.5);
    assert!(!visit.refused(&point));
}
