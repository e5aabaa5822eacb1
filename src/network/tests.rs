//! Worked examples of the trade's reference (E01, E11, E20, E22 …) on a tiny house, and the quick
//! solver against the exact one.

use std::collections::BTreeMap;

use super::*;
use crate::knowledge::{Load, UnplugSet};

const TINY: &str = r#"{
  "schema": "straypath-site/1", "name": "tiny (invented)", "words": "au-nz",
  "supply": {"phases": 1, "volts": 230, "system": "TN-C-S", "network_ohms": 0.0, "network_earth_ohms": 1.0,
             "service": {"metres": 0.001, "mm2": 16}},
  "earthing": {"board": "msb", "main_earth": {"metres": 0.001, "mm2": 6}, "electrode_ohms": 50,
    "bonds": [{"id": "water", "metres": 0.001, "mm2": 4, "pipe_ohms": 2, "street_metal": false}]},
  "boards": [{"id": "msb", "fed_from": "service", "main_switch": {"id": "main", "amps": 63, "poles": 1},
    "rcds": [{"id": "rcd1", "ma": 30}, {"id": "rcd2", "ma": 30}],
    "circuits": [
      {"id": "c1", "rcd": "rcd1", "breaker": {"curve": "C", "amps": 20}, "cable": {"mm2": 2.5},
       "points": [{"id": "p1", "metres": 10}, {"id": "p2", "metres": 20}]},
      {"id": "c2", "rcd": "rcd2", "breaker": {"curve": "C", "amps": 20}, "cable": {"mm2": 2.5},
       "points": [{"id": "p1", "metres": 12}]}]}],
  "equipment": [{"id": "kettle", "kind": "kettle", "at": "c1.p1", "watts": 2400},
                {"id": "hotplate", "kind": "other", "at": "c2.p1", "watts": 1000, "class": "I"}]
}"#;

fn network() -> Network {
    let knowledge = Knowledge::embedded().unwrap();
    let (site, _) = crate::site::load_str(
        TINY,
        &crate::site::Known::new(
            &knowledge.equipment,
            knowledge.rules.iter().map(|r| r.id.as_str()),
        ),
    )
    .unwrap();
    Network::new(&site, &knowledge).unwrap()
}

fn ideal() -> BTreeMap<String, Option<f64>> {
    [
        ("cable.farads_per_metre", Some(0.0)),
        ("cable.insulation_ohm_metres", None),
        ("cable.reactance_per_metre", Some(0.0)),
        ("kettle.leak_farads", Some(0.0)),
        ("hotplate.leak_farads", Some(0.0)),
        ("water.pipe_ohms", Some(1e12)),
    ]
    .into_iter()
    .map(|(k, v)| (k.to_owned(), v))
    .collect()
}

fn number(p: Result<Prediction, NetworkError>) -> f64 {
    match p.unwrap().outcome {
        Outcome::Number(x) => x,
        Outcome::Word(w) => panic!("{w:?}"),
    }
}

fn volts(a: &str, b: &str) -> Hookup {
    Hookup::Volts {
        between: [a.to_owned(), b.to_owned()],
        meter: Some(crate::knowledge::Meter::Ohms(1e12)),
    }
}

fn on(id: &str) -> Setup {
    Setup {
        on: vec![id.to_owned()],
        ..Setup::default()
    }
}

fn close(got: f64, want: f64, rel: f64) {
    assert!(
        (got - want).abs() <= rel * want.abs().max(1e-6),
        "{got} against {want}"
    );
}

#[test]
fn e01_a_lost_service_neutral_lifts_the_earth_bar() {
    let n = network();
    let open = [Edit::Series {
        branch: "service.N".to_owned(),
        ohms: f64::INFINITY,
    }];
    let read =
        |a: &str, b: &str| number(n.predict(&open, &on("kettle"), &volts(a, b), &ideal(), false));
    // trade.md E01 (computed): 230 V, 22.0417 Ω, R_A 50, R_B 1; the cable adds 0.1482 Ω.
    let load = 230.0 * 230.0 / 2400.0;
    let loop_ohms = load + 2.0 * 10.0 * 7.41e-3 + 50.0 + 1.0;
    close(read("msb.PE", "soil"), 230.0 / loop_ohms * 50.0, 1e-5);
    close(read("c1.p1.L", "c1.p1.N"), 230.0 / loop_ohms * load, 1e-5);
    assert!(read("msb.N", "msb.PE") < 1e-9);
    let amps = Hookup::Amps {
        around: vec!["msb.main-earth".to_owned()],
    };
    close(
        number(n.predict(&open, &on("kettle"), &amps, &ideal(), false)),
        230.0 / loop_ohms,
        1e-5,
    );
    let rcd = Hookup::Amps {
        around: vec!["msb.rcd1.L".to_owned(), "msb.rcd1.N".to_owned()],
    };
    assert!(number(n.predict(&open, &on("kettle"), &rcd, &ideal(), false)) < 1e-9);
}

