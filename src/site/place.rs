//! Places of a site by class, and the names that templates of knowledge take at each of them.

use super::lookup::lines_of;
use super::model::{Feed, Phase, PointRef, Site, SourcePlace};
use super::names::name_of;
use super::spot::Spot;
use super::words::words;

/// A place: its id and where it is.
#[derive(Clone, Debug, PartialEq)]
pub struct Place {
    /// Id as contract §5 writes it.
    pub id: String,
    /// Where it is.
    pub spot: Spot,
}

/// Every place of a class (`service`, `network`, `board`, `point`, `circuit`, `equipment`, `rcd`, `bond`,
/// `electrode`, `source`), in the file's order; empty for a class this site has nothing of.
pub fn places(site: &Site, class: &str) -> Vec<Place> {
    let place = |id: String, spot| Place { id, spot };
    match class {
        "service" => vec![place("service".into(), Spot::Service)],
        "network" => vec![place("network".into(), Spot::Network)],
        "board" => each_board(site, |b| {
            vec![place(site.boards[b].id.clone(), Spot::Board(b))]
        }),
        "circuit" => each_board(site, |b| {
            let circuits = site.boards[b].circuits.iter().enumerate();
            circuits
                .map(|(c, circuit)| place(circuit.id.clone(), Spot::Circuit(b, c)))
                .collect()
        }),
        "point" => each_board(site, |board| {
            let circuits = site.boards[board].circuits.iter().enumerate();
            circuits
                .flat_map(|(circuit, it)| {
                    it.points.iter().enumerate().map(move |(point, p)| {
                        place(
                            format!("{}.{}", it.id, p.id),
                            Spot::Point(PointRef {
                                board,
                                circuit,
                                point,
                            }),
                        )
                    })
                })
                .collect()
        }),
        "rcd" => each_board(site, |b| {
            let rcds = site.boards[b].rcds.iter().enumerate();
            rcds.map(|(r, rcd)| place(rcd.id.clone(), Spot::Rcd(b, r)))
                .collect()
        }),
        "electrode" => each_board(site, |b| {
            let has = site.boards[b]
                .earthing
                .as_ref()
                .is_some_and(|e| e.main_earth.is_some());
            let id = if b == site.main_board {
                "electrode".to_owned()
            } else {
                format!("{}.electrode", site.boards[b].id)
            };
            if has {
                vec![place(id, Spot::Electrode(b))]
            } else {
                Vec::new()
            }
        }),
        "equipment" => site
            .equipment
            .iter()
            .enumerate()
            .map(|(i, e)| place(e.id.clone(), Spot::Equipment(i)))
            .collect(),
        "bond" => site
            .bonds
            .iter()
            .enumerate()
            .map(|(i, b)| place(b.id.clone(), Spot::Bond(i)))
            .collect(),
        "source" => site
            .sources
            .iter()
            .enumerate()
            .map(|(i, s)| place(s.id.clone(), Spot::Source(i)))
            .collect(),
        _ => Vec::new(),
    }
}

fn each_board(site: &Site, f: impl Fn(usize) -> Vec<Place>) -> Vec<Place> {
    (0..site.boards.len()).flat_map(f).collect()
}

/// The place of that id, if it is of one of the classes given.
pub fn find(site: &Site, classes: &[String], id: &str) -> Option<Place> {
    Spot::read(site, id)
        .filter(|spot| classes.iter().any(|class| class == spot.class()))
        .map(|spot| Place {
            id: id.to_owned(),
            spot,
        })
}

impl Place {
    /// The circuit it belongs to, as board and circuit index.
    pub fn circuit(&self, site: &Site) -> Option<(usize, usize)> {
        match self.spot {
            Spot::Circuit(b, c) => Some((b, c)),
            Spot::Point(_) | Spot::Equipment(_) | Spot::Source(_) => {
                self.point(site).map(|p| (p.board, p.circuit))
            }
            _ => None,
        }
    }

