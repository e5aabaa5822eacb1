//! Where in a site an id points: the places that faults, complaints and looks can be at.

use std::collections::BTreeMap;

use super::model::{Feed, PointRef, Site};

/// A place, resolved; its id is that of contract §1, §2 and §5.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord)]
pub enum Spot {
    /// `service`.
    Service,
    /// `network`.
    Network,
    /// A board, by its index.
    Board(usize),
    /// A main switch: board, main switch.
    Main(usize, usize),
    /// An RCD: board, RCD.
    Rcd(usize, usize),
    /// A circuit: board, circuit.
    Circuit(usize, usize),
    /// A circuit's breaker, `c1.breaker`.
    Breaker(usize, usize),
    /// A submain's breaker, `shed.breaker`, by the board that it feeds.
    SubmainBreaker(usize),
    /// A point.
    Point(PointRef),
    /// Equipment, by its index.
    Equipment(usize),
    /// A bond, by its index.
    Bond(usize),
    /// `electrode` of the main board, `shed.electrode` of another: by the board.
    Electrode(usize),
    /// A source, by its index.
    Source(usize),
}

impl Spot {
    /// Reads an id; `None`: there is no such place.
    pub fn read(site: &Site, id: &str) -> Option<Self> {
        let has_electrode = |board: usize| {
            site.boards[board]
                .earthing
                .as_ref()
                .is_some_and(|e| e.main_earth.is_some())
        };
        match id {
            "service" => return Some(Self::Service),
            "network" => return Some(Self::Network),
            "electrode" => {
                return has_electrode(site.main_board).then_some(Self::Electrode(site.main_board));
            }
            _ => {}
        }
        if let Some((head, tail)) = id.split_once('.') {
            return match tail {
                "breaker" => match site.circuit_index(head) {
                    Some((b, c)) => Some(Self::Breaker(b, c)),
                    None => site
                        .board_index(head)
                        .filter(|b| matches!(site.boards[*b].feed, Feed::Submain { .. }))
                        .map(Self::SubmainBreaker),
                },
                "electrode" => site
                    .board_index(head)
                    .filter(|b| *b != site.main_board && has_electrode(*b))
                    .map(Self::Electrode),
                _ => site.point_ref(id).map(Self::Point),
            };
        }
        site.board_index(id)
            .map(Self::Board)
            .or_else(|| site.circuit_index(id).map(|(b, c)| Self::Circuit(b, c)))
            .or_else(|| site.rcd_index(id).map(|(b, r)| Self::Rcd(b, r)))
            .or_else(|| site.main_switch_index(id).map(|(b, m)| Self::Main(b, m)))
            .or_else(|| site.equipment_index(id).map(Self::Equipment))
            .or_else(|| site.bond_index(id).map(Self::Bond))
            .or_else(|| site.source_index(id).map(Self::Source))
    }

    /// Its id. Panics on a place that is not of this site.
    pub fn id(self, site: &Site) -> String {
        match self {
            Self::Service => "service".into(),
            Self::Network => "network".into(),
            Self::Board(b) => site.boards[b].id.clone(),
            Self::Main(b, m) => site.boards[b].mains[m].id.clone(),
            Self::Rcd(b, r) => site.boards[b].rcds[r].id.clone(),
            Self::Circuit(b, c) => site.boards[b].circuits[c].id.clone(),
            Self::Breaker(b, c) => format!("{}.breaker", site.boards[b].circuits[c].id),
            Self::SubmainBreaker(b) => format!("{}.breaker", site.boards[b].id),
            Self::Point(at) => site.point_id(at),
            Self::Equipment(e) => site.equipment[e].id.clone(),
            Self::Bond(b) => site.bonds[b].id.clone(),
            Self::Electrode(b) if b == site.main_board => "electrode".into(),
            Self::Electrode(b) => format!("{}.electrode", site.boards[b].id),
            Self::Source(s) => site.sources[s].id.clone(),
        }
    }

    /// Its class, as fault kinds and complaints name it.
    pub fn class(self) -> &'static str {
        match self {
            Self::Service => "service",
            Self::Network => "network",
            Self::Board(_) => "board",
            Self::Main(..) => "main-switch",
            Self::Rcd(..) => "rcd",
            Self::Circuit(..) => "circuit",
            Self::Breaker(..) | Self::SubmainBreaker(_) => "breaker",
            Self::Point(_) => "point",
            Self::Equipment(_) => "equipment",
            Self::Bond(_) => "bond",
            Self::Electrode(_) => "electrode",
            Self::Source(_) => "source",
        }
    }
}

/// Every place of a site by its id, main switches and breakers among them.
pub fn spots(site: &Site) -> BTreeMap<String, Spot> {
    let mut all = vec![Spot::Service, Spot::Network];
    for (b, board) in site.boards.iter().enumerate() {
        all.push(Spot::Board(b));
        all.extend((0..board.mains.len()).map(|m| Spot::Main(b, m)));
        all.extend((0..board.rcds.len()).map(|r| Spot::Rcd(b, r)));
        for c in 0..board.circuits.len() {
            all.push(Spot::Circuit(b, c));
            all.push(Spot::Breaker(b, c));
        }
        if matches!(board.feed, Feed::Submain { .. }) {
            all.push(Spot::SubmainBreaker(b));
        }
        if board
            .earthing
            .as_ref()
            .is_some_and(|e| e.main_earth.is_some())
        {
            all.push(Spot::Electrode(b));
        }
    }
    all.extend(site.points().map(Spot::Point));
    all.extend((0..site.equipment.len()).map(Spot::Equipment));
    all.extend((0..site.bonds.len()).map(Spot::Bond));
    all.extend((0..site.sources.len()).map(Spot::Source));
    all.into_iter().map(|p| (p.id(site), p)).collect()
}
