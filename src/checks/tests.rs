//! Checks on a small house: instances, lists, lines, what is supplied, minutes, instruments.

use std::collections::BTreeSet;

use super::*;
use crate::knowledge::{CheckForm, Hookup, Knowledge, Setup};
use crate::network::Network;
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
       "points": [{"id": "p1", "name": "bench", "metres": 9}, {"id": "p2", "name": "fridge recess", "metres": 14},
                  {"id": "p3", "name": "end", "metres": 20}]},
      {"id": "c2", "name": "bedroom sockets", "rcd": "rcd2", "breaker": {"curve": "C", "amps": 20}, "cable": {"mm2": 2.5},
       "points": [{"id": "p1", "name": "bed", "metres": 15}]},
      {"id": "c3", "name": "hot water", "breaker": {"curve": "C", "amps": 25}, "cable": {"mm2": 4},
       "points": [{"id": "p1", "name": "heater", "metres": 12, "kind": "fixed"}]}]},
    {"id": "shed", "name": "shed", "fed_from": {"board": "msb", "breaker": {"curve": "C", "amps": 32},
      "cable": {"mm2": 10}, "metres": 40, "link": true, "main_earth": {"metres": 2, "mm2": 6}},
     "main_switch": {"id": "shedmain", "amps": 40, "poles": 1},
     "circuits": [{"id": "s1", "name": "pump", "breaker": {"curve": "C", "amps": 16}, "cable": {"mm2": 2.5},
       "points": [{"id": "p1", "name": "pump", "metres": 5, "kind": "fixed"}]}]}],
  "equipment": [{"id": "kettle", "kind": "kettle", "at": "c1.p1"},
                {"id": "hws", "kind": "storage water heater", "at": "c3.p1", "plug": false}],
  "sources": [{"id": "battery", "kind": "battery", "at": "c3.p1", "watts": 5000, "backup": true}]
}"#;

fn site(text: &str) -> Site {
    load_str(text, &Known::default()).unwrap().0
}

fn form(text: &str) -> CheckForm {
    toml::from_str(&format!(
        "{text}\nname = \"{{at-name}}\"\nunit = \"Ω\"\nminutes = 2\nkit = [\"multimeter|clamp\"]\ntext = \"At {{at}}.\""
    ))
    .unwrap()
}

fn made(site: &Site, text: &str) -> Vec<Check> {
    let mut knowledge = Knowledge::embedded().unwrap();
    knowledge.checks = vec![form(text)];
    let network = Network::new(site, &knowledge).unwrap();
    assert_eq!(misfits(&knowledge, &network, site), Ok(Vec::new()));
    catalogue(&knowledge, &network, site).unwrap()
}

fn ats(checks: &[Check]) -> Vec<&str> {
    checks.iter().map(|c| c.at.as_str()).collect()
}

fn open(devices: &[&str]) -> Setup {
    Setup {
        open: devices.iter().map(|d| (*d).to_owned()).collect(),
        ..Setup::default()
    }
}

#[test]
fn selectors_choose_their_places() {
    let s = site(HOUSE);
    let of = |each: &str, at: &str| -> Vec<String> {
        let hookup = format!("hookup = {{ quantity = \"seen\", at = \"{at}\", what = \"burnt\" }}");
        made(&s, &format!("id = \"x\"\neach = \"{each}\"\n{hookup}"))
            .into_iter()
            .map(|c| c.at)
            .collect()
    };
    assert_eq!(of("once", "{at}"), ["msb"]);
    assert_eq!(of("sub-board", "{at}"), ["shed"]);
    assert_eq!(of("outlet", "{at}"), ["c1.p1", "c1.p2", "c1.p3", "c2.p1"]);
    assert_eq!(
        of("last-point", "{at}"),
        ["c1.p3", "c2.p1", "c3.p1", "s1.p1"]
    );
    assert_eq!(
        of("split", "{at}"),
        ["c1.p1"],
        "9 of 20 m is nearest the middle"
    );
    assert_eq!(of("circuit-on-rcd", "{at}"), ["c1", "c2"]);
    assert_eq!(
        of("circuit-pair", "{b}"),
        ["c1+c2", "c1+c3"],
        "the same look at c3 from c2 is one"
    );
    assert_eq!(of("plug-equipment", "{at}"), ["kettle"]);
    assert_eq!(of("electrode", "{at}"), ["electrode", "shed.electrode"]);
    assert_eq!(of("main-line", "{at}"), Vec::<String>::new());
    let holds = made(
        &s,
        "id = \"x\"\neach = \"circuit\"\nhookup = { quantity = \"holds\", device = \"{rcd}\" }",
    );
    assert_eq!(ats(&holds), ["c1", "c2"], "hot water has no RCD");
}

