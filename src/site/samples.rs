//! Small invented sites for tests of this and higher layers.

use super::{Known, Site, load_str};

/// A house on TN-C-S with two RCDs, a bonded pipe, and a pump shed with its own link.
const SMALL: &str = r#"{
  "schema": "straypath-site/1", "name": "Test house", "words": "au-nz",
  "supply": {"system": "TN-C-S", "service": {"metres": 22, "mm2": 16}},
  "earthing": {"board": "msb", "link": true,
    "bonds": [{"id": "water", "name": "copper water pipe", "metres": 9, "mm2": 4}]},
  "boards": [
    {"id": "msb", "name": "main switchboard", "fed_from": "service",
     "main_switch": {"id": "main", "amps": 63, "poles": 1},
     "rcds": [{"id": "rcd1", "ma": 30}, {"id": "rcd2", "ma": 30}],
     "circuits": [
       {"id": "c1", "name": "kitchen sockets", "rcd": "rcd1", "breaker": {"curve": "C", "amps": 20},
        "cable": {"mm2": 2.5}, "points": [{"id": "p1", "name": "bench", "metres": 9},
          {"id": "p2", "name": "fridge recess", "metres": 14}, {"id": "p3", "name": "laundry", "metres": 12, "from": "p1"}]},
       {"id": "c2", "name": "bedroom sockets", "rcd": "rcd2", "breaker": {"curve": "C", "amps": 20},
        "cable": {"mm2": 2.5}, "points": [{"id": "p1", "name": "bed 1", "metres": 17}]},
       {"id": "c3", "name": "hot water", "breaker": {"curve": "C", "amps": 25}, "cable": {"mm2": 4, "pe_mm2": 2.5},
        "points": [{"id": "p1", "name": "heater", "metres": 12, "kind": "fixed"}]}]},
    {"id": "shed", "name": "pump shed",
     "fed_from": {"board": "msb", "breaker": {"curve": "C", "amps": 32}, "cable": {"mm2": 10, "pe_mm2": null},
       "metres": 40, "link": true},
     "main_switch": {"id": "shed-main", "amps": 40, "poles": 1},
     "rcds": [{"id": "rcd3", "ma": 30}],
     "circuits": [{"id": "s1", "name": "pump", "rcd": "rcd3", "breaker": {"curve": "C", "amps": 16},
        "cable": {"mm2": 2.5}, "points": [{"id": "p1", "name": "pump outlet", "metres": 6}]}]}
  ],
  "equipment": [
    {"id": "kettle", "kind": "kettle", "at": "c1.p1", "watts": 2200},
    {"id": "fridge", "kind": "refrigerator", "at": "c1.p2"},
    {"id": "hws", "kind": "storage water heater", "at": "c3.p1", "watts": 3600, "plug": false, "touches": ["water"]},
    {"id": "pump", "kind": "pump", "at": "s1.p1"}
  ]
}"#;

/// The small house.
pub fn small() -> Site {
    load_str(SMALL, &Known::contract())
        .expect("the sample loads")
        .0
}
