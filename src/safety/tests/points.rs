//! Hold points: their order, what they want, when they count for another check, and when they open again.

use super::*;

fn dead_test() -> Check {
    check(
        "ins",
        "c1",
        r#"{"open": ["main"], "unplug": "all"}"#,
        insulation(&["c1.L", "c1.N"], &["c1.PE"]),
    )
}

fn lifted_test() -> Check {
    let text = r#"{"open": ["main"], "lift": ["c1.N@board"]}"#;
    check("ins-n", "c1", text, insulation(&["c1.N"], &["c1.PE"]))
}

fn stem(id: &str) -> String {
    match id.rsplit_once('-') {
        Some((stem, mark)) if mark.len() == 6 && mark.bytes().all(|b| b.is_ascii_hexdigit()) => {
            stem.to_owned()
        }
        _ => id.to_owned(),
    }
}

fn stems(ids: &[String]) -> Vec<String> {
    ids.iter().map(|id| stem(id)).collect()
}

#[test]
fn a_dead_test_stands_behind_the_whole_sequence() {
    let visit = Visit::new(house(), Vec::new());
    let open = stems(&visit.open(&dead_test()));
    assert_eq!(
        open,
        [
            "identify-sources",
            "prove-tester-before",
            "isolate",
            "prove-dead",
            "prove-tester-after"
        ]
    );
    let points = visit.points(&dead_test());
    let dead = points
        .iter()
        .find(|p| stem(&p.point) == "prove-dead")
        .expect("prove dead");
    let between: Vec<String> = dead.wants.iter().map(|w| w.between.join(" ")).collect();
    for want in [
        "c1.L c1.N",
        "c1.L c1.PE",
        "c1.N c1.PE",
        "c1.L soil",
        "c1.N soil",
        "c1.PE soil",
    ] {
        assert!(between.iter().any(|b| b == want), "{want} in {between:?}");
    }
    assert!(dead.wants.iter().all(|w| w.limit_volts == 6.0));
    assert!(dead.setup.lift.is_empty() && dead.setup.open == ["main"]);
}

#[test]
fn a_reading_waits_for_every_point() {
    let mut visit = Visit::new(house(), Vec::new());
    assert!(
        matches!(visit.may_read(&dead_test()), Err(ReadingStop::Open(points)) if points.len() == 5)
    );
    visit.do_all(&dead_test());
    assert_eq!(visit.may_read(&dead_test()), Ok(()));
}

#[test]
fn a_point_done_counts_for_the_next_check_in_the_same_state() {
    let mut visit = Visit::new(house(), Vec::new());
    visit.do_all(&dead_test());
    visit.read(&dead_test(), 1e6);
    let other = check(
        "r2",
        "c1",
        r#"{"open": ["main"], "unplug": "all"}"#,
        continuity("c1.N", "c1.PE"),
    );
    assert_eq!(visit.open(&other), Vec::<String>::new());
    let elsewhere = check(
        "r2",
        "c2",
        r#"{"open": ["main"], "unplug": "all"}"#,
        continuity("c2.N", "c2.PE"),
    );
    assert!(
        stems(&visit.open(&elsewhere)).contains(&"prove-dead".to_owned()),
        "another place is proved for itself"
    );
}

#[test]
fn opening_more_keeps_the_proof_and_closing_withdraws_it() {
    let mut visit = Visit::new(house(), Vec::new());
    visit.do_all(&dead_test());
    let more = check(
        "r2",
        "c1",
        r#"{"open": ["main", "rcd1"]}"#,
        continuity("c1.N", "c1.PE"),
    );
    assert_eq!(
        stems(&visit.open(&more)),
        ["isolate"],
        "only the further opening is left"
    );
    let live = check("v", "c1.p1", "{}", volts("c1.p1.L", "c1.p1.N"));
    visit.do_all(&live);
    visit.read(&live, 230.0);
    assert!(visit.state.proved_dead().is_empty());
    assert!(stems(&visit.open(&dead_test())).contains(&"prove-dead".to_owned()));
}

#[test]
fn a_lifted_neutral_is_proved_again_in_the_lifted_state() {
    let mut visit = Visit::new(house(), Vec::new());
    let points = visit.points(&lifted_test());
    let again = points
        .iter()
        .find(|p| stem(&p.point) == "prove-dead-again")
        .expect("a further point")
        .clone();
    assert_eq!(again.setup.lift, ["c1.N@board"]);
    let between: Vec<String> = again.wants.iter().map(|w| w.between.join(" ")).collect();
    for want in ["c1.N c1.PE", "c1.N soil", "c1.N msb.rcd1.N"] {
        assert!(between.iter().any(|b| b == want), "{want} in {between:?}");
    }
    for point in points.iter().take_while(|p| p.point != again.point) {
        visit.done(point);
    }
    assert!(visit.state.is_dead(&pair("c1.L", "soil")));
    visit.apply(&StateEvent::Arranged(&again.setup));
    assert!(
        visit.state.proved_dead().is_empty(),
        "lifting a neutral withdraws the proof"
    );
    assert_eq!(
        stems(&visit.open(&lifted_test())),
        ["prove-dead-again", "prove-tester-after-again"]
    );
    visit.do_all(&lifted_test());
    assert_eq!(visit.may_read(&lifted_test()), Ok(()));
}

