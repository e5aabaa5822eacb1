//! Every class of bad site file has an error that names what, where and the cure.

use serde_json::{Value, json};

use super::*;
use crate::site::model::{Given, LinkAt, Phase, Site, WordSet};

fn house() -> Value {
    json!({
        "schema": "straypath-site/1", "name": "Test", "words": "au-nz",
        "supply": {"system": "TN-C-S", "network_ohms": {"low": 0.1, "high": 0.4}, "service": {"metres": 22}},
        "earthing": {"board": "msb", "link": true, "main_earth": {"metres": 4, "mm2": 6},
            "bonds": [{"id": "water", "name": "copper water pipe", "metres": 9, "mm2": 4}]},
        "boards": [{"id": "msb", "name": "main switchboard", "fed_from": "service",
            "main_switch": {"id": "main", "amps": 63, "poles": 1},
            "rcds": [{"id": "rcd1", "ma": 30}, {"id": "rcd2", "ma": 30}],
            "circuits": [
                {"id": "c1", "name": "kitchen", "rcd": "rcd1", "phase": "L1",
                 "breaker": {"curve": "C", "amps": 20}, "cable": {"mm2": 2.5, "pe_mm2": null},
                 "points": [{"id": "p1", "name": "bench", "metres": 9}, {"id": "p2", "metres": 14}]},
                {"id": "c2", "rcd": null, "points": [{"id": "p1", "metres": 17}]}
            ]}],
        "equipment": [{"id": "kettle", "kind": "kettle", "at": "c1.p1", "touches": ["water"]}]
    })
}

fn load(value: Value) -> Result<(Site, Vec<SiteWarning>), SiteError> {
    let text = load_str(&value.to_string(), &Known::contract());
    let tree = load_value(value, &Known::contract());
    assert_eq!(text.is_ok(), tree.is_ok());
    tree
}

/// The house with the value at a JSON pointer set.
fn with(pointer: &str, value: Value) -> Value {
    let mut doc = house();
    let (parent, key) = pointer.rsplit_once('/').unwrap();
    match doc.pointer_mut(parent).unwrap() {
        Value::Object(map) => drop(map.insert(key.to_owned(), value)),
        Value::Array(list) => list.push(value),
        _ => panic!("no container at {parent}"),
    }
    doc
}

fn refused(doc: Value, path: &str, says: &str, cure: &str) {
    let error = load(doc).unwrap_err();
    assert!(
        error.path.starts_with(path),
        "path {} ({})",
        error.path,
        error.message
    );
    assert!(error.message.contains(says), "message {}", error.message);
    assert!(error.hint.contains(cure), "hint {}", error.hint);
}

#[test]
fn a_good_site_gets_its_defaults() {
    let (site, warnings) = load(house()).unwrap();
    assert_eq!(site.words, WordSet::AuNz);
    assert_eq!(site.supply.volts, 230.0);
    assert!(!site.supply.volts_given);
    assert_eq!(site.supply.network_ohms, Given::Range(0.1, 0.4));
    assert_eq!(site.supply.network_earth_ohms, Given::Unknown);
    let board = &site.boards[0];
    assert_eq!(board.rcds[0].poles, 2);
    assert_eq!(board.rcds[0].amps, 0.03);
    assert_eq!(board.circuits[0].cable.pe_mm2, Some(2.5));
    assert_eq!(board.circuits[1].main.as_deref(), Some("main"));
    assert_eq!(board.circuits[0].points[1].from, Some(0));
    assert_eq!(board.earthing.as_ref().unwrap().link_at, LinkAt::Bar);
    assert_eq!(site.equipment[0].touches, [0]);
    assert!(
        warnings
            .iter()
            .any(|w| w.path == "c2" && w.text.contains("breaker")),
        "{warnings:?}"
    );
}

#[test]
fn a_switched_neutral_puts_the_link_on_the_supply_side() {
    let (site, _) = load(with("/boards/0/main_switch/poles", json!(2))).unwrap();
    assert_eq!(
        site.boards[0].earthing.as_ref().unwrap().link_at,
        LinkAt::Incoming
    );
}

