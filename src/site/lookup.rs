//! Finding things of a site by id, and the conductors that each of them has.

use super::model::{Board, Circuit, Equipment, Feed, Phase, Point, PointRef, Rcd, Site, System};

/// Names of the line conductors of a part: `L`, or `L1` `L2` `L3` (contract §2).
pub fn lines_of(phase: Phase) -> &'static [&'static str] {
    match phase {
        Phase::One(_) => &["L"],
        Phase::Three => &["L1", "L2", "L3"],
    }
}

impl Site {
    /// Index of a board.
    pub fn board_index(&self, id: &str) -> Option<usize> {
        self.boards.iter().position(|b| b.id == id)
    }

    /// Indices of board and main switch.
    pub fn main_switch_index(&self, id: &str) -> Option<(usize, usize)> {
        self.boards
            .iter()
            .enumerate()
            .find_map(|(b, board)| board.mains.iter().position(|m| m.id == id).map(|m| (b, m)))
    }

    /// Indices of board and RCD.
    pub fn rcd_index(&self, id: &str) -> Option<(usize, usize)> {
        self.boards
            .iter()
            .enumerate()
            .find_map(|(b, board)| board.rcds.iter().position(|r| r.id == id).map(|r| (b, r)))
    }

    /// An RCD.
    pub fn rcd(&self, id: &str) -> Option<&Rcd> {
        self.boards
            .iter()
            .flat_map(|b| &b.rcds)
            .find(|r| r.id == id)
    }

    /// Indices of board and circuit.
    pub fn circuit_index(&self, id: &str) -> Option<(usize, usize)> {
        self.boards.iter().enumerate().find_map(|(b, board)| {
            board
                .circuits
                .iter()
                .position(|c| c.id == id)
                .map(|c| (b, c))
        })
    }

    /// A point by its id in the file, `c1.p1`.
    pub fn point_ref(&self, id: &str) -> Option<PointRef> {
        let (circuit_id, point_id) = id.split_once('.')?;
        let (board, circuit) = self.circuit_index(circuit_id)?;
        let point = self.boards[board].circuits[circuit]
            .points
            .iter()
            .position(|p| p.id == point_id)?;
        Some(PointRef {
            board,
            circuit,
            point,
        })
    }

    /// Index of a piece of equipment.
    pub fn equipment_index(&self, id: &str) -> Option<usize> {
        self.equipment.iter().position(|e| e.id == id)
    }

    /// Index of a bond.
    pub fn bond_index(&self, id: &str) -> Option<usize> {
        self.bonds.iter().position(|b| b.id == id)
    }

    /// Index of a source.
    pub fn source_index(&self, id: &str) -> Option<usize> {
        self.sources.iter().position(|s| s.id == id)
    }

    /// The circuit of a point. Panics on a reference that is not of this site.
    pub fn circuit_of(&self, at: PointRef) -> &Circuit {
        &self.boards[at.board].circuits[at.circuit]
    }

    /// A point. Panics on a reference that is not of this site.
    pub fn point(&self, at: PointRef) -> &Point {
        &self.circuit_of(at).points[at.point]
    }

    /// A point's id in the file, `c1.p1`. Panics on a reference that is not of this site.
    pub fn point_id(&self, at: PointRef) -> String {
        format!("{}.{}", self.circuit_of(at).id, self.point(at).id)
    }

    /// Every point, in the file's order.
    pub fn points(&self) -> impl Iterator<Item = PointRef> + '_ {
        self.boards.iter().enumerate().flat_map(|(board, b)| {
            b.circuits.iter().enumerate().flat_map(move |(circuit, c)| {
                (0..c.points.len()).map(move |point| PointRef {
                    board,
                    circuit,
                    point,
                })
            })
        })
    }

    /// Equipment at a point.
    pub fn equipment_at(&self, at: PointRef) -> impl Iterator<Item = &Equipment> + '_ {
        self.equipment.iter().filter(move |e| e.at == at)
    }

    /// Whether cables go on from a point.
    pub fn goes_on(&self, at: PointRef) -> bool {
        self.circuit_of(at)
            .points
            .iter()
            .any(|p| p.from == Some(at.point))
    }

    /// Phases of the supply.
    pub fn supply_phase(&self) -> Phase {
        if self.supply.phases == 3 {
            Phase::Three
        } else {
            Phase::One(1)
        }
    }

    /// Phases on a board's bars.
    pub fn board_phase(&self, board: usize) -> Phase {
        match &self.boards[board].feed {
            Feed::Service => self.supply_phase(),
            Feed::Submain { phase, .. } => *phase,
        }
    }

    /// Phases of an RCD: three with four poles, else the line of what hangs on it.
    pub fn rcd_phase(&self, board: usize, rcd: usize) -> Phase {
        let home = &self.boards[board];
        let device = &home.rcds[rcd];
        if device.poles == 4 {
            return Phase::Three;
        }
        if let Phase::One(line) = self.board_phase(board) {
            return Phase::One(line);
        }
        self.lines_on_rcd(board, home, &device.id, 0)
            .unwrap_or(Phase::One(1))
    }

    fn lines_on_rcd(&self, index: usize, home: &Board, id: &str, depth: usize) -> Option<Phase> {
        let hangs = |rcd: &Option<String>| rcd.as_deref() == Some(id);
        let circuit = home
            .circuits
            .iter()
            .find(|c| hangs(&c.rcd))
            .map(|c| c.phase);
        let submain = || {
            self.boards.iter().find_map(|b| match &b.feed {
                Feed::Submain {
                    board, rcd, phase, ..
                } if *board == index && hangs(rcd) => Some(*phase),
                _ => None,
            })
        };
        let next = || {
            // The depth stops a chain longer than the number of devices, which checking refuses.
            let next = home
                .rcds
                .iter()
                .find(|r| hangs(&r.after) && depth < home.rcds.len())?;
            self.lines_on_rcd(index, home, &next.id, depth + 1)
        };
        circuit.or_else(submain).or_else(next)
    }

    /// Whether a protective conductor reaches a board from its feed: the service's on TN-S, a submain's as laid.
    pub fn feed_has_pe(&self, board: usize) -> bool {
        match &self.boards[board].feed {
            Feed::Service => self.supply.system == System::TnS,
            Feed::Submain { cable, .. } => cable.pe_mm2.is_some(),
        }
    }
}
