//! The site as a graph: what feeds what, through which device, and what stays supplied when devices are open.
//!
//! Vertices are parts whose line conductors are one: the network, the service, the load side of each
//! main switch, RCD and breaker, both ends of a submain, every point. Edges lead away from the supply;
//! each is a device or a run of cable. A source that backfeeds is walked from against the arrows.

use std::collections::{BTreeMap, BTreeSet};

use petgraph::Direction;
use petgraph::stable_graph::{NodeIndex, StableDiGraph};
use petgraph::visit::{Dfs, EdgeFiltered, EdgeRef, UndirectedAdaptor};

use super::lookup::lines_of;
use super::model::{Board, Feed, Phase, Site, SourcePlace};

/// What joins two parts.
#[derive(Clone, Debug, PartialEq)]
pub enum Joint {
    /// A switching device by its id; it opens the lines, and N where `neutral`. Lifting all of `ends` parts it too.
    Device {
        /// Id of contract §2.
        id: String,
        /// Opens N too.
        neutral: bool,
        /// Line ends landed there, `c1.L@board`.
        ends: Vec<String>,
    },
    /// A run of cable, m, parted by the `split` of the point where it starts.
    Cable {
        /// Length.
        metres: f64,
        /// `c1.p1.split`.
        split: Option<String>,
    },
}

impl Joint {
    fn is_closed(&self, open: &BTreeSet<String>, lifted: &BTreeSet<String>) -> bool {
        match self {
            Self::Device { id, ends, .. } => {
                let parted = !ends.is_empty() && ends.iter().all(|end| lifted.contains(end));
                !open.contains(id) && !parted
            }
            Self::Cable { split, .. } => !split.as_ref().is_some_and(|end| lifted.contains(end)),
        }
    }
}

/// The site as a graph.
#[derive(Clone, Debug)]
pub struct Topology {
    graph: StableDiGraph<Vec<String>, Joint>,
    by_id: BTreeMap<String, NodeIndex>,
}

impl Topology {
    /// Builds the graph of a site.
    pub fn new(site: &Site) -> Self {
        let mut t = Self {
            graph: StableDiGraph::new(),
            by_id: BTreeMap::new(),
        };
        let network = t.part("network");
        let service = t.under(network, "service", device("service.fuse", false));
        for board in &site.boards {
            t.board(site, board, service);
        }
        for equipment in &site.equipment {
            t.also(&site.point_id(equipment.at), &equipment.id);
        }
        for source in &site.sources {
            let at = match source.at {
                SourcePlace::Board(b) => site.boards[b].id.clone(),
                SourcePlace::Point(p) => site.point_id(p),
            };
            t.also(&at, &source.id);
        }
        t
    }

    fn part(&mut self, id: &str) -> NodeIndex {
        let node = self.graph.add_node(vec![id.to_owned()]);
        self.by_id.insert(id.to_owned(), node);
        node
    }

    fn under(&mut self, upstream: NodeIndex, id: &str, joint: Joint) -> NodeIndex {
        let node = self.part(id);
        self.graph.add_edge(upstream, node, joint);
        node
    }

    /// A further id of a part.
    fn also(&mut self, part: &str, id: &str) {
        if let Some(&node) = self.by_id.get(part) {
            self.graph[node].push(id.to_owned());
            self.by_id.insert(id.to_owned(), node);
        }
    }