#[test]
fn not_json_tells_line_and_column() {
    let error = load_str("{\n  \"schema\": nope\n}", &Known::contract()).unwrap_err();
    assert_eq!(error.path, "line 2, column 14");
    assert!(error.message.contains("not JSON"));
    let error = load_str("{\"supply\": {\"volts\": NaN}}", &Known::contract()).unwrap_err();
    assert!(error.hint.contains("NaN"));
    let huge = house().to_string().replace("22", "1e999");
    let error = load_str(&huge, &Known::contract()).unwrap_err();
    assert!(error.hint.contains("too large"), "{error:?}");
    let error = load_str(&house().to_string()[..200], &Known::contract()).unwrap_err();
    assert!(error.hint.contains("ends too soon"), "{error:?}");
    let error = load_str(&format!("{} x", house()), &Known::contract()).unwrap_err();
    assert!(error.message.contains("trailing"), "{error:?}");
}

#[test]
fn an_empty_file_is_told() {
    for text in ["", "  \n", "\u{feff}"] {
        assert!(
            load_str(text, &Known::contract())
                .unwrap_err()
                .message
                .contains("empty")
        );
    }
}

#[test]
fn a_file_too_large_is_refused_by_size() {
    let dir = tempfile::tempdir().unwrap();
    let path = dir.path().join("big.json");
    std::fs::File::create(&path)
        .unwrap()
        .set_len(100_000_000)
        .unwrap();
    let error = load_path(&path, &Known::contract()).unwrap_err();
    assert!(error.message.contains("100000000 bytes"), "{error:?}");
    assert!(
        load_path(dir.path(), &Known::contract())
            .unwrap_err()
            .message
            .contains("folder")
    );
    let none = load_path(&dir.path().join("none.json"), &Known::contract()).unwrap_err();
    assert!(none.message.contains("cannot be read"));
    let bad = dir.path().join("bad.json");
    std::fs::write(&bad, b"{\"schema\": \"\xff\"}").unwrap();
    assert!(
        load_path(&bad, &Known::contract())
            .unwrap_err()
            .message
            .contains("UTF-8")
    );
    let good = dir.path().join("good.json");
    std::fs::write(&good, house().to_string()).unwrap();
    assert_eq!(load_path(&good, &Known::contract()).unwrap().given, house());
}

#[test]
fn unknown_and_missing_keys() {
    refused(
        with("/supply/vlots", json!(230)),
        "supply.vlots",
        "unknown key `vlots`",
        "`volts`",
    );
    refused(
        with("/boards/0/circuits/0/points/0/meters", json!(1)),
        "boards[0].circuits[0].points[0].meters",
        "`meters`",
        "`metres`",
    );
    refused(
        with("/boards/0/fed_from", json!({"board": "msb", "lenght": 3})),
        "boards[0].fed_from.lenght",
        "`lenght`",
        "metres",
    );
    let mut doc = house();
    doc["boards"][0]["circuits"][1]
        .as_object_mut()
        .unwrap()
        .remove("id");
    refused(doc, "boards[0].circuits[1]", "`id` is missing", "add");
    let mut doc = house();
    doc["supply"].as_object_mut().unwrap().remove("system");
    refused(doc, "supply", "`system` is missing", "add");
    refused(
        with("/supply/system", json!("TNCS")),
        "supply.system",
        "`TNCS`",
        "TN-C-S",
    );
    refused(
        with("/schema", json!("straypath-site/2")),
        "schema",
        "straypath-site/2",
        "newer",
    );
    let twice = house()
        .to_string()
        .replacen("\"amps\":20", "\"amps\":20,\"amps\":25", 1);
    assert!(
        load_str(&twice, &Known::contract())
            .unwrap_err()
            .message
            .contains("twice")
    );
}

#[test]
fn wrong_types() {
    refused(
        with("/supply/volts", json!("230 V")),
        "supply.volts",
        "expected a number",
        "kind of value",
    );
    refused(
        with("/boards", json!({})),
        "boards",
        "expected a sequence",
        "kind of value",
    );
    refused(
        with("/boards/0/circuits/0/rcd", json!(1)),
        "boards[0].circuits[0].rcd",
        "expected a string",
        "",
    );
    refused(
        with("/earthing/link", json!("yes")),
        "earthing.link",
        "expected a boolean",
        "",
    );
    assert!(load(json!([])).is_err());
    assert!(load(json!(null)).is_err());
}