    /// The point it is or hangs on.
    pub fn point(&self, site: &Site) -> Option<PointRef> {
        match self.spot {
            Spot::Point(p) => Some(p),
            Spot::Equipment(e) => site.equipment.get(e).map(|e| e.at),
            Spot::Source(s) => match site.sources.get(s)?.at {
                SourcePlace::Point(p) => Some(p),
                SourcePlace::Board(_) => None,
            },
            _ => None,
        }
    }

    /// The board it is at; of the service, the network, a bond: the main board.
    pub fn board(&self, site: &Site) -> usize {
        match self.spot {
            Spot::Board(b) | Spot::Circuit(b, _) | Spot::Rcd(b, _) | Spot::Electrode(b) => b,
            Spot::Source(s) if self.point(site).is_none() => {
                match site.sources.get(s).map(|s| &s.at) {
                    Some(SourcePlace::Board(b)) => *b,
                    _ => site.main_board,
                }
            }
            _ => self.point(site).map_or(site.main_board, |p| p.board),
        }
    }

    /// The RCD next upstream of it, as board and RCD id: of a circuit's part its circuit's, of a
    /// board that of its submain, of an RCD itself.
    pub fn rcd<'a>(&self, site: &'a Site) -> Option<(usize, &'a str)> {
        if let Spot::Rcd(b, r) = self.spot {
            return site
                .boards
                .get(b)?
                .rcds
                .get(r)
                .map(|rcd| (b, rcd.id.as_str()));
        }
        if let Some((b, c)) = self.circuit(site) {
            return site
                .boards
                .get(b)?
                .circuits
                .get(c)?
                .rcd
                .as_deref()
                .map(|r| (b, r));
        }
        match (self.spot, &site.boards.get(self.board(site))?.feed) {
            (Spot::Board(_), Feed::Submain { board, rcd, .. }) => {
                rcd.as_deref().map(|r| (*board, r))
            }
            _ => None,
        }
    }

    /// What its bars hang on, as terminals name it: the RCD as `msb.rcd1`, else the board as `msb`; of a
    /// board that a submain feeds, the bars of the board that feeds it.
    pub fn bus(&self, site: &Site) -> String {
        let id = |b: usize| {
            site.boards
                .get(b)
                .map_or_else(String::new, |b| b.id.clone())
        };
        match self.rcd(site) {
            Some((b, rcd)) => format!("{}.{rcd}", id(b)),
            None => id(self.feeding_board(site)),
        }
    }

    /// The board where its conductors come from: of a board that a submain feeds the feeding one, else
    /// the place's own.
    pub fn feeding_board(&self, site: &Site) -> usize {
        let own = self.board(site);
        match (self.spot, site.boards.get(own).map(|b| &b.feed)) {
            (Spot::Board(_), Some(Feed::Submain { board, .. })) => *board,
            _ => own,
        }
    }

    /// The main switch that feeds it: of a circuit's part the circuit's, else the first of its board.
    pub fn main<'a>(&self, site: &'a Site) -> Option<&'a str> {
        if let Some((b, c)) = self.circuit(site) {
            return site.boards.get(b)?.circuits.get(c)?.main.as_deref();
        }
        site.boards
            .get(self.board(site))?
            .mains
            .first()
            .map(|m| m.id.as_str())
    }

    /// What a person calls it.
    pub fn name(&self, site: &Site) -> String {
        name_of(site, &self.id)
    }

    /// What a name in braces of [`crate::knowledge::words`] stands for at this place alone; `None`: the
    /// place has no such thing, or the name needs more than a place (`to`, `a`, `b`, `conductor`).
    pub fn names(&self, site: &Site, name: &str) -> Option<String> {
        if let Some(word) = site.word(name) {
            return Some(word.to_owned());
        }
        let board = || site.boards.get(self.feeding_board(site));
        let circuit = || {
            self.circuit(site)
                .and_then(|(b, c)| site.boards.get(b)?.circuits.get(c))
        };
        match name {
            "at" => Some(self.id.clone()),
            "at-name" => Some(self.name(site)),
            "board" => board().map(|b| b.id.clone()),
            "board-name" => board().map(|b| b.name.clone()),
            "circuit" => circuit().map(|c| c.id.clone()),
            "circuit-name" => circuit().map(|c| c.name.clone()),
            "point" => self.point(site).map(|p| site.point_id(p)),
            "rcd" => self.rcd(site).map(|(_, id)| id.to_owned()),
            "bus" => Some(self.bus(site)),
            "main" => self.main(site).map(str::to_owned),
            _ => None,
        }
    }
}

