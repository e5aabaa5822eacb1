//! Faults on a small house with two RCDs, a submain shed and a three-phase variant.

use super::*;
use crate::knowledge::{FaultKind, Knowledge};
use crate::network::{Edit, Network};
use crate::site::{Known, Site, load_str};

const HOUSE: &str = r#"{
  "schema": "straypath-site/1", "name": "small (invented)", "words": "au-nz",
  "supply": {"phases": 1, "system": "TN-C-S", "service": {"metres": 20, "mm2": 16}},
  "earthing": {"board": "msb", "main_earth": {"metres": 4, "mm2": 6},
    "bonds": [{"id": "water", "name": "water pipe", "metres": 9, "mm2": 4}]},
  "boards": [
    {"id": "msb", "name": "main switchboard", "fed_from": "service",
     "main_switch": {"id": "main", "amps": 63, "poles": 1},
     "rcds": [{"id": "rcd1", "ma": 30}, {"id": "rcd2", "ma": 30}],
     "circuits": [
      {"id": "c1", "name": "kitchen sockets", "rcd": "rcd1", "breaker": {"curve": "C", "amps": 20}, "cable": {"mm2": 2.5},
       "points": [{"id": "p1", "name": "bench", "metres": 9}, {"id": "p2", "name": "fridge recess", "metres": 14}]},
      {"id": "c2", "name": "bedroom sockets", "rcd": "rcd2", "breaker": {"curve": "C", "amps": 20}, "cable": {"mm2": 2.5},
       "points": [{"id": "p1", "name": "bed", "metres": 15}]},
      {"id": "c3", "name": "hot water", "breaker": {"curve": "C", "amps": 25}, "cable": {"mm2": 4},
       "points": [{"id": "p1", "name": "heater", "metres": 12, "kind": "fixed"}]}]},
    {"id": "shed", "name": "shed", "fed_from": {"board": "msb", "breaker": {"curve": "C", "amps": 32},
      "cable": {"mm2": 10}, "metres": 40, "link": true, "main_earth": {"metres": 2, "mm2": 6}},
     "main_switch": {"id": "shedmain", "amps": 40, "poles": 1},
     "circuits": [{"id": "s1", "name": "pump", "breaker": {"curve": "C", "amps": 16}, "cable": {"mm2": 2.5},
       "points": [{"id": "p1", "name": "pump", "metres": 5, "kind": "fixed"}]}]}],
  "equipment": [{"id": "kettle", "kind": "kettle", "at": "c1.p1"}, {"id": "hws", "kind": "storage water heater", "at": "c3.p1", "plug": false}]
}"#;

fn kind(text: &str) -> FaultKind {
    let common = r#"
        marker = "guess"
        source = "made for a test"
        complaints = {}
        [repair]
        group = "{at}"
        text = "Repair at {at-name}."
        minutes = 10
        action = "repair"
    "#;
    toml::from_str(&format!("{text}\n{common}")).unwrap()
}

const OHMS: &str = r#"value = { unit = "ohm", marker = "guess", source = "test", prior = { dist = "lognormal", median = 3, gsd = 4 } }"#;