#[test]
fn numbers_that_cannot_be() {
    let metres = "/boards/0/circuits/0/points/0/metres";
    refused(
        with(metres, json!(-3)),
        "boards[0].circuits[0].points[0].metres",
        "cannot be negative",
        "sign",
    );
    refused(
        with(metres, json!(0)),
        "boards[0].circuits[0].points[0].metres",
        "above zero",
        "leave",
    );
    refused(
        with(metres, json!(90000)),
        "boards[0].circuits[0].points[0].metres",
        "outside anything real",
        "unit",
    );
    refused(
        with("/boards/0/circuits/0/breaker/amps", json!(-20)),
        "boards[0].circuits[0].breaker.amps",
        "negative",
        "",
    );
    refused(
        with("/boards/0/rcds/0/ma", json!(0.03)),
        "boards[0].rcds[0].ma",
        "mA",
        "unit",
    );
    refused(
        with("/supply/phases", json!(2)),
        "supply.phases",
        "2 phases",
        "1 or 3",
    );
    refused(
        with("/supply/network_ohms", json!({"low": 3, "high": 1})),
        "supply.network_ohms",
        "above high",
        "exchange",
    );
    refused(
        with("/supply/network_ohms", json!({"low": 0, "high": 1})),
        "supply.network_ohms.low",
        "above zero",
        "least",
    );
    refused(
        with("/equipment/0/watts", json!(0)),
        "equipment[0].watts",
        "above zero",
        "",
    );
    let (site, warnings) = load(with("/supply/network_ohms", json!(0))).unwrap();
    assert_eq!(site.supply.network_ohms, Given::Value(1e-6));
    assert!(warnings.iter().any(|w| w.path == "supply.network_ohms"));
}

#[test]
fn ids() {
    refused(
        with("/boards/0/circuits/1/id", json!("c1")),
        "boards[0].circuits[1].id",
        "used twice",
        "own id",
    );
    refused(
        with("/boards/0/circuits/1/id", json!("kettle")),
        "equipment[0].id",
        "used twice",
        "own id",
    );
    refused(
        with("/boards/0/circuits/0/points/1/id", json!("p1")),
        "boards[0].circuits[0].points[1].id",
        "twice",
        "",
    );
    refused(
        with("/boards/0/circuits/1/id", json!("soil")),
        "boards[0].circuits[1].id",
        "reserved",
        "electrode",
    );
    refused(
        with("/boards/0/circuits/1/id", json!("Hot Water")),
        "boards[0].circuits[1].id",
        "not an id",
        "hot-water",
    );
    refused(
        with("/boards/0/circuits/1/id", json!("")),
        "boards[0].circuits[1].id",
        "not an id",
        "letters",
    );
    refused(
        with("/boards/0/name", json!("a\u{1b}[31m")),
        "boards[0].name",
        "one line",
        "",
    );
}

#[test]
fn points_and_their_order() {
    refused(
        with("/boards/0/circuits/0/points/1/from", json!("p9")),
        "boards[0].circuits[0].points[1].from",
        "`p9`",
        "p1",
    );
    refused(
        with("/boards/0/circuits/0/points/1/metres", json!(5)),
        "boards[0].circuits[0].points[1].metres",
        "nearer",
        "from",
    );
    refused(
        with("/boards/0/circuits/0/points/0/from", json!("p2")),
        "boards[0].circuits[0].points[0].from",
        "loop",
        "ring",
    );
    refused(
        with("/boards/0/circuits/1/points", json!([])),
        "boards[0].circuits[1].points",
        "no points",
        "spare",
    );
    // A second branch starts at the board.
    let (site, _) = load(with(
        "/boards/0/circuits/0/points/-",
        json!({"id": "p3", "metres": 6, "from": "msb"}),
    ))
    .unwrap();
    assert_eq!(site.boards[0].circuits[0].points[2].from, None);
    // A point may be listed before the one it goes on from; it comes out after it.
    let points =
        json!([{"id": "a", "metres": 9, "from": "b"}, {"id": "b", "metres": 5, "from": "msb"}]);
    let (site, _) = load(with("/boards/0/circuits/1/points", points)).unwrap();
    let c2 = &site.boards[0].circuits[1];
    assert_eq!(
        (c2.points[0].id.as_str(), c2.points[1].from),
        ("b", Some(0))
    );
}