#[test]
fn e22_a_missing_link_shows_in_the_earth_loop_only() {
    let n = network();
    let missing = [Edit::Series {
        branch: "msb.link".to_owned(),
        ohms: f64::INFINITY,
    }];
    let impedance = |b: &str| Hookup::Loop {
        between: ["c1.p1.L".to_owned(), b.to_owned()],
        amps: None,
    };
    let cable = 2.0 * 10.0 * 7.41e-3;
    let earth = number(n.predict(
        &missing,
        &Setup::default(),
        &impedance("c1.p1.PE"),
        &ideal(),
        false,
    ));
    // The electrode's 50 Ω, then soil to the two halves of the network's earth: 2 ∥ 2 Ω with 0 Ω between.
    close(earth, cable + 50.0 + 1.0, 1e-4);
    close(
        number(n.predict(
            &missing,
            &Setup::default(),
            &impedance("c1.p1.N"),
            &ideal(),
            false,
        )),
        cable,
        1e-4,
    );
}

#[test]
fn e08a_a_neutral_on_the_wrong_bar_unbalances_both_rcds() {
    let n = network();
    let moved = [Edit::Move {
        end: "c1.N@board".to_owned(),
        to: "msb.rcd2.N".to_owned(),
    }];
    let sum = |rcd: &str| Hookup::Amps {
        around: vec![format!("msb.{rcd}.L"), format!("msb.{rcd}.N")],
    };
    let load = 230.0 / (230.0 * 230.0 / 2400.0 + 2.0 * 10.0 * 7.41e-3);
    close(
        number(n.predict(&moved, &on("kettle"), &sum("rcd1"), &ideal(), false)),
        load,
        1e-5,
    );
    close(
        number(n.predict(&moved, &on("kettle"), &sum("rcd2"), &ideal(), false)),
        load,
        1e-5,
    );
    let holds = Hookup::Holds {
        device: "rcd1".to_owned(),
    };
    let p = n
        .predict(&moved, &on("kettle"), &holds, &ideal(), false)
        .unwrap();
    assert_eq!(p.outcome, Outcome::Word(Word::Trips));
    let p = n
        .predict(&moved, &Setup::default(), &holds, &ideal(), false)
        .unwrap();
    assert_eq!(p.outcome, Outcome::Word(Word::Holds));
}

#[test]
fn e18a_a_ramp_reads_the_threshold_less_the_standing_leakage_as_phasors() {
    let n = network();
    let mut values = ideal();
    values.insert("rcd1.trip_amps".to_owned(), Some(0.022));
    let ramp = Hookup::Ramp {
        rcd: "rcd1".to_owned(),
        at: None,
    };
    let leak = |ohms: f64| Edit::Shunt {
        between: ["c1.p1.L".to_owned(), "c1.p1.PE".to_owned()],
        ohms,
        when: None,
    };
    // In phase: 22 − 8 = 14 mA; in quadrature: √(22² − 8²) = 20.4939 mA (trade.md E18a).
    let resistive = leak(230.0 / 0.008);
    close(
        number(n.predict(&[resistive], &Setup::default(), &ramp, &values, false)),
        0.014,
        1e-4,
    );
    let farads = 0.008 / (230.0 * 2.0 * std::f64::consts::PI * 50.0);
    let cap = Edit::Capacitor {
        between: ["c1.p1.L".to_owned(), "c1.p1.PE".to_owned()],
        farads,
    };
    close(
        number(n.predict(&[cap], &Setup::default(), &ramp, &values, false)),
        0.0204939,
        1e-4,
    );
}

