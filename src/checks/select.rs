//! The places that a check's `each` selects.

use crate::knowledge::EquipmentRow;
use crate::site::{Phase, Place, PointKind, PointRef, Site, Spot, circuit_pairs, holds, places};

/// One instance of a check to be: its place, its id, and names beyond those of the place.
#[derive(Clone, Debug, PartialEq)]
pub(crate) struct Instance {
    /// The place, `{at}`.
    pub place: Place,
    /// What `at` reads in the list of tests.
    pub at: String,
    /// `a`, `b`, `conductor`.
    pub extra: Vec<(&'static str, String)>,
}

/// Every instance of a selector of [`crate::knowledge::words::EACH`]; `None`: no such selector.
pub(crate) fn instances(
    each: &str,
    site: &Site,
    equipment: &[EquipmentRow],
) -> Option<Vec<Instance>> {
    let plain = |list: Vec<Place>| -> Vec<Instance> {
        list.into_iter()
            .map(|place| Instance {
                at: place.id.clone(),
                place,
                extra: Vec::new(),
            })
            .collect()
    };
    let main_board = || -> Vec<Place> {
        places(site, "board")
            .into_iter()
            .filter(|p| p.spot == Spot::Board(site.main_board))
            .collect()
    };
    let only = |class: &str, word: &str| -> Vec<Place> {
        places(site, class)
            .into_iter()
            .filter(|p| holds(word, p, site, equipment) == Some(true))
            .collect()
    };
    Some(match each {
        "once" | "main-board" => plain(main_board()),
        "board" | "rcd" | "circuit" | "point" | "bond" | "equipment" | "source" | "electrode" => {
            plain(places(site, each))
        }
        "sub-board" => plain(only("board", "submain")),
        "circuit-on-rcd" => plain(only("circuit", "on-rcd")),
        "plug-equipment" => plain(only("equipment", "plug")),
        "frame" => plain(only("equipment", "class-I")),
        "element" => plain(only("equipment", "element")),
        "outlet" => plain(
            places(site, "point")
                .into_iter()
                .filter(
                    |p| matches!(p.spot, Spot::Point(r) if site.point(r).kind == PointKind::Outlet),
                )
                .collect(),
        ),
        "joint" => {
            let mut all = places(site, "point");
            all.extend(places(site, "circuit"));
            all.extend(only("board", "submain"));
            plain(all)
        }
        "inner-point" => plain(
            places(site, "point")
                .into_iter()
                .filter(|p| matches!(p.spot, Spot::Point(r) if goes_on(site, r)))
                .collect(),
        ),
        "last-point" => plain(per_circuit(site, farthest)),
        "split" => plain(per_circuit(site, nearest_middle)),
        "main-line" => main_lines(site, main_board()),
        "circuit-pair" => pairs(site),
        _ => return None,
    })
}

/// Whether another point goes on from this one.
fn goes_on(site: &Site, point: PointRef) -> bool {
    site.circuit_of(point)
        .points
        .iter()
        .any(|p| p.from == Some(point.point))
}

/// A point of each circuit, chosen by the points' metres.
fn per_circuit(site: &Site, choose: impl Fn(&[f64]) -> Option<usize>) -> Vec<Place> {
    let points = places(site, "point");
    let mut out = Vec::new();
    for circuit in places(site, "circuit") {
        let own: Vec<&Place> = points
            .iter()
            .filter(|p| p.circuit(site) == circuit.circuit(site))
            .collect();
        let metres: Vec<f64> = own
            .iter()
            .filter_map(|p| p.point(site))
            .map(|p| site.point(p).metres)
            .collect();
        out.extend(
            choose(&metres)
                .and_then(|i| own.get(i))
                .map(|p| (*p).clone()),
        );
    }
    out
}

fn farthest(metres: &[f64]) -> Option<usize> {
    (0..metres.len())
        .rev()
        .max_by(|&a, &b| metres[a].total_cmp(&metres[b]))
}

/// Of at least three points, the one nearest to half the longest, never the last.
fn nearest_middle(metres: &[f64]) -> Option<usize> {
    let end = farthest(metres).filter(|_| metres.len() >= 3)?;
    let middle = 0.5 * metres[end];
    (0..metres.len()).filter(|&i| i != end).min_by(|&a, &b| {
        (metres[a] - middle)
            .abs()
            .total_cmp(&(metres[b] - middle).abs())
    })
}

fn main_lines(site: &Site, boards: Vec<Place>) -> Vec<Instance> {
    if site.supply_phase() != Phase::Three {
        return Vec::new();
    }
    let line = |place: &Place, line: &str| Instance {
        at: format!("{}.{line}", place.id),
        place: place.clone(),
        extra: vec![("conductor", line.to_owned())],
    };
    boards
        .iter()
        .flat_map(|place| ["L1", "L2", "L3"].map(|l| line(place, l)))
        .collect()
}

/// Pairs of circuits on different neutral bars; the place is the first.
fn pairs(site: &Site) -> Vec<Instance> {
    let circuits = places(site, "circuit");
    let find = |b, c| circuits.iter().find(|p| p.spot == Spot::Circuit(b, c));
    circuit_pairs(site)
        .into_iter()
        .filter_map(|(b, c, d)| Some((find(b, c)?, find(b, d)?)))
        .filter(|(a, b)| a.bus(site) != b.bus(site))
        .map(|(a, b)| Instance {
            place: a.clone(),
            at: format!("{}+{}", a.id, b.id),
            extra: vec![("a", a.id.clone()), ("b", b.id.clone())],
        })
        .collect()
}
