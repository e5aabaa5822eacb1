//! Which tests belong to a fault's place: the re-tests that its repair owes, the look that confirms it.

use super::engine::Engine;
use super::event::TestAt;
use super::limits::place_of;
use crate::checks::Check;
use crate::faults::Fault;
use crate::site::place;

/// Places round a fault, the nearest first: itself, its other end, its point, circuit, RCD, board.
fn round(engine: &Engine, fault: &Fault) -> Vec<String> {
    let site = engine.site();
    let mut ids = vec![fault.at.clone()];
    ids.extend(fault.to.clone());
    let classes = engine
        .knowledge()
        .fault(&fault.kind)
        .map(|kind| kind.at.clone())
        .unwrap_or_default();
    if let Some(place) = place::find(site, &classes, &fault.at) {
        ids.extend(place.point(site).map(|point| site.point_id(point)));
        let circuit = place
            .circuit(site)
            .and_then(|(b, c)| site.boards.get(b)?.circuits.get(c));
        ids.extend(circuit.map(|circuit| circuit.id.clone()));
        ids.extend(place.rcd(site).map(|(_, rcd)| rcd.to_owned()));
        ids.extend(
            site.boards
                .get(place.board(site))
                .map(|board| board.id.clone()),
        );
    }
    ids
}

/// How far a test is from a fault: the first of the places round it that the test is at, or inside of.
fn distance(engine: &Engine, round: &[String], check: &Check) -> usize {
    let is_at = |id: &String| {
        check.at.split('+').any(|part| {
            part == id
                || part
                    .strip_prefix(id.as_str())
                    .is_some_and(|r| r.starts_with('.'))
        })
    };
    let own_board = || {
        let board = place_of(engine, &check.at).map(|place| place.board(engine.site()));
        let board = board
            .and_then(|b| engine.site().boards.get(b))
            .map(|b| b.id.as_str());
        usize::from(board != round.last().map(String::as_str))
    };
    round
        .iter()
        .position(is_at)
        .unwrap_or_else(|| round.len() + own_board())
}

/// The test of this id that fits a fault's place best; ties in the catalogue's order.
pub fn nearest_check<'a>(engine: &'a Engine, test: &str, fault: &Fault) -> Option<&'a Check> {
    let round = round(engine, fault);
    engine
        .checks()
        .iter()
        .filter(|check| check.test == test)
        .min_by_key(|check| distance(engine, &round, check))
}

/// The re-tests that the repair of these faults owes, each once, in the order of their rows.
pub fn owed(engine: &Engine, faults: &[Fault]) -> Vec<TestAt> {
    let mut all: Vec<TestAt> = Vec::new();
    for fault in faults {
        let Some(kind) = engine.knowledge().fault(&fault.kind) else {
            continue;
        };
        for test in &kind.repair.rechecks {
            if let Some(key) = nearest_check(engine, test, fault).map(Engine::key)
                && !all.contains(&key)
            {
                all.push(key);
            }
        }
    }
    all
}