#[test]
fn lists_become_devices_and_equipment() {
    let checks = made(
        &site(HOUSE),
        "id = \"x\"\neach = \"circuit-on-rcd\"\nsetup = { open = [\"{other-breakers}\", \"{mains}\"], unplug = [\"{circuit-equipment}\"] }\n\
         hookup = { quantity = \"holds\", device = \"{rcd}\" }",
    );
    assert_eq!(checks[0].setup.open, ["main"]);
    let all = made(
        &site(HOUSE),
        "id = \"x\"\neach = \"main-board\"\nsetup = { open = [\"{all-breakers}\"], off = [\"{all-equipment}\"] }\n\
         hookup = { quantity = \"volts\", between = [\"{at}.PE\", \"soil\"] }",
    );
    assert_eq!(
        all[0].setup.open,
        ["c1.breaker", "c2.breaker", "c3.breaker", "shed.breaker"]
    );
    assert_eq!(all[0].setup.off, ["kettle", "hws"]);
}

#[test]
fn three_lines_are_joined_or_the_first_is_meant() {
    let text = HOUSE
        .replace(r#""phases": 1"#, r#""phases": 3"#)
        .replace(r#""poles": 1}"#, r#""poles": 3}"#)
        .replace(
            r#""name": "hot water","#,
            r#""name": "hot water", "phase": "L1L2L3","#,
        );
    let s = site(&text);
    let insulation = made(
        &s,
        "id = \"x\"\neach = \"circuit\"\nonly = [\"three-phase\"]\nsetup = { open = [\"{main}\"], lift = [\"{at}.L@board\"] }\n\
         hookup = { quantity = \"insulation\", between = [[\"{at}.L\", \"{at}.N\"], [\"{at}.PE\"]], test_volts = 500 }",
    );
    let heater = insulation.iter().find(|c| c.at == "c3").unwrap();
    assert_eq!(
        heater.setup.lift,
        ["c3.L1@board", "c3.L2@board", "c3.L3@board"]
    );
    let Hookup::Insulation {
        between: [joined, _],
        ..
    } = &heater.hookup
    else {
        panic!()
    };
    assert_eq!(joined, &["c3.L1", "c3.L2", "c3.L3", "c3.N"]);
    let volts = made(
        &s,
        "id = \"x\"\neach = \"point\"\nhookup = { quantity = \"volts\", between = [\"{at}.L\", \"{at}.N\"] }",
    );
    let Hookup::Volts { between, .. } = &volts.iter().find(|c| c.at == "c3.p1").unwrap().hookup
    else {
        panic!()
    };
    assert_eq!(between[0], "c3.p1.L1");
    let pairs = made(
        &s,
        "id = \"x\"\neach = \"circuit-pair\"\nhookup = { quantity = \"continuity\", between = [\"{a}.N\", \"{b}.N\"] }",
    );
    assert_eq!(ats(&pairs), ["c1+c2", "c1+c3", "c2+c3"]);
    let lines = made(
        &s,
        "id = \"x\"\neach = \"main-line\"\nhookup = { quantity = \"volts\", between = [\"{at}.{conductor}\", \"{at}.N\"] }",
    );
    assert_eq!(ats(&lines), ["msb.L1", "msb.L2", "msb.L3"]);
}

#[test]
fn what_the_circuit_lacks_is_told_and_left_out() {
    let s = site(HOUSE);
    let mut knowledge = Knowledge::embedded().unwrap();
    knowledge.checks = vec![form(
        "id = \"x\"\neach = \"board\"\nhookup = { quantity = \"volts\", between = [\"{at}.feed.L\", \"soil\"] }",
    )];
    let network = Network::new(&s, &knowledge).unwrap();
    assert_eq!(ats(&catalogue(&knowledge, &network, &s).unwrap()), ["shed"]);
    let told = misfits(&knowledge, &network, &s).unwrap();
    assert!(
        told.len() == 1 && told[0].why.contains("msb.feed.L"),
        "{told:?}"
    );
    knowledge.checks[0].each = "moon".into();
    assert!(
        catalogue(&knowledge, &network, &s)
            .unwrap_err()
            .to_string()
            .contains("moon")
    );
}

#[test]
fn supply_reaches_through_closed_devices_and_from_a_battery() {
    let s = site(HOUSE);
    let off = |devices: &[&str]| {
        let mut setup = open(devices);
        setup
            .sources
            .insert("battery".into(), crate::knowledge::SourceMode::Off);
        setup
    };
    assert!(supplied(&off(&[]), &s).contains("s1"));
    assert!(!supplied(&off(&["shed.breaker"]), &s).contains("s1"));
    assert_eq!(
        supplied(&off(&["main"]), &s)
            .into_iter()
            .collect::<Vec<_>>(),
        ["service"]
    );
    assert!(supplied(&off(&["service.fuse"]), &s).is_empty());
    assert!(!supplied(&off(&["rcd1"]), &s).contains("c1"));
    assert!(
        supplied(&open(&["main"]), &s).contains("c1"),
        "the battery feeds it"
    );
    assert!(!supplied(&open(&["main", "c3.breaker"]), &s).contains("c1"));
}

#[test]
fn a_cut_circuit_is_dead_beyond_the_cut_only() {
    let s = site(HOUSE);
    let look = |at: &str| Hookup::Seen {
        at: at.into(),
        what: "burnt".into(),
    };
    let cut = Setup {
        lift: vec!["c1.p1.split".into()],
        ..Setup::default()
    };
    assert!(energised(&cut, &look("c1.p1"), &s));
    assert!(!energised(&cut, &look("c1.p2"), &s));
    assert!(!energised(&open(&["c1.breaker"]), &look("kettle"), &s));
    assert!(energised(
        &open(&["main"]),
        &Hookup::Volts {
            between: ["msb.PE".into(), "soil".into()],
            meter: None
        },
        &s
    ));
}

#[test]
fn changes_cost_their_minutes_once() {
    let s = site(HOUSE);
    let effort = Knowledge::embedded().unwrap().effort;
    let dead = Setup {
        lift: vec!["c1.N@board".into()],
        ..open(&["main"])
    };
    let first = transition(&Setup::default(), &dead, true, &s, &effort);
    assert!((first - effort.switch - effort.prove_dead - effort.lift).abs() < 1e-12);
    assert!(transition(&dead, &dead, true, &s, &effort).abs() < 1e-12);
    let more = Setup {
        open: vec!["main".into(), "c1.breaker".into()],
        ..dead.clone()
    };
    let next = transition(&dead, &more, true, &s, &effort);
    assert!((next - effort.switch - effort.prove_dead).abs() < 1e-12);
    let back = transition(&dead, &Setup::default(), false, &s, &effort);
    assert!((back - effort.switch - effort.lift).abs() < 1e-12);
    assert!(walk("msb", "c1.p1", &effort) > 0.0 && walk("msb", "msb", &effort) == 0.0);
}

#[test]
fn instruments_and_leave_decide_what_is_available() {
    let s = site(HOUSE);
    let knowledge = Knowledge::embedded().unwrap();
    let mut check = made(&s, "id = \"x\"\neach = \"once\"\nhookup = { quantity = \"volts\", between = [\"msb.PE\", \"soil\"] }").remove(0);
    let kit =
        |words: &[&str]| -> BTreeSet<String> { words.iter().map(|w| (*w).to_owned()).collect() };
    assert!(availability(&knowledge, &check, &kit(&["clamp"]), &s).is_ok());
    let why = availability(&knowledge, &check, &kit(&["stake"]), &s).unwrap_err();
    assert!(why.contains("multimeter") && why.contains(" or "), "{why}");
    check.kit = vec!["stake".into(), "low-z-tester".into()];
    assert!(availability(&knowledge, &check, &kit(&["multimeter"]), &s).is_ok());
    check.setup = open(&["service.fuse"]);
    assert!(
        availability(&knowledge, &check, &kit(&["multimeter"]), &s)
            .unwrap_err()
            .contains("service.fuse")
    );
}

#[test]
fn every_check_of_knowledge_fits_the_circuits_of_the_embedded_sites() {
    let knowledge = Knowledge::embedded().unwrap();
    for name in crate::site::embedded_names() {
        let s = load_str(
            crate::site::embedded(name).unwrap(),
            &Known::from(&knowledge),
        )
        .unwrap()
        .0;
        let network = Network::new(&s, &knowledge).unwrap();
        let told = misfits(&knowledge, &network, &s).unwrap();
        assert!(
            told.is_empty(),
            "{name}: {}",
            told.iter()
                .map(ToString::to_string)
                .collect::<Vec<_>>()
                .join("\n")
        );
        let checks = catalogue(&knowledge, &network, &s).unwrap();
        if name == "house" {
            assert!((300..1200).contains(&checks.len()), "{}", checks.len());
        }
        let keys: BTreeSet<_> = checks.iter().map(Check::key).collect();
        assert_eq!(
            keys.len(),
            checks.len(),
            "{name}: test and place are unique together"
        );
    }
}
