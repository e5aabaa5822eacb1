//! Whether the parts that a hookup touches may be supplied in a setup.
//!
//! A line is supplied where a way of closed devices leads to it from the street, or from a source that
//! can feed alone and is not off. Neutrals and earths are counted with the line of their part. It never
//! says dead: what is not supplied is still to be proved.

use std::collections::{BTreeMap, BTreeSet};

use crate::knowledge::{Hookup, Setup, SourceMode, UnplugSet};
use crate::site::{Feed, PointRef, Site, SourcePlace};

/// Whether anything that the hookup touches may be supplied.
///
/// Readings that need the supply (volts, amperes, loops, RCD tests, a device closed) are taken live
/// while anything of the site is supplied; dead readings and looks follow the parts they touch.
pub fn energised(setup: &Setup, hookup: &Hookup, site: &Site) -> bool {
    let live = supplied(setup, site);
    let touches = |id: &String| {
        parts_of(id, setup, site)
            .iter()
            .any(|part| live.contains(part))
    };
    match hookup {
        Hookup::Insulation {
            between: [a, b], ..
        } => a.iter().chain(b).any(touches),
        Hookup::Continuity { between } => between.iter().any(touches),
        Hookup::Seen { at, .. } => touches(at),
        _ => !live.is_empty(),
    }
}

/// The parts whose lines are supplied: `service`, the load side of each main switch by its id, a board
/// without one by the board's, RCDs, circuits, and submains as `shed.feed`.
pub fn supplied(setup: &Setup, site: &Site) -> BTreeSet<String> {
    let open = |device: &str| setup.open.iter().any(|d| d == device);
    let mut ways: BTreeMap<String, Vec<String>> = BTreeMap::new();
    let mut join = |a: &str, b: &str| {
        ways.entry(a.to_owned()).or_default().push(b.to_owned());
        ways.entry(b.to_owned()).or_default().push(a.to_owned());
    };
    for (index, board) in site.boards.iter().enumerate() {
        let incoming = match &board.feed {
            Feed::Service => "service".to_owned(),
            Feed::Submain {
                board: from, rcd, ..
            } => {
                let feed = format!("{}.feed", board.id);
                if !open(&format!("{}.breaker", board.id)) {
                    join(&rcd.clone().unwrap_or_else(|| bars(site, *from)), &feed);
                }
                feed
            }
        };
        if board.mains.is_empty() {
            join(&incoming, &board.id);
        }
        for main in board.mains.iter().filter(|main| !open(&main.id)) {
            join(&incoming, &main.id);
        }
        for rcd in board.rcds.iter().filter(|rcd| !open(&rcd.id)) {
            let hangs = board
                .circuits
                .iter()
                .find(|c| c.rcd.as_ref() == Some(&rcd.id));
            let main = hangs
                .and_then(|c| c.main.clone())
                .unwrap_or_else(|| bars(site, index));
            join(rcd.after.as_ref().unwrap_or(&main), &rcd.id);
        }
        for circuit in board
            .circuits
            .iter()
            .filter(|c| !open(&format!("{}.breaker", c.id)))
        {
            let lifted = setup
                .lift
                .iter()
                .any(|end| end.starts_with(&format!("{}.L", circuit.id)));
            if !lifted {
                let main = circuit.main.clone().unwrap_or_else(|| bars(site, index));
                join(circuit.rcd.as_ref().unwrap_or(&main), &circuit.id);
            }
        }
    }
    let mut edge: Vec<String> = Vec::new();
    if !open("service.fuse") {
        edge.push("service".to_owned());
    }
    for source in &site.sources {
        let alone = match setup.sources.get(&source.id) {
            Some(SourceMode::Off) => false,
            Some(SourceMode::Backup) => true,
            Some(SourceMode::On) | None => source.backup,
        };
        if alone {
            edge.push(match source.at {
                SourcePlace::Board(b) => bars(site, b),
                SourcePlace::Point(p) => site.circuit_of(p).id.clone(),
            });
        }
    }
    let mut live = BTreeSet::new();
    while let Some(part) = edge.pop() {
        edge.extend(
            ways.get(&part)
                .into_iter()
                .flatten()
                .filter(|next| !live.contains(*next))
                .cloned(),
        );
        live.insert(part);
    }
    live
}

/// The load side of a board's first main switch.
fn bars(site: &Site, board: usize) -> String {
    site.boards.get(board).map_or_else(String::new, |b| {
        b.mains.first().map_or(&b.id, |m| &m.id).clone()
    })
}

/// The parts, as [`supplied`] names them, that a terminal, end or place belongs to.
fn parts_of(id: &str, setup: &Setup, site: &Site) -> Vec<String> {
    let mut words = id.split(['.', '@']);
    let (head, next) = (
        words.next().unwrap_or_default(),
        words.next().unwrap_or_default(),
    );
    if head == "service" || site.circuit_index(head).is_some() {
        let cut = site
            .point_ref(&format!("{head}.{next}"))
            .is_some_and(|point| beyond_split(point, setup, site));
        return if cut {
            Vec::new()
        } else {
            vec![head.to_owned()]
        };
    }
    if let Some(board) = site.board_index(head).and_then(|b| site.boards.get(b)) {
        return match next {
            "feed" | "in" => vec![format!("{head}.feed")],
            rcd if board.rcds.iter().any(|r| r.id == rcd) => vec![rcd.to_owned()],
            _ if board.mains.is_empty() => vec![head.to_owned()],
            _ => board.mains.iter().map(|m| m.id.clone()).collect(),
        };
    }
    if site.rcd_index(head).is_some() || site.main_switch_index(head).is_some() {
        return vec![head.to_owned()];
    }
    let equipment = site
        .equipment_index(head)
        .and_then(|e| site.equipment.get(e));
    let here = equipment.filter(|e| !unplugged(&e.id, e.plug, setup));
    here.map(|e| parts_of(&site.point_id(e.at), setup, site))
        .unwrap_or_default()
}

fn unplugged(id: &str, plug: bool, setup: &Setup) -> bool {
    match &setup.unplug {
        UnplugSet::All(_) => plug,
        UnplugSet::These(list) => list.iter().any(|have| have == id),
    }
}

/// Whether the circuit is cut on the board's side of a point.
fn beyond_split(point: PointRef, setup: &Setup, site: &Site) -> bool {
    let circuit = site.circuit_of(point);
    let cut = |p: usize| {
        circuit.points.get(p).is_some_and(|p| {
            setup
                .lift
                .contains(&format!("{}.{}.split", circuit.id, p.id))
        })
    };
    let mut at = circuit.points.get(point.point).and_then(|p| p.from);
    for _ in 0..circuit.points.len() {
        match at {
            Some(p) if cut(p) => return true,
            Some(p) => at = circuit.points.get(p).and_then(|p| p.from),
            None => return false,
        }
    }
    false
}