impl Site {
    /// The trade's word for a conductor or thing, in this site's words.
    pub fn word(&self, name: &str) -> Option<&'static str> {
        words(self).word(name)
    }

    /// A conductor `L`, `L2`, `N`, `PE` in this site's words.
    pub fn conductor_name(&self, conductor: &str) -> String {
        words(self).conductor(conductor)
    }

    /// Phases of the part that terminals name so: `service`, `msb`, `msb.rcd1`, `rcd1`, `c1`, `c1.p1`,
    /// `shed.feed`, `shed.in`; of equipment those of its circuit.
    pub fn phase_of(&self, part: &str) -> Option<Phase> {
        if part == "service" || part == "network" {
            return Some(self.supply_phase());
        }
        let (head, tail) = part.split_once('.').unwrap_or((part, ""));
        if let Some((b, r)) = self.rcd_index(if tail.is_empty() { head } else { tail }) {
            return Some(self.rcd_phase(b, r));
        }
        if let Some((b, c)) = self.circuit_index(head) {
            return Some(self.boards[b].circuits[c].phase);
        }
        if let Some(e) = self.equipment_index(head) {
            return Some(self.circuit_of(self.equipment[e].at).phase);
        }
        self.board_index(head).map(|b| self.board_phase(b))
    }

    /// A terminal, end or branch whose `L` is made the line it means: on a part with three lines
    /// `line` (`L1` unless told), on one with a single line `L` as it is.
    ///
    /// Understands `X.L`, `X.L@board`, `into X.L`, `cord X.L`.
    pub fn on_line(&self, text: &str, line: Option<&str>) -> String {
        let (body, landed) = text
            .split_once('@')
            .map_or((text, None), |(body, at)| (body, Some(at)));
        let Some(part) = body.strip_suffix(".L") else {
            return text.to_owned();
        };
        let bare = part.rsplit(' ').next().unwrap_or(part);
        if self.phase_of(bare).map(lines_of) != Some(&["L1", "L2", "L3"]) {
            return text.to_owned();
        }
        let line = line
            .filter(|l| l.len() == 2 && l.starts_with('L'))
            .unwrap_or("L1");
        landed.map_or_else(
            || format!("{part}.{line}"),
            |at| format!("{part}.{line}@{at}"),
        )
    }
}

/// Circuits on a board above which only neighbours in the list are paired.
const CROWDED: usize = 12;
/// How far apart in the list two circuits of a crowded board may be.
const NEAR: usize = 4;

/// Pairs of circuits of one board, as `(board, first, second)` with `first < second`: all of them, but on
/// a board with more than twelve only those listed within four of each other, since cables that share
/// a wall are listed together and all pairs would grow as the square.
pub fn circuit_pairs(site: &Site) -> Vec<(usize, usize, usize)> {
    let mut out = Vec::new();
    for (b, board) in site.boards.iter().enumerate() {
        let n = board.circuits.len();
        let reach = if n > CROWDED { NEAR } else { n };
        for c in 0..n {
            out.extend((c + 1..n.min(c + reach + 1)).map(|d| (b, c, d)));
        }
    }
    out
}