fn submain(id: &str, from: &str) -> Value {
    json!({"id": id, "fed_from": {"board": from, "metres": 40, "cable": {"mm2": 10, "pe_mm2": null}, "link": true},
           "circuits": [{"id": format!("{id}-c"), "points": [{"id": "p1", "metres": 5}]}]})
}

#[test]
fn submains() {
    let (site, _) = load(with("/boards/-", submain("shed", "msb"))).unwrap();
    let shed = &site.boards[1];
    assert!(shed.mains.is_empty());
    assert!(shed.earthing.as_ref().unwrap().link);
    assert_eq!(shed.circuits[0].main, None);
    refused(
        with("/boards/-", submain("shed", "mbs")),
        "boards[1].fed_from.board",
        "`mbs`",
        "msb",
    );
    let mut doc = with("/boards/-", submain("a", "b"));
    doc["boards"]
        .as_array_mut()
        .unwrap()
        .push(submain("b", "a"));
    refused(doc, "boards[", "loop: a from b from a", "service");
    refused(
        with("/boards/0/fed_from", json!({"board": "msb"})),
        "boards[0].fed_from",
        "loop: msb from msb",
        "service",
    );
    let mut doc = with("/boards/-", submain("shed", "msb"));
    doc["boards"][1]["fed_from"] = json!("service");
    refused(
        doc,
        "boards[1].fed_from",
        "both fed from the service",
        "one board",
    );
    // Boards come out in feeding order, whatever the file's.
    let mut doc = house();
    doc["boards"]
        .as_array_mut()
        .unwrap()
        .insert(0, submain("shed", "msb"));
    let (site, _) = load(doc).unwrap();
    assert_eq!((site.main_board, site.boards[0].id.as_str()), (0, "msb"));
    assert_eq!(site.equipment[0].at.board, 0);
}

#[test]
fn references() {
    refused(
        with("/boards/0/circuits/0/rcd", json!("rdc1")),
        "boards[0].circuits[0].rcd",
        "`rdc1`",
        "`rcd1`",
    );
    refused(
        with("/boards/0/circuits/0/main", json!("mian")),
        "boards[0].circuits[0].main",
        "`mian`",
        "`main`",
    );
    refused(
        with("/earthing/board", json!("mbs")),
        "earthing.board",
        "`mbs`",
        "`msb`",
    );
    refused(
        with("/equipment/0/at", json!("c1.p9")),
        "equipment[0].at",
        "no point `c1.p9`",
        "`c1.p1`",
    );
    refused(
        with("/equipment/0/at", json!("c1")),
        "equipment[0].at",
        "circuit, not a point",
        "c1.p2",
    );
    refused(
        with("/equipment/0/touches", json!(["watre"])),
        "equipment[0].touches[0]",
        "no bond `watre`",
        "`water`",
    );
    refused(
        with("/boards/0/rcds/0/after", json!("rcd3")),
        "boards[0].rcds[0].after",
        "`rcd3`",
        "rcd2",
    );
    let mut doc = with("/boards/0/rcds/0/after", json!("rcd2"));
    doc["boards"][0]["rcds"][1]["after"] = json!("rcd1");
    refused(doc, "boards[0].rcds[0].after", "loop", "upstream");
    refused(
        with(
            "/sources",
            json!([{"id": "pv", "kind": "pv-inverter", "at": "roof"}]),
        ),
        "sources[0].at",
        "`roof`",
        "",
    );
}

#[test]
fn no_circuits_at_all() {
    refused(
        with("/boards/0/circuits", json!([])),
        "boards",
        "no circuits",
        "add",
    );
    refused(with("/boards", json!([])), "boards", "no boards", "add");
}

#[test]
fn the_link_belongs_to_tn_c_s() {
    for system in ["TN-S", "TT"] {
        refused(
            with("/supply/system", json!(system)),
            "earthing.link",
            system,
            "TN-C-S",
        );
    }
    let mut doc = with("/supply/system", json!("TT"));
    doc["earthing"].as_object_mut().unwrap().remove("link");
    let (site, _) = load(doc).unwrap();
    assert!(!site.boards[0].earthing.as_ref().unwrap().link);
}

