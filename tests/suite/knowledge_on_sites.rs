//! The built-in knowledge fits sites of every system: each fault's edits are of this circuit, each check reads.

use std::collections::{BTreeMap, BTreeSet};

use straypath::checks::catalogue;
use straypath::faults::{edits, enumerate};
use straypath::knowledge::Knowledge;
use straypath::network::Network;
use straypath::site::{Known, Site, load_str};

/// A house with two RCDs, a bonded pipe, lights, fixed equipment and an inverter.
const HOUSE: &str = r#"{
 "schema": "straypath-site/1", "words": "au-nz", "may_isolate_supply": true,
 "supply": {"system": "TN-C-S", "service": {"metres": 20, "mm2": 16}},
 "earthing": {"board": "msb", "link": true, "main_earth": {"metres": 4, "mm2": 6},
  "bonds": [{"id": "water", "name": "water pipe", "metres": 9, "mm2": 4}]},
 "boards": [{"id": "msb", "name": "main board", "fed_from": "service",
  "main_switch": {"id": "main", "amps": 63, "poles": 1},
  "rcds": [{"id": "rcd1", "ma": 30}, {"id": "rcd2", "ma": 30}],
  "circuits": [
   {"id": "c1", "name": "kitchen", "rcd": "rcd1", "breaker": {"curve": "C", "amps": 20}, "cable": {"mm2": 2.5},
    "points": [{"id": "p1", "name": "bench", "metres": 9}, {"id": "p2", "name": "fridge", "metres": 14}, {"id": "p3", "name": "table", "metres": 18}]},
   {"id": "c2", "name": "bedrooms", "rcd": "rcd2", "breaker": {"curve": "C", "amps": 20}, "cable": {"mm2": 2.5},
    "points": [{"id": "p1", "name": "bed 1", "metres": 12}, {"id": "p2", "name": "bed 2", "metres": 17}]},
   {"id": "c3", "name": "lights", "rcd": "rcd2", "breaker": {"curve": "C", "amps": 10}, "cable": {"mm2": 1.5},
    "points": [{"id": "p1", "name": "hall", "metres": 8, "kind": "light"}, {"id": "p2", "name": "garden", "metres": 20, "kind": "light"}]},
   {"id": "c4", "name": "hot water", "breaker": {"curve": "C", "amps": 25}, "cable": {"mm2": 4, "pe_mm2": 2.5},
    "points": [{"id": "p1", "name": "heater", "metres": 12, "kind": "fixed"}]}]}],
 "equipment": [
  {"id": "kettle", "kind": "kettle", "at": "c1.p1"}, {"id": "fridge", "kind": "refrigerator", "at": "c1.p2"},
  {"id": "tv", "kind": "television", "at": "c2.p1"}, {"id": "pc", "kind": "computer", "at": "c2.p2"},
  {"id": "lamp1", "kind": "luminaire", "at": "c3.p1", "plug": false}, {"id": "lamp2", "kind": "luminaire", "at": "c3.p2", "plug": false},
  {"id": "hws", "kind": "storage water heater", "at": "c4.p1", "plug": false, "touches": ["water"]}],
 "sources": [{"id": "pv", "kind": "pv-inverter", "at": "msb", "watts": 3000}]}"#;

/// A farm on TT with a delayed RCD ahead and a shed without an earth conductor in its submain.
const FARM: &str = r#"{
 "schema": "straypath-site/1", "words": "iec",
 "supply": {"system": "TT", "service": {"metres": 60, "mm2": 16}},
 "earthing": {"board": "msb", "link": false, "main_earth": {"metres": 6, "mm2": 10}, "electrode_ohms": 80},
 "boards": [
  {"id": "msb", "name": "farm board", "fed_from": "service", "main_switch": {"id": "main", "amps": 63, "poles": 2},
   "rcds": [{"id": "front", "ma": 300, "delayed": true}, {"id": "rcd1", "ma": 30, "after": "front"}],
   "circuits": [{"id": "c1", "name": "house", "rcd": "rcd1", "breaker": {"curve": "B", "amps": 16}, "cable": {"mm2": 2.5},
     "points": [{"id": "p1", "name": "kitchen", "metres": 10}, {"id": "p2", "name": "yard", "metres": 30, "kind": "junction"}]}]},
  {"id": "shed", "name": "pump shed", "fed_from": {"board": "msb", "rcd": "front", "breaker": {"curve": "C", "amps": 32},
    "cable": {"mm2": 10, "pe_mm2": null}, "metres": 40, "link": false, "main_earth": {"metres": 3, "mm2": 6}},
   "main_switch": {"id": "shed-main", "amps": 40, "poles": 2}, "rcds": [{"id": "rcd2", "ma": 30}],
   "circuits": [{"id": "s1", "name": "pump", "rcd": "rcd2", "breaker": {"curve": "C", "amps": 16}, "cable": {"mm2": 2.5},
     "points": [{"id": "p1", "name": "pump outlet", "metres": 6}]}]}],
 "equipment": [{"id": "fence", "kind": "electric fence energiser", "at": "c1.p2"}, {"id": "pump", "kind": "pump", "at": "s1.p1"}]}"#;

