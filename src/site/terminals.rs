//! Where a probe can go, what can be opened and what can be lifted (contract §2).

use std::collections::BTreeSet;

use super::lookup::lines_of;
use super::model::{Feed, Phase, Site};

/// Terminals of `head` for its lines, N where `n`, PE where `pe`.
fn conductors(into: &mut BTreeSet<String>, head: &str, phase: Phase, tails: &[&str]) {
    for conductor in lines_of(phase).iter().chain(tails) {
        into.insert(format!("{head}.{conductor}"));
    }
}

/// Every terminal of a site.
pub fn terminals(site: &Site) -> BTreeSet<String> {
    let mut all = BTreeSet::new();
    let tails: &[&str] = if site.feed_has_pe(site.main_board) {
        &["N", "PE"]
    } else {
        &["N"]
    };
    conductors(&mut all, "service", site.supply_phase(), tails);
    all.insert("soil".into());
    for (b, board) in site.boards.iter().enumerate() {
        let phase = site.board_phase(b);
        conductors(&mut all, &board.id, phase, &["N", "PE"]);
        for (r, rcd) in board.rcds.iter().enumerate() {
            conductors(
                &mut all,
                &format!("{}.{}", board.id, rcd.id),
                site.rcd_phase(b, r),
                &["N"],
            );
        }
        if let Feed::Submain { cable, .. } = &board.feed {
            let tails: &[&str] = if cable.pe_mm2.is_some() {
                &["N", "PE"]
            } else {
                &["N"]
            };
            conductors(&mut all, &format!("{}.feed", board.id), phase, tails);
            conductors(&mut all, &format!("{}.in", board.id), phase, &["N"]);
        }
        if board
            .earthing
            .as_ref()
            .is_some_and(|e| e.main_earth.is_some())
        {
            let main = b == site.main_board;
            all.insert(if main {
                "electrode".into()
            } else {
                format!("{}.electrode", board.id)
            });
        }
        for circuit in &board.circuits {
            conductors(&mut all, &circuit.id, circuit.phase, &["N", "PE"]);
            for point in &circuit.points {
                conductors(
                    &mut all,
                    &format!("{}.{}", circuit.id, point.id),
                    circuit.phase,
                    &["N", "PE"],
                );
            }
        }
    }
    all.extend(site.equipment.iter().map(|e| format!("{}.frame", e.id)));
    all.extend(site.bonds.iter().map(|b| format!("{}.pipe", b.id)));
    all
}

/// Every switching device: main switches, RCDs, breakers, the service fuse.
pub fn devices(site: &Site) -> BTreeSet<String> {
    let mut all = BTreeSet::from(["service.fuse".to_owned()]);
    for board in &site.boards {
        all.extend(board.mains.iter().map(|m| m.id.clone()));
        all.extend(board.rcds.iter().map(|r| r.id.clone()));
        all.extend(board.circuits.iter().map(|c| format!("{}.breaker", c.id)));
        if let Feed::Submain { .. } = board.feed {
            all.insert(format!("{}.breaker", board.id));
        }
    }
    all
}

/// Every conductor end that a test may lift; links as the installation is meant.
pub fn ends(site: &Site) -> BTreeSet<String> {
    let mut all = BTreeSet::new();
    for (b, board) in site.boards.iter().enumerate() {
        if let Some(earthing) = &board.earthing {
            if earthing.link {
                all.insert(format!("{}.link", board.id));
            }
            if earthing.main_earth.is_some() {
                all.insert(format!("{}.main-earth", board.id));
            }
        }
        match &board.feed {
            Feed::Service => {
                all.insert(format!("{}.main-neutral", board.id));
            }
            Feed::Submain { cable, .. } => {
                let tails: &[&str] = if cable.pe_mm2.is_some() {
                    &["N", "PE"]
                } else {
                    &["N"]
                };
                lifted(&mut all, &board.id, site.board_phase(b), tails);
            }
        }
        for circuit in &board.circuits {
            lifted(&mut all, &circuit.id, circuit.phase, &["N", "PE"]);
            all.extend(
                circuit
                    .points
                    .iter()
                    .map(|p| format!("{}.{}.split", circuit.id, p.id)),
            );
        }
    }
    all.extend(site.bonds.iter().map(|b| format!("{}.bond", b.id)));
    all
}

fn lifted(into: &mut BTreeSet<String>, head: &str, phase: Phase, tails: &[&str]) {
    for conductor in lines_of(phase).iter().chain(tails) {
        into.insert(format!("{head}.{conductor}@board"));
    }
}