#[test]
fn neutrals_lifted_together_are_proved_against_each_other() {
    let visit = Visit::new(house(), Vec::new());
    let text = r#"{"open": ["main"], "lift": ["c1.N@board", "c2.N@board"]}"#;
    let points = visit.points(&check("n-n", "c1+c2", text, continuity("c1.N", "c2.N")));
    let again = points
        .iter()
        .find(|p| stem(&p.point) == "prove-dead-again")
        .expect("a further point");
    assert!(
        again
            .wants
            .iter()
            .any(|w| w.between == pair("c1.N", "c2.N"))
    );
}

#[test]
fn what_was_lifted_is_refitted_before_the_next_state() {
    let mut visit = Visit::new(house(), Vec::new());
    let text = r#"{"open": ["main"], "lift": ["c1.N@board", "msb.link"]}"#;
    let link_out = check("ins", "msb", text, insulation(&["c1.N"], &["msb.PE"]));
    visit.do_all(&link_out);
    visit.read(&link_out, 1e6);
    let live = check("v", "c1.p1", "{}", volts("c1.p1.L", "c1.p1.N"));
    let points = visit.points(&live);
    let restore = points
        .iter()
        .find(|p| stem(&p.point) == "restore")
        .expect("refit");
    let text = restore.text.as_str();
    assert!(
        text.find("msb.link").expect("link") < text.find("c1.N@board").expect("neutral"),
        "{text}"
    );
    assert_eq!(
        (
            restore.setup.lift.len(),
            restore.setup.open.contains(&"main".to_owned())
        ),
        (0, true)
    );
    assert!(stems(&visit.open(&live)).contains(&"energise".to_owned()));
    visit.do_all(&live);
    assert!(visit.state.lifted().is_empty() && visit.state.open().is_empty());
}

#[test]
fn a_test_that_ends_energised_is_lifted_dead_with_the_main_open() {
    let mut visit = Visit::new(house(), Vec::new());
    let text = r#"{"open": ["c1.breaker"], "lift": ["c1.N@board"]}"#;
    let holds = check(
        "holds",
        "rcd1",
        text,
        Hookup::Holds {
            device: "rcd1".to_owned(),
        },
    );
    let points = visit.points(&holds);
    let isolate = points
        .iter()
        .find(|p| stem(&p.point) == "isolate")
        .expect("isolate");
    assert!(isolate.setup.open.contains(&"main".to_owned()));
    let listed: Vec<String> = points.iter().map(|p| p.point.clone()).collect();
    for id in &listed {
        let point = visit.points(&holds).into_iter().find(|p| &p.point == id);
        if let Some(point) = point.filter(|p| !p.done) {
            visit.done(&point);
        }
    }
    assert_eq!(
        visit.may_read(&holds),
        Ok(()),
        "the ids given out first led to the end"
    );
    assert_eq!(visit.state.open(), ["c1.breaker"]);
}

#[test]
fn ids_name_the_state() {
    let visit = Visit::new(house(), Vec::new());
    let id = |open: &str| {
        let c = check(
            "r2",
            "c1",
            &format!(r#"{{"open": [{open}]}}"#),
            continuity("c1.N", "c1.PE"),
        );
        visit
            .points(&c)
            .into_iter()
            .find(|p| stem(&p.point) == "prove-dead")
            .expect("prove dead")
            .point
    };
    assert_eq!(id(r#""main", "rcd1""#), id(r#""rcd1", "main""#));
    assert_ne!(id(r#""main""#), id(r#""main", "rcd1""#));
}

#[test]
fn proving_out_of_order_does_not_count() {
    let mut visit = Visit::new(house(), Vec::new());
    let points = visit.points(&dead_test());
    let named = |stem_wanted: &str| {
        points
            .iter()
            .find(|p| stem(&p.point) == stem_wanted)
            .expect("point")
            .clone()
    };
    visit.done(&named("prove-tester-after"));
    visit.done(&named("prove-dead"));
    visit.done(&named("identify-sources"));
    visit.done(&named("isolate"));
    visit.done(&named("prove-tester-before"));
    let open = stems(&visit.open(&dead_test()));
    assert!(open.contains(&"prove-tester-after".to_owned()), "{open:?}");
}

#[test]
fn a_reading_over_its_limit_is_not_dead() {
    let visit = Visit::new(house(), Vec::new());
    let points = visit.points(&dead_test());
    let dead = points
        .iter()
        .find(|p| !p.wants.is_empty())
        .expect("prove dead");
    let mut volts: BTreeMap<String, f64> =
        dead.wants.iter().map(|w| (w.name.clone(), 0.1)).collect();
    assert_eq!(State::judge(dead, &volts), Ok(()));
    let name = dead.wants[2].name.clone();
    volts.insert(name.clone(), 117.0);
    assert_eq!(
        State::judge(dead, &volts).map_err(|e| (e.name, e.volts)),
        Err((name.clone(), 117.0))
    );
    volts.insert(name.clone(), f64::NAN);
    assert!(State::judge(dead, &volts).is_err());
    volts.remove(&name);
    assert!(
        State::judge(dead, &volts).is_err(),
        "a missing reading proves nothing"
    );
}

#[test]
fn what_cannot_be_done_holds_the_check() {
    let mut visit = Visit::new(house(), Vec::new());
    let isolate = visit
        .points(&dead_test())
        .into_iter()
        .find(|p| stem(&p.point) == "isolate")
        .expect("isolate");
    visit.apply(&StateEvent::PointCannot {
        point: &isolate.point,
        why: "no lock",
        entry: 9,
    });
    assert!(matches!(visit.verdict(&dead_test()), Verdict::Held { why, .. } if why == "no lock"));
    visit.apply(&StateEvent::Retracted(9));
    assert!(matches!(visit.verdict(&dead_test()), Verdict::Cleared(_)));
}
