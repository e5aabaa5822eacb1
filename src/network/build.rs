//! Site → circuit: nodes, branches and devices by the words of contract §1 and §2.
//!
//! Long because it is the site file's every key, once, in the order of the current.

use std::collections::BTreeMap;

use super::NetworkError;
use super::circuit::{Circuit, DeviceKind, Emf, Item, Law, Needs};
use super::params::{Common, ParamTable};
use crate::knowledge::Knowledge;
use crate::site::{
    Board, Class, Conductor, Feed, Given, LinkAt, Metal, Phase, Site, SourcePlace, System,
};

/// Bars that circuits hang on: lines by number, and the neutral.
#[derive(Clone, Copy)]
struct Bus {
    lines: [Option<usize>; 3],
    n: usize,
}

struct Builder<'a> {
    site: &'a Site,
    knowledge: &'a Knowledge,
    circuit: Circuit,
    params: ParamTable,
    buses: BTreeMap<String, Bus>,
}

/// `L`, or `L1`–`L3` for a part on three phases.
fn line_word(lines: &[u8], line: u8) -> String {
    if lines.len() > 1 {
        format!("L{line}")
    } else {
        "L".to_owned()
    }
}

/// Builds the sound circuit of a site and the table of its parameters.
pub(super) fn build(
    site: &Site,
    knowledge: &Knowledge,
) -> Result<(Circuit, ParamTable, Common), NetworkError> {
    let mut params = ParamTable::default();
    let common = Common::declare(&mut params, site, knowledge)?;
    let circuit = Circuit {
        nodes: Vec::new(),
        terminals: BTreeMap::new(),
        branches: Vec::new(),
        keys: BTreeMap::new(),
        emfs: Vec::new(),
        devices: Vec::new(),
        device_ids: BTreeMap::new(),
        ends: Vec::new(),
        end_ids: BTreeMap::new(),
        items: Vec::new(),
        item_ids: BTreeMap::new(),
        source_ids: BTreeMap::new(),
        source_backup: Vec::new(),
        load_branches: BTreeMap::new(),
        soil: 0,
        volts_override: None,
        hertz: site.supply.hertz,
    };
    let mut b = Builder {
        site,
        knowledge,
        circuit,
        params,
        buses: BTreeMap::new(),
    };
    b.network()?;
    for board in &site.boards {
        b.board(board)?;
    }
    b.bonds()?;
    b.equipment()?;
    b.sources()?;
    Ok((b.circuit, b.params, common))
}

