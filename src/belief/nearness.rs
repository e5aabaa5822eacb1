//! How near a fault's place is to the one that a complaint names.

use crate::site::{PointRef, Site, Spot};

/// How near.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(super) enum Near {
    /// At it, or what it names: a circuit's end at the board told, equipment at the point told.
    Here,
    /// On the same circuit, at the same board, behind the RCD told.
    Around,
    /// Elsewhere.
    Away,
}

/// How near a fault is to the place told.
pub(super) fn near(site: &Site, fault: &str, told: &str) -> Near {
    if fault == told {
        return Near::Here;
    }
    let (Some(fault), Some(told)) = (Spot::read(site, fault), Spot::read(site, told)) else {
        return Near::Away;
    };
    let point = point_of(site, told);
    if point.is_some() && point == point_of(site, fault) {
        return Near::Here;
    }
    let circuit = circuit_of(site, fault);
    match told {
        Spot::Service | Spot::Network => match fault {
            Spot::Service | Spot::Network => Near::Here,
            Spot::Board(b) if b == site.main_board => Near::Around,
            _ => Near::Away,
        },
        Spot::Board(b) => match fault {
            Spot::Circuit(home, _) | Spot::Rcd(home, _) | Spot::Electrode(home) if home == b => {
                Near::Here
            }
            _ if circuit.is_some_and(|(home, _)| home == b) => Near::Around,
            _ => Near::Away,
        },
        Spot::Circuit(..) | Spot::Breaker(..)
            if circuit.is_some() && circuit == circuit_of(site, told) =>
        {
            Near::Here
        }
        Spot::Rcd(b, r) => {
            let rcd =
                |(home, c): (usize, usize)| site.boards.get(home)?.circuits.get(c)?.rcd.as_deref();
            let own = site
                .boards
                .get(b)
                .and_then(|board| board.rcds.get(r))
                .map(|rcd| rcd.id.as_str());
            if own.is_some() && circuit.and_then(rcd) == own {
                Near::Around
            } else {
                Near::Away
            }
        }
        _ if circuit.is_some() && circuit == circuit_of(site, told) => Near::Around,
        _ => Near::Away,
    }
}

fn point_of(site: &Site, spot: Spot) -> Option<PointRef> {
    match spot {
        Spot::Point(point) => Some(point),
        Spot::Equipment(e) => site.equipment.get(e).map(|e| e.at),
        _ => None,
    }
}

fn circuit_of(site: &Site, spot: Spot) -> Option<(usize, usize)> {
    match spot {
        Spot::Circuit(b, c) | Spot::Breaker(b, c) => Some((b, c)),
        other => point_of(site, other).map(|p| (p.board, p.circuit)),
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::site::samples::small;

    #[test]
    fn the_place_told_names_what_belongs_to_it() {
        let site = small();
        let near = |fault, told| near(&site, fault, told);
        assert_eq!(near("c1.p1", "c1.p1"), Near::Here);
        assert_eq!(near("kettle", "c1.p1"), Near::Here);
        assert_eq!(near("c1.p2", "c1.p1"), Near::Around);
        assert_eq!(near("c2.p1", "c1.p1"), Near::Away);
        assert_eq!(near("c1", "msb"), Near::Here);
        assert_eq!(near("c1.p2", "msb"), Near::Around);
        assert_eq!(near("s1.p1", "msb"), Near::Away);
        assert_eq!(near("c1.p2", "rcd1"), Near::Around);
        assert_eq!(near("c1.p2", "c1.breaker"), Near::Here);
        assert_eq!(near("service", "c1.p1"), Near::Away);
        assert_eq!(near("network", "service"), Near::Here);
    }
}