#[test]
fn phases() {
    refused(
        with("/boards/0/circuits/0/phase", json!("L2")),
        "boards[0].circuits[0].phase",
        "L1 alone",
        "three",
    );
    refused(
        with("/boards/0/circuits/0/phase", json!("L4")),
        "boards[0].circuits[0].phase",
        "`L4`",
        "L1",
    );
    refused(
        with("/boards/0/rcds/0/poles", json!(4)),
        "boards[0].rcds[0].poles",
        "4 poles",
        "three",
    );
    refused(
        with("/boards/0/main_switch/poles", json!(3)),
        "boards[0].main_switch.poles",
        "3 poles",
        "",
    );
    let mut doc = with("/supply/phases", json!(3));
    doc["boards"][0]["main_switch"]["poles"] = json!(4);
    doc["boards"][0]["circuits"][1]["phase"] = json!("L1L2L3");
    let (site, _) = load(doc.clone()).unwrap();
    assert_eq!(site.boards[0].circuits[1].phase, Phase::Three);
    doc["boards"][0]["circuits"][1]["rcd"] = json!("rcd2");
    refused(doc.clone(), "boards[0].rcds[1].poles", "2 poles", "4");
    doc["boards"][0]["rcds"][1]["poles"] = json!(4);
    // A submain of a three-phase board is on the line that its circuits name.
    let mut shed = submain("shed", "msb");
    shed["circuits"][0]["phase"] = json!("L3");
    doc["boards"].as_array_mut().unwrap().push(shed);
    let (site, _) = load(doc).unwrap();
    assert_eq!(site.board_phase(1), Phase::One(3));
    assert_eq!(site.rcd_phase(0, 1), Phase::Three);
}

#[test]
fn two_tariffs() {
    let mut doc = house();
    let board = doc["boards"][0].as_object_mut().unwrap();
    board.remove("main_switch");
    board.insert(
        "main_switches".into(),
        json!([{"id": "main"}, {"id": "main2", "tariff": "controlled load"}]),
    );
    doc["boards"][0]["circuits"][1]["main"] = json!("main2");
    let (site, _) = load(doc.clone()).unwrap();
    assert_eq!(site.boards[0].circuits[1].main.as_deref(), Some("main2"));
    doc["boards"][0]["circuits"][1]["rcd"] = json!("rcd1");
    refused(
        doc.clone(),
        "boards[0].rcds[0]",
        "different main switches",
        "own RCD",
    );
    doc["boards"][0]["main_switch"] = json!({"id": "main3"});
    refused(doc, "boards[0].main_switches", "both", "keep one");
}

#[test]
fn an_unknown_kind_of_equipment_is_other_with_a_warning() {
    let (site, warnings) = load(with("/equipment/0/kind", json!("kettel"))).unwrap();
    assert_eq!(site.equipment[0].kind, "other");
    assert!(
        warnings
            .iter()
            .any(|w| w.path == "equipment[0].kind" && w.text.contains("`kettle`")),
        "{warnings:?}"
    );
}

#[test]
fn a_thousand_circuits_load() {
    let mut doc = house();
    let circuits = doc["boards"][0]["circuits"].as_array_mut().unwrap();
    for i in 3..=1000 {
        circuits.push(
            json!({"id": format!("c{i}"), "rcd": "rcd1", "points": [{"id": "p1"}, {"id": "p2"}]}),
        );
    }
    let (site, warnings) = load(doc).unwrap();
    assert_eq!(site.boards[0].circuits.len(), 1000);
    assert!(
        warnings.len() < 6,
        "assumptions are gathered: {}",
        warnings.len()
    );
}

proptest::proptest! {
    #[test]
    fn any_text_is_answered(text in "\\PC{0,200}") {
        drop(load_str(&text, &Known::contract()));
    }

    #[test]
    fn a_cut_document_is_answered(cut in 0usize..1500) {
        let text = house().to_string();
        drop(load_str(&text[..cut.min(text.len())], &Known::contract()));
    }
}