impl Builder<'_> {
    fn node(&mut self, name: impl AsRef<str>) -> usize {
        self.circuit.add_node(name.as_ref())
    }

    fn keyed(&mut self, key: impl Into<String>, a: usize, b: usize, law: Law) -> usize {
        self.circuit.add_branch(Some(key.into()), a, b, law)
    }

    fn lifts(&mut self, branch: usize, end: &str) {
        let end = self.circuit.add_end(end);
        self.circuit.branches[branch].ends.push(end);
    }

    fn switched(&mut self, branch: usize, device: usize) {
        self.circuit.branches[branch].devices.push(device);
    }

    fn through(&mut self, branch: usize, device: usize) {
        self.circuit.devices[device].through.push(branch);
    }

    fn site_lines(&self) -> &'static [u8] {
        if self.site.supply.phases == 3 {
            &[1, 2, 3]
        } else {
            &[1]
        }
    }

    fn network(&mut self) -> Result<(), NetworkError> {
        let supply = &self.site.supply;
        let lines = self.site_lines();
        self.circuit.soil = self.node("soil");
        let soil = self.circuit.soil;
        let star = self.node("network.star");
        let street_n = self.node("street.N");
        let earth = self.params.declare(
            "supply.network_earth_ohms",
            supply.network_earth_ohms,
            Some(supply.system),
            self.knowledge,
        )?;
        let fuse = self.circuit.add_device("service.fuse", DeviceKind::Switch);
        for &line in lines {
            let word = line_word(lines, line);
            let source = self.node(format!("network.source.{word}"));
            self.circuit.emfs.push(Emf {
                plus: source,
                minus: star,
                line,
                source: None,
            });
            let street = self.node(format!("street.{word}"));
            self.keyed(format!("network.{word}"), source, street, Law::NetworkHalf);
            let service = self.node(format!("service.{word}"));
            let branch = self.keyed(
                format!("service.{word}"),
                street,
                service,
                self.run(supply.service, true),
            );
            self.switched(branch, fuse);
            self.through(branch, fuse);
        }
        self.keyed("network.N", star, street_n, Law::NetworkHalf);
        let service_n = self.node("service.N");
        self.keyed(
            "service.N",
            street_n,
            service_n,
            self.run(supply.service, true),
        );
        match supply.system {
            System::TnCS => {
                let law = Law::Param {
                    ohms: earth,
                    factor: 2.0,
                    gate: None,
                };
                self.keyed("network.earth", star, soil, law.clone());
                self.keyed("street.earth", street_n, soil, law);
            }
            System::TnS | System::Tt => {
                self.keyed(
                    "network.earth",
                    star,
                    soil,
                    Law::Param {
                        ohms: earth,
                        factor: 1.0,
                        gate: None,
                    },
                );
            }
        }
        if supply.system == System::TnS {
            let street = self.node("street.PE");
            self.keyed("network.PE", star, street, Law::NetworkHalf);
            let service = self.node("service.PE");
            self.keyed(
                "service.PE",
                street,
                service,
                self.run(supply.service, true),
            );
        }
        Ok(())
    }

    fn run(&self, c: Conductor, reactive: bool) -> Law {
        Law::Cable {
            metres: c.metres,
            mm2: c.mm2,
            metal: c.metal,
            scale: None,
            reactive,
        }
    }

    fn board(&mut self, board: &Board) -> Result<(), NetworkError> {
        let id = &board.id;
        let bar_n = self.node(format!("{id}.N"));
        let bar_pe = self.node(format!("{id}.PE"));
        let (incoming, incoming_n, lines) = self.feed(board)?;
        let mut main_bus = Bus {
            lines: [None; 3],
            n: bar_n,
        };
        let mut first_main = None;
        for (i, main) in board.mains.iter().enumerate() {
            let device = self.circuit.add_device(&main.id, DeviceKind::Switch);
            let mut bus = Bus {
                lines: [None; 3],
                n: bar_n,
            };
            for &line in lines {
                let word = line_word(lines, line);
                let Some(from) = incoming[usize::from(line) - 1] else {
                    continue;
                };
                let name = if i == 0 {
                    format!("{id}.{word}")
                } else {
                    format!("{id}.{}.{word}", main.id)
                };
                let to = self.node(&name);
                let branch = self.keyed(format!("{name} main"), from, to, Law::Contact);
                self.switched(branch, device);
                self.through(branch, device);
                bus.lines[usize::from(line) - 1] = Some(to);
            }
            if i == 0 {
                main_bus = bus;
                first_main = Some(device);
            }
            self.buses.insert(main.id.clone(), bus);
        }
        if board.mains.is_empty() {
            for &line in lines {
                let word = line_word(lines, line);
                let Some(from) = incoming[usize::from(line) - 1] else {
                    continue;
                };
                let to = self.node(format!("{id}.{word}"));
                self.keyed(format!("{id}.{word} main"), from, to, Law::Joint);
                main_bus.lines[usize::from(line) - 1] = Some(to);
            }
        }
        self.buses.insert(id.clone(), main_bus);
        let neutral = self.keyed(format!("{id}.main-neutral"), incoming_n, bar_n, Law::Joint);
        self.lifts(neutral, &format!("{id}.main-neutral"));
        if let (Some(device), Some(main)) = (first_main, board.mains.first())
            && main.switches_neutral()
        {
            self.switched(neutral, device);
            self.through(neutral, device);
        }
        if let Some(earthing) = &board.earthing {
            let is_main = matches!(board.feed, Feed::Service);
            if earthing.link {
                let from = match earthing.link_at {
                    LinkAt::Bar => bar_n,
                    LinkAt::Incoming => incoming_n,
                };
                let link = self.keyed(format!("{id}.link"), from, bar_pe, Law::Joint);
                self.lifts(link, &format!("{id}.link"));
            }
            if let Some(conductor) = earthing.main_earth {
                let (name, path) = if is_main {
                    ("electrode".to_owned(), "earthing.electrode_ohms".to_owned())
                } else {
                    (format!("{id}.electrode"), format!("{id}.electrode_ohms"))
                };
                let top = self.node(&name);
                let law = self.run(conductor, false);
                let earth = self.keyed(format!("{id}.main-earth"), bar_pe, top, law);
                self.lifts(earth, &format!("{id}.main-earth"));
                let ohms =
                    self.params
                        .declare(&path, earthing.electrode_ohms, None, self.knowledge)?;
                let soil = self.circuit.soil;
                self.keyed(
                    name,
                    top,
                    soil,
                    Law::Param {
                        ohms,
                        factor: 1.0,
                        gate: None,
                    },
                );
            }
        }
        if let Some(&first) = lines.first()
            && let Some(line) = main_bus.lines[usize::from(first) - 1]
        {
            let load = self.circuit.add_branch(None, line, bar_n, Law::TestLoad);
            self.circuit.load_branches.insert(id.clone(), load);
        }
        self.rcds(board, main_bus, lines)?;
        for circuit in &board.circuits {
            self.final_circuit(board, circuit, bar_pe)?;
        }
        Ok(())
    }

    /// Incoming lines and neutral of a board on the line side of its main switch, and its lines.
    #[allow(clippy::type_complexity)]
    fn feed(
        &mut self,
        board: &Board,
    ) -> Result<([Option<usize>; 3], usize, &'static [u8]), NetworkError> {
        let id = &board.id;
        let mut incoming = [None; 3];
        match &board.feed {
            Feed::Service => {
                let lines = self.site_lines();
                for &line in lines {
                    incoming[usize::from(line) - 1] = self
                        .circuit
                        .node(&format!("service.{}", line_word(lines, line)));
                }
                let n = self.node("service.N");
                if self.site.supply.system == System::TnS {
                    let pe = self.node("service.PE");
                    let bar = self.node(format!("{id}.PE"));
                    self.keyed(format!("{id}.incoming-pe"), pe, bar, Law::Joint);
                }
                Ok((incoming, n, lines))
            }
            Feed::Submain {
                board: from,
                rcd,
                breaker,
                phase,
                cable,
                metres,
            } => {
                let parent = &self.site.boards[*from];
                let bus_id = rcd.clone().unwrap_or_else(|| parent.id.clone());
                let bus = self.bus(&bus_id)?;
                let parent_pe = self.node(format!("{}.PE", parent.id));
                let device = self.circuit.add_device(
                    &format!("{id}.breaker"),
                    DeviceKind::Breaker { amps: breaker.amps },
                );
                let lines = phase.lines();
                let law = |mm2: f64| self.cable(*metres, mm2, cable.metal);
                let (live, earth) = (law(cable.mm2), cable.pe_mm2.map(law));
                let mut ends = Vec::new();
                for &line in lines {
                    let word = line_word(lines, line);
                    let Some(from) = bus.lines[usize::from(line) - 1] else {
                        return Err(NetworkError::Bad(format!(
                            "board {id} takes L{line} from bars without it"
                        )));
                    };
                    let branch = self.landed(id, &word, "feed.", from);
                    self.switched(branch, device);
                    self.through(branch, device);
                    let (feed, far) = self.far_end(id, &word, live.clone());
                    incoming[usize::from(line) - 1] = Some(far);
                    ends.push((feed, far));
                }
                self.landed(id, "N", "feed.", bus.n);
                let (feed_n, far_n) = self.far_end(id, "N", live);
                if let Some(earth) = earth {
                    self.landed(id, "PE", "feed.", parent_pe);
                    let feed_pe = self.node(format!("{id}.feed.PE"));
                    let bar = self.node(format!("{id}.PE"));
                    self.keyed(format!("into {id}.PE"), feed_pe, bar, earth);
                    for &(feed, far) in &ends {
                        self.insulate(&[(feed, feed_n, feed_pe), (far, far_n, bar)], metres / 2.0);
                    }
                    self.leak(feed_n, feed_pe, metres / 2.0, 1.0);
                    self.leak(far_n, bar, metres / 2.0, 1.0);
                }
                Ok((incoming, far_n, lines))
            }
        }
    }

    fn cable(&self, metres: f64, mm2: f64, metal: Metal) -> Law {
        Law::Cable {
            metres,
            mm2,
            metal,
            scale: self.params.id("cable.length_factor"),
            reactive: true,
        }
    }

    /// The end of a conductor where it lands on a bar: `c1.N@board`, from the bar to `c1.N`.
    fn landed(&mut self, id: &str, word: &str, feed: &str, bar: usize) -> usize {
        let node = self.node(format!("{id}.{feed}{word}"));
        let key = format!("{id}.{word}@board");
        let branch = self.keyed(key.clone(), bar, node, Law::Joint);
        self.lifts(branch, &key);
        branch
    }

    fn far_end(&mut self, id: &str, word: &str, law: Law) -> (usize, usize) {
        let feed = self.node(format!("{id}.feed.{word}"));
        let far = self.node(format!("{id}.in.{word}"));
        self.keyed(format!("into {id}.{word}"), feed, far, law);
        (feed, far)
    }

    fn leak(&mut self, a: usize, b: usize, metres: f64, farads: f64) {
        self.circuit
            .add_branch(None, a, b, Law::Insulation { metres, farads });
    }

    fn insulate(&mut self, places: &[(usize, usize, usize)], metres: f64) {
        for &(line, n, pe) in places {
            self.leak(line, pe, metres, 1.0);
            self.leak(line, n, metres, 0.5);
        }
    }

    fn bus(&self, id: &str) -> Result<Bus, NetworkError> {
        self.buses
            .get(id)
            .copied()
            .ok_or_else(|| NetworkError::UnknownPlace {
                what: "bar",
                name: id.to_owned(),
                nearest: Vec::new(),
            })
    }

    fn rcds(&mut self, board: &Board, main: Bus, lines: &'static [u8]) -> Result<(), NetworkError> {
        let mut left: Vec<_> = board.rcds.iter().collect();
        while !left.is_empty() {
            let before = left.len();
            let mut waiting = Vec::new();
            for rcd in left {
                let from = match &rcd.after {
                    None => main,
                    Some(up) => match self.buses.get(up) {
                        Some(bus) => *bus,
                        None => {
                            waiting.push(rcd);
                            continue;
                        }
                    },
                };
                let own: Vec<u8> = if rcd.poles >= 3 || lines.len() == 1 {
                    lines.to_vec()
                } else {
                    vec![self.rcd_line(board, &rcd.id, lines)]
                };
                let trip_amps = self.params.declare_scaled(
                    &format!("{}.trip_amps", rcd.id),
                    "trip_amps",
                    rcd.amps,
                    self.knowledge,
                )?;
                let row = if rcd.delayed {
                    "delayed_trip_seconds"
                } else {
                    "trip_seconds"
                };
                let trip_seconds = self.params.declare_scaled(
                    &format!("{}.trip_seconds", rcd.id),
                    row,
                    1.0,
                    self.knowledge,
                )?;
                let device = self.circuit.add_device(
                    &rcd.id,
                    DeviceKind::Rcd {
                        rated: rcd.amps,
                        trip_amps,
                        trip_seconds,
                        delayed: rcd.delayed,
                        trip_override: None,
                        seconds_override: None,
                        load: Vec::new(),
                    },
                );
                let base = format!("{}.{}", board.id, rcd.id);
                let mut bus = Bus {
                    lines: [None; 3],
                    n: self.node(format!("{base}.N")),
                };
                let mut load = Vec::new();
                for &line in &own {
                    let word = line_word(&own, line);
                    let Some(up) = from.lines[usize::from(line) - 1] else {
                        continue;
                    };
                    let node = self.node(format!("{base}.{word}"));
                    let branch = self.keyed(format!("{base}.{word}"), up, node, Law::Contact);
                    self.switched(branch, device);
                    self.through(branch, device);
                    bus.lines[usize::from(line) - 1] = Some(node);
                    load.push(node);
                }
                let branch = self.keyed(format!("{base}.N"), from.n, bus.n, Law::Contact);
                if rcd.poles != 1 {
                    self.switched(branch, device);
                }
                self.through(branch, device);
                load.push(bus.n);
                if let DeviceKind::Rcd { load: slot, .. } = &mut self.circuit.devices[device].kind {
                    *slot = load;
                }
                self.buses.insert(rcd.id.clone(), bus);
            }
            if waiting.len() == before {
                return Err(NetworkError::Bad(format!(
                    "the RCDs of {} feed each other in a ring",
                    board.id
                )));
            }
            left = waiting;
        }
        Ok(())
    }

    /// The line of a two-pole RCD on three phases: that of the first circuit that hangs on it.
    fn rcd_line(&self, board: &Board, rcd: &str, lines: &[u8]) -> u8 {
        let first = board
            .circuits
            .iter()
            .find(|c| c.rcd.as_deref() == Some(rcd))
            .map(|c| c.phase);
        let fed = self.site.boards.iter().find_map(|b| match &b.feed {
            Feed::Submain {
                rcd: Some(r),
                phase,
                ..
            } if r == rcd => Some(*phase),
            _ => None,
        });
        match first.or(fed) {
            Some(Phase::One(line)) => line,
            _ => lines.first().copied().unwrap_or(1),
        }
    }

    fn final_circuit(
        &mut self,
        board: &Board,
        circuit: &crate::site::Circuit,
        bar_pe: usize,
    ) -> Result<(), NetworkError> {
        let id = &circuit.id;
        let bus = match &circuit.rcd {
            Some(rcd) => self.bus(rcd)?,
            None => match &circuit.main {
                Some(main) => self.bus(main)?,
                None => self.bus(&board.id)?,
            },
        };
        let device = self.circuit.add_device(
            &format!("{id}.breaker"),
            DeviceKind::Breaker {
                amps: circuit.breaker.amps,
            },
        );
        let lines = circuit.phase.lines();
        for &line in lines {
            let word = line_word(lines, line);
            let Some(from) = bus.lines[usize::from(line) - 1] else {
                return Err(NetworkError::Bad(format!(
                    "circuit {id} takes L{line} from bars without it"
                )));
            };
            let branch = self.landed(id, &word, "", from);
            self.switched(branch, device);
            self.through(branch, device);
        }
        self.landed(id, "N", "", bus.n);
        if circuit.cable.pe_mm2.is_some() {
            self.landed(id, "PE", "", bar_pe);
        }
        for (i, point) in circuit.points.iter().enumerate() {
            let (parent, start) = match point.from {
                None => (id.clone(), 0.0),
                Some(from) => (
                    format!("{id}.{}", circuit.points[from].id),
                    circuit.points[from].metres,
                ),
            };
            let metres = point.metres - start;
            let name = format!("{id}.{}", point.id);
            let split = point
                .from
                .map(|from| format!("{id}.{}.split", circuit.points[from].id));
            let words: Vec<String> = lines
                .iter()
                .map(|&line| line_word(lines, line))
                .chain(["N".to_owned()])
                .chain(circuit.cable.pe_mm2.map(|_| "PE".to_owned()))
                .collect();
            for word in &words {
                let from = self.node(format!("{parent}.{word}"));
                let to = self.node(format!("{name}.{word}"));
                let mm2 = if word == "PE" {
                    circuit.cable.pe_mm2.unwrap_or(circuit.cable.mm2)
                } else {
                    circuit.cable.mm2
                };
                let law = self.cable(metres, mm2, circuit.cable.metal);
                let branch = self.keyed(format!("into {name}.{word}"), from, to, law);
                if let Some(split) = &split {
                    self.lifts(branch, split);
                }
            }
            self.circuit.add_end(&format!("{name}.split"));
            self.point_insulation(circuit, i, &name, &words, metres);
        }
        Ok(())
    }

    /// Half of a segment's capacitance and insulation at each of its ends, and the point's test load.
    fn point_insulation(
        &mut self,
        circuit: &crate::site::Circuit,
        index: usize,
        name: &str,
        words: &[String],
        metres: f64,
    ) {
        let half = metres / 2.0;
        // The half at the near end moves to the far end of the first segment: a lifted circuit end
        // then still carries the whole cable's capacitance.
        let children: f64 = circuit
            .points
            .iter()
            .filter(|p| p.from == Some(index))
            .map(|p| (p.metres - circuit.points[index].metres) / 2.0)
            .sum();
        let here = half
            + children
            + if circuit.points[index].from.is_none() {
                half
            } else {
                0.0
            };
        let n = self.node(format!("{name}.N"));
        let pe = words
            .iter()
            .any(|w| w == "PE")
            .then(|| self.node(format!("{name}.PE")));
        for word in words.iter().filter(|w| w.starts_with('L')) {
            let line = self.node(format!("{name}.{word}"));
            self.leak(line, n, here, 0.5);
            if let Some(pe) = pe {
                self.leak(line, pe, here, 1.0);
            }
        }
        if let Some(pe) = pe {
            self.leak(n, pe, here, 1.0);
        }
        if let Some(word) = words.first() {
            let line = self.node(format!("{name}.{word}"));
            let load = self.circuit.add_branch(None, line, n, Law::TestLoad);
            self.circuit.load_branches.insert(name.to_owned(), load);
        }
    }

    fn bonds(&mut self) -> Result<(), NetworkError> {
        let Some(main) = self.site.boards.get(self.site.main_board) else {
            return Ok(());
        };
        let bar = self.node(format!("{}.PE", main.id));
        let soil = self.circuit.soil;
        let street = self.node("street.N");
        for bond in &self.site.bonds {
            let id = &bond.id;
            let pipe = self.node(format!("{id}.pipe"));
            let law = self.run(bond.conductor, false);
            let branch = self.keyed(format!("{id}.bond"), bar, pipe, law);
            self.lifts(branch, &format!("{id}.bond"));
            let ohms = self.params.declare(
                &format!("{id}.pipe_ohms"),
                bond.pipe_ohms,
                None,
                self.knowledge,
            )?;
            self.keyed(
                format!("{id}.pipe"),
                pipe,
                soil,
                Law::Param {
                    ohms,
                    factor: 1.0,
                    gate: None,
                },
            );
            if bond.street_metal != Some(false) {
                let ohms = self.params.declare(
                    &format!("{id}.street_ohms"),
                    bond.street_ohms,
                    None,
                    self.knowledge,
                )?;
                let given = if bond.street_metal == Some(true) {
                    Given::Value(1.0)
                } else {
                    Given::Unknown
                };
                let gate = self.params.declare_switch(
                    &format!("{id}.street_metal"),
                    given,
                    self.knowledge,
                )?;
                self.keyed(
                    format!("{id}.street"),
                    pipe,
                    street,
                    Law::Param {
                        ohms,
                        factor: 1.0,
                        gate: Some(gate),
                    },
                );
            }
        }
        Ok(())
    }

    fn equipment(&mut self) -> Result<(), NetworkError> {
        for (index, eq) in self.site.equipment.iter().enumerate() {
            let board = &self.site.boards[eq.at.board];
            let circuit = &board.circuits[eq.at.circuit];
            let point = format!("{}.{}", circuit.id, circuit.points[eq.at.point].id);
            let row = self
                .knowledge
                .equipment(&eq.kind)
                .or_else(|| self.knowledge.equipment("other"));
            let Some(row) = row else {
                return Err(NetworkError::Bad(format!(
                    "knowledge has no equipment row for {}",
                    eq.kind
                )));
            };
            let (row_watts, row_pf, row_leak, row_on) =
                (row.watts, row.power_factor, row.leak_farads, row.on);
            let (electronics, insulation) = (row.electronics, row.insulation_ohms);
            let watts = self.params.declare_near(
                &format!("{}.watts", eq.id),
                eq.watts.map_or(Given::Unknown, Given::Value),
                row_watts,
                self.knowledge,
            )?;
            let power_factor = self.params.declare_near(
                &format!("{}.power_factor", eq.id),
                Given::Unknown,
                row_pf,
                self.knowledge,
            )?;
            let farads = self.params.declare_near(
                &format!("{}.leak_farads", eq.id),
                Given::Unknown,
                row_leak,
                self.knowledge,
            )?;
            let ohms = self
                .params
                .declare_insulation(&format!("{}.insulation_ohms", eq.id), insulation);
            let on = self.params.declare_on(&format!("{}.on", eq.id), row_on);
            let frame = self.node(format!("{}.frame", eq.id));
            let lines = circuit.phase.lines();
            let n = self.node(format!("{point}.N"));
            let mut loads = Vec::new();
            for &line in lines {
                let node = self.node(format!("{point}.{}", line_word(lines, line)));
                let share = 1.0 / lines.len() as f64;
                let load = self.circuit.add_branch(
                    None,
                    node,
                    n,
                    Law::Load {
                        watts,
                        power_factor,
                        share,
                        electronics,
                        part: 1.0,
                    },
                );
                self.circuit.branches[load].needs = Needs::On(index);
                loads.push(load);
                self.side(node, frame, farads, ohms, index);
            }
            self.side(n, frame, farads, ohms, index);
            if eq.class == Class::I && circuit.cable.pe_mm2.is_some() {
                let pe = self.node(format!("{point}.PE"));
                let cord = self.keyed(format!("cord {}.PE", eq.id), pe, frame, Law::Joint);
                self.circuit.branches[cord].needs = Needs::Plugged(index);
            }
            for &bond in &eq.touches {
                let pipe = self.node(format!("{}.pipe", self.site.bonds[bond].id));
                self.circuit.add_branch(None, frame, pipe, Law::Joint);
            }
            self.circuit.item_ids.insert(eq.id.clone(), index);
            self.circuit.items.push(Item {
                id: eq.id.clone(),
                plug: eq.plug,
                on,
                point,
                loads,
                frame,
            });
        }
        Ok(())
    }

    fn side(
        &mut self,
        live: usize,
        frame: usize,
        farads: super::ParamId,
        ohms: super::ParamId,
        item: usize,
    ) {
        let leak = self
            .circuit
            .add_branch(None, live, frame, Law::Leak { farads, ohms });
        self.circuit.branches[leak].needs = Needs::Plugged(item);
    }

    fn sources(&mut self) -> Result<(), NetworkError> {
        for (index, source) in self.site.sources.iter().enumerate() {
            let (base, lines): (String, &[u8]) = match &source.at {
                SourcePlace::Board(b) => {
                    let board = &self.site.boards[*b];
                    let lines = match &board.feed {
                        Feed::Service => self.site_lines(),
                        Feed::Submain { phase, .. } => phase.lines(),
                    };
                    (board.id.clone(), lines)
                }
                SourcePlace::Point(p) => {
                    let circuit = &self.site.boards[p.board].circuits[p.circuit];
                    (
                        format!("{}.{}", circuit.id, circuit.points[p.point].id),
                        circuit.phase.lines(),
                    )
                }
            };
            let watts = self.params.declare_near(
                &format!("{}.watts", source.id),
                Given::Unknown,
                source.watts,
                self.knowledge,
            )?;
            let n = self.node(format!("{base}.N"));
            let pe = self.node(format!("{base}.PE"));
            self.circuit.terminals.insert(format!("{}.N", source.id), n);
            self.circuit
                .terminals
                .insert(format!("{}.PE", source.id), pe);
            for &line in lines {
                let word = line_word(lines, line);
                let node = self.node(format!("{base}.{word}"));
                self.circuit
                    .terminals
                    .insert(format!("{}.{word}", source.id), node);
                let feed = self.circuit.add_branch(
                    None,
                    node,
                    n,
                    Law::FeedIn {
                        watts,
                        share: 1.0 / lines.len() as f64,
                    },
                );
                self.circuit.branches[feed].needs = Needs::SourceOn(index);
                let emf = self.node(format!("{}.emf.{word}", source.id));
                self.circuit.emfs.push(Emf {
                    plus: emf,
                    minus: n,
                    line,
                    source: Some(index),
                });
                let inner = self.circuit.add_branch(None, emf, node, Law::Ohms(0.3));
                self.circuit.branches[inner].needs = Needs::SourceBackup(index);
            }
            self.circuit.source_ids.insert(source.id.clone(), index);
            self.circuit.source_backup.push(source.backup);
        }
        Ok(())
    }
}