fn knowledge() -> Knowledge {
    let mut knowledge = Knowledge::embedded().unwrap();
    let rows = [
        r#"kind = "pe-open"
           name = "{earth} open at {at-name}"
           at = ["point", "circuit"]
           presence = 0.01
           edits = [{ series = { branch = "into {at}.PE", ohms = "open" } }]"#,
        r#"kind = "joint"
           name = "bad joint in {conductor}"
           at = ["point"]
           conductors = ["L", "N"]
           presence = 0.02
           edits = [{ series = { branch = "into {at}.{conductor}", ohms = "value" } }]"#,
        r#"kind = "pe-poor"
           name = "{earth} poor"
           at = ["point", "circuit"]
           presence = 0.01
           edits = [{ series = { branch = "into {at}.PE", ohms = "value" } }]"#,
        r#"kind = "wrong-bar"
           name = "{neutral} on {to}"
           at = ["circuit"]
           to = "bar"
           presence = 0.01
           edits = [{ move = { end = "{at}.N@board", to = "{to}" } }]"#,
        r#"kind = "bridged"
           name = "neutrals bridged"
           at = ["point"]
           to = "point"
           only = ["other-bar", "nearest-point"]
           presence = 0.001
           edits = [{ shunt = { between = ["{at}.N", "{to}.N"], ohms = "value" } }]"#,
        r#"kind = "leak"
           name = "leak"
           at = ["point"]
           presence = 0.03
           edits = [{ shunt = { between = ["{at}.L", "{at}.PE"], ohms = "value" } }]"#,
        r#"kind = "unseen"
           name = "unseen"
           at = ["rcd"]
           presence = 0.03"#,
    ];
    knowledge.faults = rows
        .iter()
        .map(|row| {
            kind(&if row.contains("\"value\"") {
                format!("{row}\n{OHMS}")
            } else {
                (*row).to_owned()
            })
        })
        .collect();
    knowledge
}

fn site(text: &str) -> Site {
    load_str(text, &Known::default()).unwrap().0
}

fn fault(kind: &str, at: &str) -> Fault {
    Fault {
        kind: kind.into(),
        at: at.into(),
        to: None,
        value: None,
        conductor: None,
        position: None,
    }
}

fn series(branch: &str, ohms: f64) -> Edit {
    Edit::Series {
        branch: branch.into(),
        ohms,
    }
}

fn code(faults: &[Fault]) -> &'static str {
    edits(&knowledge(), &site(HOUSE), faults)
        .unwrap_err()
        .code()
}

#[test]
fn fills_places_values_and_conductors() {
    let (k, s) = (knowledge(), site(HOUSE));
    let neutral = Fault {
        conductor: Some("N".into()),
        value: Some(7.0),
        ..fault("joint", "c1.p2")
    };
    let made = edits(
        &k,
        &s,
        &[fault("pe-open", "c1"), neutral, fault("joint", "c2.p1")],
    )
    .unwrap();
    assert_eq!(
        made,
        vec![
            series("into c1.PE", f64::INFINITY),
            series("into c1.p2.N", 7.0),
            series("into c2.p1.L", 3.0)
        ]
    );
}