    fn board(&mut self, site: &Site, board: &Board, service: NodeIndex) {
        let incoming = match &board.feed {
            Feed::Service => service,
            Feed::Submain {
                board: from,
                rcd,
                metres,
                phase,
                ..
            } => {
                let from = &site.boards[*from].id;
                let upstream = self.by_id[rcd.as_ref().unwrap_or(from)];
                let breaker = breaker(&board.id, *phase);
                let feed = self.under(upstream, &format!("{}.feed", board.id), breaker);
                self.under(
                    feed,
                    &format!("{}.in", board.id),
                    Joint::Cable {
                        metres: *metres,
                        split: None,
                    },
                )
            }
        };
        for main in &board.mains {
            self.under(
                incoming,
                &main.id,
                device(&main.id, main.switches_neutral()),
            );
        }
        match board.mains.first() {
            Some(main) => self.also(&main.id, &board.id),
            // Without a main switch the bars are where the cable ends.
            None => {
                let id = self.graph[incoming][0].clone();
                self.also(&id, &board.id);
            }
        }
        let mut left: Vec<_> = board.rcds.iter().collect();
        while !left.is_empty() {
            let before = left.len();
            left.retain(|rcd| {
                let hung = board
                    .circuits
                    .iter()
                    .find(|c| c.rcd.as_ref() == Some(&rcd.id));
                let main = hung.and_then(|c| c.main.as_ref()).unwrap_or(&board.id);
                let Some(&upstream) = self.by_id.get(rcd.after.as_ref().unwrap_or(main)) else {
                    return true;
                };
                self.under(upstream, &rcd.id, device(&rcd.id, rcd.poles != 1));
                false
            });
            if left.len() == before {
                break; // A loop of `after`, which loading refuses.
            }
        }
        for circuit in &board.circuits {
            let upstream = circuit
                .rcd
                .as_ref()
                .or(circuit.main.as_ref())
                .unwrap_or(&board.id);
            let Some(&upstream) = self.by_id.get(upstream) else {
                continue;
            };
            let breaker = breaker(&circuit.id, circuit.phase);
            let head = self.under(upstream, &circuit.id, breaker);
            let mut nodes: Vec<NodeIndex> = Vec::with_capacity(circuit.points.len());
            for point in &circuit.points {
                let (from, at, split) = match point.from {
                    Some(i) => {
                        let before = &circuit.points[i];
                        (
                            nodes[i],
                            before.metres,
                            Some(format!("{}.{}.split", circuit.id, before.id)),
                        )
                    }
                    None => (head, 0.0, None),
                };
                let cable = Joint::Cable {
                    metres: point.metres - at,
                    split,
                };
                nodes.push(self.under(from, &format!("{}.{}", circuit.id, point.id), cable));
            }
        }
    }

    /// The part that an id stands for; a device `c1.breaker` stands for its load side.
    fn node(&self, id: &str) -> Option<NodeIndex> {
        self.by_id.get(id).copied().or_else(|| match id {
            "service.fuse" => self.by_id.get("service").copied(),
            _ => {
                let head = id.strip_suffix(".breaker")?;
                self.by_id
                    .get(&format!("{head}.feed"))
                    .or_else(|| self.by_id.get(head))
                    .copied()
            }
        })
    }

    fn upstream(&self, node: NodeIndex) -> Option<(NodeIndex, &Joint)> {
        let edge = self
            .graph
            .edges_directed(node, Direction::Incoming)
            .next()?;
        Some((edge.source(), edge.weight()))
    }

    /// Nodes from a part to the network, the part itself first.
    fn chain(&self, from: NodeIndex) -> Vec<NodeIndex> {
        let mut chain = vec![from];
        let mut at = from;
        while let Some((up, _)) = self.upstream(at) {
            chain.push(up);
            at = up;
        }
        chain
    }

    /// Devices between a place and the network, the nearest first, `service.fuse` last; empty for a place
    /// that is no part of the graph (a bond, an electrode).
    pub fn upstream_devices(&self, place: &str) -> Vec<String> {
        self.devices_above(place, false)
    }

    /// Of those, the ones that open the neutral with the lines.
    pub fn neutral_devices(&self, place: &str) -> Vec<String> {
        self.devices_above(place, true)
    }

    fn devices_above(&self, place: &str, with_neutral: bool) -> Vec<String> {
        let Some(node) = self.node(place) else {
            return Vec::new();
        };
        let joints = self
            .chain(node)
            .into_iter()
            .filter_map(|n| self.upstream(n).map(|(_, joint)| joint));
        joints
            .filter_map(|joint| match joint {
                Joint::Device { id, neutral, .. } if *neutral || !with_neutral => Some(id.clone()),
                _ => None,
            })
            .collect()
    }

    /// Every id fed through a device or a place, itself left out: parts, points, equipment, sources.
    pub fn downstream(&self, device_or_place: &str) -> BTreeSet<String> {
        let mut out = BTreeSet::new();
        let Some(start) = self.node(device_or_place) else {
            return out;
        };
        let mut walk = Dfs::new(&self.graph, start);
        while let Some(node) = walk.next(&self.graph) {
            out.extend(self.graph[node].iter().cloned());
        }
        out.remove(device_or_place);
        out
    }