#[test]
fn insulation_of_a_lifted_circuit_is_the_fault_alone() {
    let n = network();
    let leak = [Edit::Shunt {
        between: ["c1.p2.N".to_owned(), "c1.p2.PE".to_owned()],
        ohms: 40e3,
        when: None,
    }];
    let setup = Setup {
        open: vec!["main".to_owned(), "c1.breaker".to_owned()],
        lift: vec!["c1.N@board".to_owned()],
        unplug: UnplugSet::All(crate::knowledge::procedure::AllWord::All),
        ..Setup::default()
    };
    let hookup = Hookup::Insulation {
        between: [vec!["c1.N".to_owned()], vec!["c1.PE".to_owned()]],
        test_volts: 500.0,
    };
    close(
        number(n.predict(&leak, &setup, &hookup, &ideal(), false)),
        40e3 + 2.0 * 20.0 * 7.41e-3,
        1e-9,
    );
    let p = n.predict(&[], &setup, &hookup, &ideal(), false).unwrap();
    assert_eq!(p.outcome, Outcome::Number(f64::INFINITY));
}

#[test]
fn the_quick_solver_agrees_with_the_exact_one() {
    let n = network();
    let mut theta = n.point_values(&BTreeMap::new()).unwrap();
    for zero in [n.common.joint, n.common.contact] {
        theta[zero.0] = 0.005;
    }
    theta[n.params.id("supply.network_ohms").unwrap().0] = 0.3;
    let values = Values {
        theta: &theta,
        common: &n.common,
    };
    let worlds: Vec<Vec<Edit>> = vec![
        vec![],
        vec![Edit::Series {
            branch: "service.N".to_owned(),
            ohms: f64::INFINITY,
        }],
        vec![Edit::Series {
            branch: "into c1.p2.PE".to_owned(),
            ohms: f64::INFINITY,
        }],
        vec![Edit::SwapService],
        vec![Edit::Swap {
            at: "c1.p1".to_owned(),
            conductors: ["L".to_owned(), "PE".to_owned()],
        }],
        vec![Edit::Element {
            equipment: "kettle".to_owned(),
            position: 0.3,
            ohms: 5000.0,
        }],
    ];
    let dead = Setup {
        open: vec!["main".to_owned()],
        lift: vec!["c1.N@board".to_owned()],
        ..Setup::default()
    };
    let loaded = Setup {
        load: vec![Load {
            at: "c1.p2".to_owned(),
            watts: 2000.0,
        }],
        ..on("hotplate")
    };
    let two = |a: &str, b: &str| [a.to_owned(), b.to_owned()];
    let hookups = [
        Hookup::Volts {
            between: two("msb.PE", "soil"),
            meter: None,
        },
        Hookup::Volts {
            between: two("c1.p2.L", "c1.p2.PE"),
            meter: None,
        },
        Hookup::Volts {
            between: two("kettle.frame", "soil"),
            meter: None,
        },
        Hookup::Amps {
            around: vec!["c1.L".to_owned(), "c1.N".to_owned()],
        },
        Hookup::Amps {
            around: vec!["water.bond".to_owned()],
        },
        Hookup::Loop {
            between: two("c1.p2.L", "c1.p2.PE"),
            amps: Some(0.015),
        },
        Hookup::Continuity {
            between: two("msb.PE", "c1.p2.PE"),
        },
        Hookup::Insulation {
            between: [
                vec!["c1.L".to_owned(), "c1.N".to_owned()],
                vec!["c1.PE".to_owned()],
            ],
            test_volts: 500.0,
        },
    ];
    let mut compared = 0;
    for edits in &worlds {
        let wiring = Wiring::new(n.edited(edits).unwrap());
        let quick = QuickSolver::new(&wiring, values);
        let exact = ExactSolver {
            circuit: &wiring.circuit,
            values,
        };
        for setup in [&Setup::default(), &dead, &loaded] {
            let sw = wiring.circuit.switching(setup, Unnamed::Off).unwrap();
            for hookup in &hookups {
                let probe = wiring.circuit.probe(hookup, &setup.on).unwrap();
                for protection in [false, true] {
                    let (q, e) = (
                        read(&quick, &probe, &sw, protection),
                        read(&exact, &probe, &sw, protection),
                    );
                    match (q.outcome, e.outcome) {
                        (Outcome::Number(q), Outcome::Number(e)) if e.is_finite() => {
                            assert!(
                                (q - e).abs() <= 1e-6 * e.abs() + 1e-7,
                                "{edits:?} {hookup:?} {q} {e}"
                            );
                        }
                        (q, e) => assert_eq!(q, e, "{edits:?} {hookup:?}"),
                    }
                    compared += 1;
                }
            }
        }
    }
    assert_eq!(compared, 6 * 3 * 8 * 2);
}