/// A shop on three phases with a submain, a three-phase circuit and a second board.
const SHOP: &str = r#"{
 "schema": "straypath-site/1", "words": "au-nz", "rules": "au-nz-3000-2018",
 "supply": {"phases": 3, "system": "TN-C-S", "service": {"metres": 30, "mm2": 35}},
 "earthing": {"board": "msb", "link": true, "bonds": [{"id": "steel", "name": "steel frame", "metres": 5, "mm2": 10, "street_metal": true}]},
 "boards": [
  {"id": "msb", "name": "main board", "fed_from": "service", "main_switch": {"id": "main", "amps": 100, "poles": 3},
   "rcds": [{"id": "rcd1", "ma": 30, "poles": 4}],
   "circuits": [
    {"id": "oven", "name": "oven", "rcd": null, "phase": "L1L2L3", "breaker": {"curve": "C", "amps": 32}, "cable": {"mm2": 6, "pe_mm2": 2.5},
     "points": [{"id": "p1", "name": "oven isolator", "metres": 15, "kind": "isolator"}]},
    {"id": "c2", "name": "counter", "rcd": "rcd1", "phase": "L2", "breaker": {"curve": "C", "amps": 20}, "cable": {"mm2": 2.5},
     "points": [{"id": "p1", "name": "till", "metres": 12}, {"id": "p2", "name": "fridges", "metres": 18}]}]},
  {"id": "rear", "name": "rear board", "fed_from": {"board": "msb", "rcd": null, "breaker": {"curve": "C", "amps": 63},
    "cable": {"mm2": 16, "pe_mm2": 6}, "metres": 25, "phase": "L1L2L3"},
   "main_switch": {"id": "rear-main", "amps": 63, "poles": 3}, "rcds": [{"id": "rcd2", "ma": 30}],
   "circuits": [{"id": "r1", "name": "cool room", "rcd": "rcd2", "phase": "L3", "breaker": {"curve": "C", "amps": 20}, "cable": {"mm2": 2.5},
     "points": [{"id": "p1", "name": "cool room", "metres": 9}]}]}],
 "equipment": [{"id": "case", "kind": "display fridge", "at": "c2.p2"}, {"id": "coffee", "kind": "coffee machine", "at": "c2.p1"}]}"#;

fn site(text: &str) -> Site {
    load_str(text, &Known::contract()).unwrap().0
}

const SITES: [(&str, &str); 3] = [("house", HOUSE), ("farm", FARM), ("shop", SHOP)];

#[test]
fn every_fault_and_every_check_fits_the_circuit() {
    let knowledge = Knowledge::embedded().unwrap();
    for (name, text) in SITES {
        let site = site(text);
        let network = Network::new(&site, &knowledge).unwrap();
        let space = enumerate(&knowledge, &site).unwrap();
        let mut wrong = Vec::new();
        for single in &space.singles {
            if single
                .kinds
                .iter()
                .all(|k| knowledge.faults[*k].edits.is_empty())
            {
                continue;
            }
            let edited = edits(&knowledge, &site, &single.faults).map_err(|e| e.to_string());
            if let Err(e) = edited.and_then(|e| network.edited(&e).map_err(|e| e.to_string())) {
                wrong.push(format!("{}: {e}", single.id));
            }
        }
        for check in catalogue(&knowledge, &network, &site).unwrap() {
            if check.hookup.quantity() == "seen" {
                continue;
            }
            let read = network.predict(&[], &check.setup, &check.hookup, &BTreeMap::new(), true);
            if let Err(e) = read {
                wrong.push(format!("{} at {}: {e}", check.test, check.at));
            }
        }
        assert!(wrong.is_empty(), "{name}:\n{}", wrong.join("\n"));
    }
}

#[test]
fn whatever_a_check_needs_another_can_prove() {
    let knowledge = Knowledge::embedded().unwrap();
    for (name, text) in SITES {
        let site = site(text);
        let network = Network::new(&site, &knowledge).unwrap();
        let checks = catalogue(&knowledge, &network, &site).unwrap();
        let proofs: BTreeSet<&String> = checks
            .iter()
            .flat_map(|c| &c.proves)
            .map(|p| &p.what)
            .collect();
        let mut unproved: BTreeSet<String> = checks
            .iter()
            .flat_map(|c| c.needs.iter().map(move |need| (c, need)))
            .filter(|(_, need)| !proofs.contains(need))
            .map(|(c, need)| format!("{} at {} needs {need}", c.test, c.at))
            .collect();
        if !proofs.contains(&knowledge.safety.supply_proof) {
            unproved.insert("nothing proves the supply neutral".into());
        }
        assert!(unproved.is_empty(), "{name}: {unproved:#?}");
    }
}

#[test]
fn what_confirms_a_repair_is_there_to_be_done() {
    let knowledge = Knowledge::embedded().unwrap();
    let site = site(HOUSE);
    let network = Network::new(&site, &knowledge).unwrap();
    let checks = catalogue(&knowledge, &network, &site).unwrap();
    for single in enumerate(&knowledge, &site).unwrap().singles {
        for kind in &single.kinds {
            let repair = &knowledge.faults[*kind].repair;
            for id in repair.rechecks.iter().chain(&repair.confirm) {
                assert!(
                    checks.iter().any(|c| c.test == *id),
                    "{}: {id} is nowhere",
                    single.id
                );
            }
        }
    }
}
