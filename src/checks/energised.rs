//! Whether the parts that a hookup touches may be supplied in a setup.
//!
//! A line is supplied where a way of closed devices leads to it from the street, or from a source that
//! can feed alone and is not off. Neutrals and earths are counted with the line of their part. It never
//! says dead: what is not supplied is still to be proved.

use std::collections::BTreeSet;

use crate::knowledge::{Hookup, Setup, SourceMode, UnplugSet};
use crate::site::{Site, Topology};

/// Whether anything that the hookup touches may be supplied.
///
/// Readings that need the supply (volts, amperes, loops, RCD tests, a device closed) are taken live
/// while anything of the site is supplied; dead readings and looks follow the parts they touch.
pub fn energised(setup: &Setup, hookup: &Hookup, site: &Site) -> bool {
    energised_in(&Topology::new(site), setup, hookup, site)
}

/// As [`energised`], on the site's graph built once for many checks.
pub fn energised_in(topology: &Topology, setup: &Setup, hookup: &Hookup, site: &Site) -> bool {
    let touched: Vec<&String> = match hookup {
        Hookup::Insulation {
            between: [a, b], ..
        } => a.iter().chain(b).collect(),
        Hookup::Continuity { between } => between.iter().collect(),
        Hookup::Seen { at, .. } => vec![at],
        _ => {
            return !setup.open.iter().any(|d| d == "service.fuse")
                || !alone(setup, site).is_empty();
        }
    };
    let live = supplied_in(topology, setup, site);
    touched.into_iter().any(|id| {
        parts_of(id, setup, site)
            .iter()
            .any(|part| live.contains(part.as_str()))
    })
}

/// The parts whose lines are supplied, by the ids of [`Topology`]: `service`, the load side of each main
/// switch by its id, boards, RCDs, circuits, points, equipment, and submains as `shed.feed`, `shed.in`.
pub fn supplied(setup: &Setup, site: &Site) -> BTreeSet<String> {
    supplied_in(&Topology::new(site), setup, site)
        .into_iter()
        .map(str::to_owned)
        .collect()
}

fn supplied_in<'t>(topology: &'t Topology, setup: &Setup, site: &Site) -> BTreeSet<&'t str> {
    let open = setup.open.iter().cloned().collect();
    let lifted = setup.lift.iter().cloned().collect();
    let mut live = topology.supplied(&open, &lifted, &alone(setup, site));
    live.remove("network");
    live
}

/// Sources that may feed the site alone in this setup.
fn alone<'s>(setup: &Setup, site: &'s Site) -> Vec<&'s str> {
    let may = site
        .sources
        .iter()
        .filter(|source| match setup.sources.get(&source.id) {
            Some(SourceMode::Off) => false,
            Some(SourceMode::Backup) => true,
            Some(SourceMode::On) | None => source.backup,
        });
    may.map(|source| source.id.as_str()).collect()
}

/// The parts, as [`supplied`] names them, that a terminal, end or place belongs to.
fn parts_of(id: &str, setup: &Setup, site: &Site) -> Vec<String> {
    let mut words = id.split(['.', '@']);
    let (head, next) = (
        words.next().unwrap_or_default(),
        words.next().unwrap_or_default(),
    );
    if head == "service" || site.circuit_index(head).is_some() {
        let point = format!("{head}.{next}");
        let found = site.point_ref(&point).is_some();
        return vec![if found { point } else { head.to_owned() }];
    }
    if let Some(board) = site.board_index(head).and_then(|b| site.boards.get(b)) {
        return match next {
            "feed" | "in" => vec![format!("{head}.{next}")],
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