    /// The closest device upstream of all the places; `None`: a place is not in the graph.
    pub fn common_device(&self, places: &[&str]) -> Option<String> {
        let (first, rest) = places.split_first()?;
        let others: Vec<BTreeSet<String>> = rest
            .iter()
            .map(|p| self.upstream_devices(p).into_iter().collect())
            .collect();
        self.upstream_devices(first)
            .into_iter()
            .find(|d| others.iter().all(|set| set.contains(d)))
    }

    /// The parts that current passes from one place to another, both ends in, by their first ids; empty:
    /// a place is not in the graph.
    pub fn path(&self, from: &str, to: &str) -> Vec<String> {
        let (Some(a), Some(b)) = (self.node(from), self.node(to)) else {
            return Vec::new();
        };
        let (up, down) = (self.chain(a), self.chain(b));
        let Some(turn) = up.iter().position(|n| down.contains(n)) else {
            return Vec::new();
        };
        let back = down.iter().position(|n| *n == up[turn]).unwrap_or(0);
        let nodes = up[..=turn].iter().chain(down[..back].iter().rev());
        nodes.map(|n| self.graph[*n][0].clone()).collect()
    }

    /// Metres of cable between a place and the network's end at the service.
    pub fn metres(&self, place: &str) -> Option<f64> {
        let joints = self
            .chain(self.node(place)?)
            .into_iter()
            .filter_map(|n| self.upstream(n));
        Some(
            joints
                .map(|(_, joint)| {
                    if let Joint::Cable { metres, .. } = joint {
                        *metres
                    } else {
                        0.0
                    }
                })
                .sum(),
        )
    }

    /// Every id whose lines a way of closed devices and landed ends joins to the network or to one of the
    /// `backfeeds` (ids of places or sources that feed alone). What is not in it is still to be proved dead.
    pub fn supplied(
        &self,
        open: &BTreeSet<String>,
        lifted: &BTreeSet<String>,
        backfeeds: &[&str],
    ) -> BTreeSet<&str> {
        let closed =
            EdgeFiltered::from_fn(&self.graph, |edge| edge.weight().is_closed(open, lifted));
        let both_ways = UndirectedAdaptor(&closed);
        let mut out = BTreeSet::new();
        let starts = std::iter::once("network").chain(backfeeds.iter().copied());
        for start in starts.filter_map(|id| self.node(id)) {
            let mut walk = Dfs::new(both_ways, start);
            while let Some(node) = walk.next(both_ways) {
                out.extend(self.graph[node].iter().map(String::as_str));
            }
        }
        out
    }
}

fn device(id: &str, neutral: bool) -> Joint {
    Joint::Device {
        id: id.to_owned(),
        neutral,
        ends: Vec::new(),
    }
}

