//! The embedded sites with knowledge's own checks, on the solved circuit: what a lost neutral makes of a test.

use super::*;
use crate::checks::catalogue;
use crate::knowledge::Knowledge;
use crate::network::{Edit, Network};
use crate::safety::Assessment;
use crate::safety::{Body, CircuitSimulator, Drawn, HazardBook, Hazards, Raised, World};
use crate::site::embedded;

struct Real {
    visit: Visit,
    network: Network,
    body: Body,
}

fn real(name: &str) -> Real {
    let knowledge = Knowledge::embedded().expect("knowledge");
    let site = load_str(embedded(name).expect("a site"), &Known::contract())
        .expect("sound")
        .0;
    let network = Network::new(&site, &knowledge).expect("a circuit");
    let checks = catalogue(&knowledge, &network, &site).expect("checks");
    let body = Body::from_rows(&knowledge.bodies, "wet", 5.0).expect("a body");
    let mut visit = Visit::new(site, checks);
    visit.numbers = knowledge.safety.clone();
    Real {
        visit,
        network,
        body,
    }
}

fn lost(branch: &str) -> Vec<Edit> {
    vec![Edit::Series {
        branch: branch.to_owned(),
        ohms: f64::INFINITY,
    }]
}

fn assess(real: &Real, check: &Check, edits: Vec<Edit>) -> Assessment {
    let mut book = HazardBook::new();
    let worlds = [World {
        id: "w".to_owned(),
        says: "it is so".to_owned(),
        p: 0.2,
        draws: 1,
    }];
    let mut simulator = CircuitSimulator::new(&real.network);
    let mut theta = real.network.params.points();
    for (path, id) in &real.network.params.by_path {
        if path.ends_with(".on") {
            theta[id.0] = 0.0;
        }
    }
    simulator.set("w", vec![Drawn { edits, theta }]);
    Hazards::new(&mut book, &worlds, &real.body, &mut simulator).assess(&real.visit.ground(), check)
}

fn hookup_check(real: &Real, pick: impl Fn(&Check) -> bool) -> Check {
    real.visit
        .catalogue
        .iter()
        .find(|c| pick(c))
        .expect("such a check")
        .clone()
}

#[test]
fn the_circuit_shows_what_a_loop_test_does_with_the_neutral_lost() {
    let real = real("house");
    let main = real.visit.site.boards[real.visit.site.main_board]
        .id
        .clone();
    let at_board = |c: &Check, limit: f64, above: bool| match &c.hookup {
        Hookup::Loop { between, amps } => {
            *between == pair(&format!("{main}.L"), &format!("{main}.N"))
                && (amps.unwrap_or(10.0) > limit) == above
        }
        _ => false,
    };
    let full = hookup_check(&real, |c| at_board(c, 1.0, true));
    let small = hookup_check(&real, |c| at_board(c, 1.0, false));
    let Some(Raised { volts, .. }) = assess(&real, &full, lost("service.N")).touch else {
        panic!("taps go up")
    };
    assert!(volts > 50.0, "{volts} V");
    assert_eq!(
        assess(&real, &full, Vec::new()).touch,
        None,
        "a sound neutral"
    );
    assert_eq!(
        assess(&real, &small, lost("service.N")).touch,
        None,
        "15 mA"
    );
}

#[test]
fn every_check_of_the_sites_is_cleared_or_refused_with_a_reason() {
    // The shop's thousands of pairs of circuits are alike.
    for (name, step) in [("house", 1), ("farm", 1), ("shop", 17)] {
        let real = real(name);
        let (mut cleared, mut all) = (0, 0);
        for check in real.visit.catalogue.iter().step_by(step) {
            all += 1;
            match real.visit.verdict(check) {
                Verdict::Cleared(found) => {
                    cleared += 1;
                    let ids: Vec<&String> = found.points().iter().map(|p| &p.point).collect();
                    let mut unique = ids.clone();
                    unique.sort();
                    unique.dedup();
                    assert_eq!(
                        ids.len(),
                        unique.len(),
                        "{name} {} {}: {ids:?}",
                        check.test,
                        check.at
                    );
                    for want in found.points().iter().flat_map(|p| &p.wants) {
                        for terminal in &want.between {
                            let known = real.network.circuit.terminal(terminal).is_ok();
                            assert!(
                                known,
                                "{name} {} {}: no terminal {terminal}",
                                check.test, check.at
                            );
                        }
                    }
                    for point in found.points() {
                        let setup = real
                            .network
                            .circuit
                            .switching(&point.setup, crate::network::Unnamed::Off);
                        assert!(
                            setup.is_ok(),
                            "{name} {} {}: {:?}",
                            check.test,
                            check.at,
                            setup.err()
                        );
                    }
                }
                Verdict::Refused(refusal) => assert!(!refusal.reason.is_empty()),
                Verdict::Held { why, .. } => panic!("{name} {}: held, {why}", check.test),
            }
        }
        assert!(cleared * 10 > all * 9, "{name}: {cleared} of {all}");
    }
}

#[test]
fn every_cleared_check_can_be_reached_by_its_points() {
    let mut visit = real("house").visit;
    let catalogue = visit.catalogue.clone();
    for needed in catalogue.iter().filter(|c| !c.proves.is_empty()) {
        let most = needed.proves.first().and_then(|p| p.most).unwrap_or(0.0);
        visit.read(needed, most * 0.5);
    }
    visit.apply(&StateEvent::Arranged(&Setup::default()));
    let proved = visit.state.clone();
    let mut rest: Vec<String> = Vec::new();
    // Every third: each form at some of its places.
    for check in catalogue.iter().step_by(3) {
        visit.state = proved.clone();
        let by_reading = |p: &HoldPoint| p.test.is_some() && !p.done;
        let points = visit.verdict(check).cleared().map(|c| c.points().to_vec());
        if points.is_none_or(|points| points.iter().any(by_reading)) {
            rest.push(format!("{} {}", check.test, check.at));
            continue;
        }
        visit.do_all(check);
        assert_eq!(visit.may_read(check), Ok(()), "{} {}", check.test, check.at);
        visit.read(check, 1.0);
        let open = visit.open(check);
        assert!(open.is_empty(), "{} {}: {open:?}", check.test, check.at);
    }
    assert!(rest.len() * 20 < catalogue.len(), "{rest:?}");
}