#[test]
fn three_phases_take_the_line_that_is_meant() {
    let text = HOUSE
        .replace(r#""phases": 1"#, r#""phases": 3"#)
        .replace(r#""poles": 1}"#, r#""poles": 3}"#)
        .replace(
            r#""name": "hot water","#,
            r#""name": "hot water", "phase": "L1L2L3","#,
        );
    let (k, s) = (knowledge(), site(&text));
    let second = Fault {
        conductor: Some("L2".into()),
        ..fault("joint", "c3.p1")
    };
    let made = edits(&k, &s, &[fault("leak", "c3.p1"), second]).unwrap();
    let shunt = Edit::Shunt {
        between: ["c3.p1.L1".into(), "c3.p1.PE".into()],
        ohms: 3.0,
        when: None,
    };
    assert_eq!(made, vec![shunt, series("into c3.p1.L2", 3.0)]);
    let space = enumerate(&k, &s).unwrap();
    let joints = space
        .singles
        .iter()
        .filter(|h| h.id.starts_with("joint@c3.p1"))
        .count();
    assert_eq!(joints, 4, "L1, L2, L3 and N");
}

#[test]
fn refuses_with_the_codes_of_the_contract() {
    assert_eq!(code(&[fault("pe-opn", "c1.p1")]), "unknown-word");
    assert_eq!(code(&[fault("pe-open", "kettle")]), "unknown-place");
    assert_eq!(code(&[fault("wrong-bar", "c1")]), "bad-request");
    assert_eq!(
        code(&[Fault {
            to: Some("shed.N".into()),
            ..fault("wrong-bar", "c1")
        }]),
        "unknown-place"
    );
    assert_eq!(
        code(&[Fault {
            value: Some(1.0),
            ..fault("pe-open", "c1.p1")
        }]),
        "bad-request"
    );
    assert_eq!(
        code(&[Fault {
            value: Some(-1.0),
            ..fault("leak", "c1.p1")
        }]),
        "bad-request"
    );
    assert_eq!(
        code(&[fault("pe-open", "c1.p1"), fault("pe-poor", "c1.p1")]),
        "conflict"
    );
    assert_eq!(
        code(&[fault("leak", "c1.p1"), fault("leak", "c1.p1")]),
        "conflict"
    );
    assert_eq!(code(&[fault("unseen", "rcd1")]), "not-predictable");
    let bars = ["msb.N", "msb.rcd2.N"].map(|bar| Fault {
        to: Some(bar.into()),
        ..fault("wrong-bar", "c1")
    });
    assert_eq!(code(&bars), "conflict");
}

#[test]
fn nearest_words_are_named() {
    let error = edits(&knowledge(), &site(HOUSE), &[fault("pe-opn", "c1.p1")]).unwrap_err();
    assert!(error.to_string().contains("pe-open"), "{error}");
}

#[test]
fn space_has_every_place_once_and_bars_but_ones_own() {
    let space = enumerate(&knowledge(), &site(HOUSE)).unwrap();
    let of = |kind: &str| -> Vec<&str> {
        space
            .singles
            .iter()
            .filter(|h| h.faults[0].kind == kind)
            .map(|h| h.id.as_str())
            .collect()
    };
    assert_eq!(of("pe-open").len(), 5 + 4);
    assert_eq!(of("joint").len(), 2 * 5);
    let c1 = ["wrong-bar@c1>msb.N", "wrong-bar@c1>msb.rcd2.N"];
    assert_eq!(
        of("wrong-bar")
            .iter()
            .filter(|id| id.contains("@c1>"))
            .copied()
            .collect::<Vec<_>>(),
        c1
    );
    assert!(
        !of("wrong-bar").iter().any(|id| id.contains("@s1")),
        "the shed has one bar"
    );
    // The pair nearest in length: fridge recess 14 m, bed 15 m.
    assert_eq!(
        of("bridged"),
        [
            "bridged@c1.p2>c2.p1",
            "bridged@c1.p2>c3.p1",
            "bridged@c2.p1>c3.p1"
        ]
    );
    let ids: std::collections::BTreeSet<_> = space.singles.iter().map(|h| &h.id).collect();
    assert_eq!(ids.len(), space.singles.len());
}

#[test]
fn choices_share_the_presence_of_a_place() {
    let space = enumerate(&knowledge(), &site(HOUSE)).unwrap();
    let total: f64 = space
        .singles
        .iter()
        .filter(|h| h.faults[0].kind == "joint")
        .map(|h| h.prior)
        .sum();
    assert!((total - 5.0 * 0.02 / 0.99).abs() < 1e-12, "{total}");
    let bridged: f64 = space
        .singles
        .iter()
        .filter(|h| h.faults[0].kind == "bridged")
        .map(|h| h.prior)
        .sum();
    assert!(
        (bridged - 4.0 * 0.001).abs() < 1e-5,
        "four points of the main board's circuits: {bridged}"
    );
}

#[test]
fn every_single_has_a_circuit() {
    let (k, s) = (knowledge(), site(HOUSE));
    let network = Network::new(&s, &k).unwrap();
    for h in enumerate(&k, &s).unwrap().singles {
        match edits(&k, &s, &h.faults) {
            Ok(made) => drop(network.edited(&made).unwrap()),
            Err(error) => assert_eq!(
                (error.code(), h.faults[0].kind.as_str()),
                ("not-predictable", "unseen")
            ),
        }
    }
}

#[test]
fn a_word_that_is_no_condition_is_named() {
    let mut k = knowledge();
    k.faults[0].only.push("blue".into());
    let error = enumerate(&k, &site(HOUSE)).unwrap_err();
    assert!(error.to_string().contains("`blue`"), "{error}");
}

#[test]
fn pairs_hold_the_mass_and_leave_out_contradictions() {
    let space = enumerate(&knowledge(), &site(HOUSE)).unwrap();
    let index = |id: &str| space.singles.iter().position(|h| h.id == id).unwrap();
    let (open, poor, leak) = (
        index("pe-open@c1.p1"),
        index("pe-poor@c1.p1"),
        index("leak@c1.p1"),
    );
    assert!(!space.compatible(open, poor) && space.compatible(open, leak));
    let mass = |i, j| space.pair_prior(i, j);
    let all = best_first(&space, mass, 1.0, usize::MAX);
    let half = best_first(&space, mass, 0.5, usize::MAX);
    assert!(all.dropped < 1e-12 * all.kept);
    assert!(half.pairs.len() < all.pairs.len() / 2);
    assert!((half.kept + half.dropped - all.kept).abs() < 1e-12 * all.kept);
    assert!(half.kept >= 0.5 * all.kept);
    assert!(all.pairs.windows(2).all(|w| w[0].2 >= w[1].2));
    assert!(
        all.pairs
            .iter()
            .all(|&(i, j, _)| i < j && space.compatible(i, j))
    );
    assert_eq!(best_first(&space, mass, 1.0, 7).pairs, all.pairs[..7]);
}

#[test]
fn every_pair_that_is_kept_has_a_circuit() {
    let (k, s) = (knowledge(), site(HOUSE));
    let space = enumerate(&k, &s).unwrap();
    for (i, j, _) in best_first(&space, |i, j| space.pair_prior(i, j), 1.0, usize::MAX).pairs {
        let pair = space.pair(i, j);
        match edits(&k, &s, &pair.faults) {
            Ok(_) => {}
            Err(error) => assert_eq!(error.code(), "not-predictable", "{}: {error}", pair.id),
        }
        assert_eq!(space.by_id(&pair.id), Some(pair));
    }
}

#[test]
fn says_it_in_the_words_of_the_site() {
    let (k, s) = (knowledge(), site(HOUSE));
    let said = describe(&k, &s, &[fault("pe-open", "c1.p1"), fault("leak", "c2.p1")]).unwrap();
    assert_eq!(
        said,
        "earth open at bench (kitchen sockets), and leak at bed (bedroom sockets)"
    );
}

#[test]
fn every_fault_of_knowledge_has_a_circuit_on_the_embedded_sites() {
    let k = Knowledge::embedded().unwrap();
    for name in crate::site::embedded_names() {
        let s = load_str(crate::site::embedded(name).unwrap(), &Known::from(&k))
            .unwrap()
            .0;
        let network = Network::new(&s, &k).unwrap();
        let space = enumerate(&k, &s).unwrap();
        if name == "house" {
            assert!(
                (400..900).contains(&space.singles.len()),
                "{}",
                space.singles.len()
            );
            let borrowed = space
                .singles
                .iter()
                .find(|h| h.id.starts_with("neutral-borrowed@"))
                .unwrap();
            let twin = space
                .singles
                .iter()
                .find(|h| h.id.starts_with("neutrals-bridged@") && h.group == borrowed.group);
            assert!(
                twin.is_some(),
                "{} is looked for with what joins the same circuits",
                borrowed.id
            );
        }
        for h in &space.singles {
            describe(&k, &s, &h.faults).unwrap();
            repair_text(&k, &s, &h.faults).unwrap();
            match edits(&k, &s, &h.faults) {
                Ok(made) => drop(
                    network
                        .edited(&made)
                        .unwrap_or_else(|e| panic!("{name} {}: {e}", h.id)),
                ),
                Err(error) => {
                    assert_eq!(error.code(), "not-predictable", "{name} {}: {error}", h.id)
                }
            }
        }
    }
}