/// The breaker of a circuit or submain, with the line ends landed on it.
fn breaker(of: &str, phase: Phase) -> Joint {
    let ends = lines_of(phase)
        .iter()
        .map(|line| format!("{of}.{line}@board"))
        .collect();
    Joint::Device {
        id: format!("{of}.breaker"),
        neutral: false,
        ends,
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::site::{Known, embedded, load_str, samples, spots};

    fn farm() -> Topology {
        Topology::new(
            &load_str(embedded("farm").unwrap(), &Known::contract())
                .unwrap()
                .0,
        )
    }

    fn set(ids: &[&str]) -> BTreeSet<String> {
        ids.iter().map(|id| (*id).to_owned()).collect()
    }

    #[test]
    fn devices_upstream_in_order() {
        let t = Topology::new(&samples::small());
        assert_eq!(
            t.upstream_devices("c1.p2"),
            ["c1.breaker", "rcd1", "main", "service.fuse"]
        );
        assert_eq!(t.upstream_devices("kettle"), t.upstream_devices("c1.p1"));
        assert_eq!(t.neutral_devices("c1.p2"), ["rcd1"]);
        assert_eq!(
            t.upstream_devices("s1.p1"),
            [
                "s1.breaker",
                "rcd3",
                "shed-main",
                "shed.breaker",
                "main",
                "service.fuse"
            ]
        );
        assert!(t.upstream_devices("water").is_empty());
        let farm = farm();
        assert_eq!(
            farm.upstream_devices("h1.p1"),
            ["h1.breaker", "rcd1", "rcd0", "main", "service.fuse"]
        );
        assert_eq!(farm.neutral_devices("shed"), ["shed-main", "rcd0", "main"]);
    }

    #[test]
    fn what_is_fed_through_a_device() {
        let t = Topology::new(&samples::small());
        let behind: Vec<String> = t.downstream("c1.breaker").into_iter().collect();
        assert_eq!(
            behind,
            ["c1", "c1.p1", "c1.p2", "c1.p3", "fridge", "kettle"]
        );
        assert!(t.downstream("shed.breaker").contains("s1.p1"));
        let beyond: Vec<String> = t.downstream("c1.p1").into_iter().collect();
        assert_eq!(beyond, ["c1.p2", "c1.p3", "fridge", "kettle"]);
        assert!(t.downstream("nowhere").is_empty());
    }

    #[test]
    fn common_devices_and_paths() {
        let t = Topology::new(&samples::small());
        assert_eq!(
            t.common_device(&["c1.p1", "c1.p3"]).as_deref(),
            Some("c1.breaker")
        );
        assert_eq!(
            t.common_device(&["c1.p1", "c2.p1"]).as_deref(),
            Some("main")
        );
        assert_eq!(t.common_device(&["c1.p1", "nowhere"]), None);
        assert_eq!(t.path("c1.p2", "c1.p3"), ["c1.p2", "c1.p1", "c1.p3"]);
        assert_eq!(
            t.path("c1.p1", "c2.p1"),
            ["c1.p1", "c1", "rcd1", "main", "rcd2", "c2", "c2.p1"]
        );
        assert_eq!(t.metres("s1.p1"), Some(46.0));
    }

    #[test]
    fn an_open_device_leaves_only_what_is_fed_another_way() {
        let t = Topology::new(&samples::small());
        let all = t.supplied(&set(&[]), &set(&[]), &[]);
        assert!(all.contains("c1.p2") && all.contains("shed"));
        let open = set(&["rcd1"]);
        let left = t.supplied(&open, &set(&[]), &[]);
        assert!(!left.contains("c1") && left.contains("c2.p1"));
        // A generator on the board keeps all of it alive with the main switch open, but not the service.
        let farm = farm();
        let open = set(&["main"]);
        assert!(!farm.supplied(&open, &set(&[]), &[]).contains("h1.p1"));
        let fed = farm.supplied(&open, &set(&[]), &["gen"]);
        assert!(fed.contains("h1.p1") && fed.contains("shed"));
        let open = set(&["main", "service.fuse"]);
        assert!(
            !farm
                .supplied(&open, &set(&[]), &["gen"])
                .contains("service")
        );
    }

    #[test]
    fn a_lifted_end_or_a_cut_parts_what_is_beyond() {
        let t = Topology::new(&samples::small());
        let left = t.supplied(&set(&[]), &set(&["c1.L@board"]), &[]);
        assert!(!left.contains("c1.p1") && left.contains("rcd1"));
        let left = t.supplied(&set(&[]), &set(&["c1.N@board", "c1.p1.split"]), &[]);
        assert!(left.contains("c1.p1") && !left.contains("c1.p2") && !left.contains("fridge"));
        // One line of three lifted leaves two that are fed.
        let shop = Topology::new(
            &load_str(embedded("shop").unwrap(), &Known::contract())
                .unwrap()
                .0,
        );
        assert!(
            shop.supplied(&set(&[]), &set(&["sales.L1@board"]), &[])
                .contains("sales")
        );
        let all = set(&["sales.L1@board", "sales.L2@board", "sales.L3@board"]);
        assert!(!shop.supplied(&set(&[]), &all, &[]).contains("sales"));
    }

    #[test]
    fn every_circuit_of_every_embedded_site_hangs_on_the_network() {
        for name in ["house", "farm", "shop"] {
            let site = load_str(embedded(name).unwrap(), &Known::contract())
                .unwrap()
                .0;
            let t = Topology::new(&site);
            let all = t.supplied(&set(&[]), &set(&[]), &[]);
            for (id, spot) in spots(&site) {
                if matches!(
                    spot.class(),
                    "board" | "rcd" | "circuit" | "point" | "equipment" | "source"
                ) {
                    assert!(all.contains(id.as_str()), "{name}: {id}");
                }
            }
        }
    }
}
