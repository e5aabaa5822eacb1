//! The circuit: nodes, branches with the law of each, what opens them, and the sources.

use std::collections::BTreeMap;

use super::params::ParamId;
use crate::knowledge::Provoke;
use crate::site::Metal;

/// What the impedance of a branch follows from.
#[derive(Clone, Debug, PartialEq)]
pub enum Law {
    /// A run of cable with a joint at its end: resistance at temperature, reactance in AC.
    Cable {
        /// One way, m.
        metres: f64,
        /// mm².
        mm2: f64,
        /// Metal.
        metal: Metal,
        /// Factor on the length (what the site file says of it may be off).
        scale: Option<ParamId>,
        /// Service, submains and circuits have reactance; earthing and bonding runs are taken without.
        reactive: bool,
    },
    /// A joint: `joint_ohms`.
    Joint,
    /// A contact of a switching device: `contact_ohms`.
    Contact,
    /// Half of the network's L–N loop, with its angle.
    NetworkHalf,
    /// A parameter in ohms times a factor.
    Param {
        /// Which.
        ohms: ParamId,
        /// Factor.
        factor: f64,
        /// Present only while this switch parameter is one.
        gate: Option<ParamId>,
    },
    /// Capacitance and insulation of so many metres of cable, times a factor.
    Insulation {
        /// m.
        metres: f64,
        /// 1 for a live conductor to PE, 0.5 (farads) and 1 (insulation) between L and N.
        farads: f64,
    },
    /// Equipment's filter and insulation, one side to the frame.
    Leak {
        /// F.
        farads: ParamId,
        /// Ω.
        ohms: ParamId,
    },
    /// Equipment's load, or a share of it on one of three lines.
    Load {
        /// W at 230 V.
        watts: ParamId,
        /// cos φ.
        power_factor: ParamId,
        /// Share of the watts.
        share: f64,
        /// Blocks DC.
        electronics: bool,
        /// Ohms in the part of an element that this branch is, as a share of the whole.
        part: f64,
    },
    /// A source running beside the supply: watts fed in at 230 V.
    FeedIn {
        /// W.
        watts: ParamId,
        /// Share per line.
        share: f64,
    },
    /// Plain ohms.
    Ohms(f64),
    /// Plain farads.
    Farads(f64),
    /// A load that a test adds; W at 230 V from the setup.
    TestLoad,
}

/// When a branch conducts, beside its devices and ends.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Needs {
    /// Always.
    Nothing,
    /// Equipment plugged in.
    Plugged(usize),
    /// Equipment plugged in and switched on.
    On(usize),
    /// So provoked.
    Provoked(Provoke),
    /// The source running beside the supply.
    SourceOn(usize),
    /// The source feeding the site alone.
    SourceBackup(usize),
}

/// A branch from `a` (supply side) to `b`.
#[derive(Clone, Debug, PartialEq)]
pub struct Branch {
    /// Its key, where it has one.
    pub key: Option<String>,
    /// Node nearer the supply.
    pub a: usize,
    /// Other node.
    pub b: usize,
    /// Law.
    pub law: Law,
    /// Devices any of which opens it.
    pub devices: Vec<usize>,
    /// Ends any of which opens it.
    pub ends: Vec<usize>,
    /// What else it needs.
    pub needs: Needs,
    /// Ohms in series (a fault); infinite: open.
    pub series: f64,
    /// Ohms in place of the law's (a fault).
    pub replaced: Option<f64>,
}

/// An ideal source: node `plus` stands `volts` above node `minus`.
#[derive(Clone, Debug, PartialEq)]
pub struct Emf {
    /// Upper node.
    pub plus: usize,
    /// Lower node.
    pub minus: usize,
    /// Line 1 to 3: lags by 0°, 120°, 240°.
    pub line: u8,
    /// `None`: the network; else the source that must be in backup.
    pub source: Option<usize>,
}

/// A device that opens or operates.
#[derive(Clone, Debug, PartialEq)]
pub struct Device {
    /// Id.
    pub id: String,
    /// What makes it operate.
    pub kind: DeviceKind,
    /// Branches through it (through the core, for an RCD), each counted away from the supply.
    pub through: Vec<usize>,
}

/// What makes a device operate.
#[derive(Clone, Debug, PartialEq)]
pub enum DeviceKind {
    /// Only by hand.
    Switch,
    /// Residual current.
    Rcd {
        /// Rated residual A.
        rated: f64,
        /// Threshold, A.
        trip_amps: ParamId,
        /// Time at rated current, s.
        trip_seconds: ParamId,
        /// Type S.
        delayed: bool,
        /// A fault's threshold in place of the parameter's; infinite: dead.
        trip_override: Option<f64>,
        /// A fault's time.
        seconds_override: Option<f64>,
        /// Load-side terminals: lines, then N.
        load: Vec<usize>,
    },
    /// Overcurrent.
    Breaker {
        /// Rated A.
        amps: f64,
    },
}

/// Equipment in the circuit.
#[derive(Clone, Debug, PartialEq)]
pub struct Item {
    /// Id.
    pub id: String,
    /// On a plug.
    pub plug: bool,
    /// Its own switch as found: 1 on, 0 off.
    pub on: ParamId,
    /// Point it hangs on (`c1.p1`).
    pub point: String,
    /// Load branches.
    pub loads: Vec<usize>,
    /// Frame node.
    pub frame: usize,
}

/// The whole circuit of a site, sound or edited.
#[derive(Clone, Debug, PartialEq)]
pub struct Circuit {
    /// Node names, for messages and pictures.
    pub nodes: Vec<String>,
    /// Terminals of contract §2 to nodes.
    pub terminals: BTreeMap<String, usize>,
    /// Branches.
    pub branches: Vec<Branch>,
    /// Branches by key.
    pub keys: BTreeMap<String, usize>,
    /// Ideal sources.
    pub emfs: Vec<Emf>,
    /// Devices.
    pub devices: Vec<Device>,
    /// Devices by id.
    pub device_ids: BTreeMap<String, usize>,
    /// Liftable ends.
    pub ends: Vec<String>,
    /// Ends by id.
    pub end_ids: BTreeMap<String, usize>,
    /// Equipment.
    pub items: Vec<Item>,
    /// Equipment by id.
    pub item_ids: BTreeMap<String, usize>,
    /// Sources that can backfeed, by id, with whether they can feed alone.
    pub source_ids: BTreeMap<String, usize>,
    /// Whether each can feed the site alone.
    pub source_backup: Vec<bool>,
    /// Test-load branch of each board and point.
    pub load_branches: BTreeMap<String, usize>,
    /// Remote earth.
    pub soil: usize,
    /// Volts of the network, overridden by a fault.
    pub volts_override: Option<f64>,
    /// Supply frequency, Hz.
    pub hertz: f64,
}

impl Circuit {
    /// The node of a terminal.
    pub fn node(&self, terminal: &str) -> Option<usize> {
        self.terminals.get(terminal).copied()
    }

    /// Adds a resistance between two nodes.
    pub fn bridge(&mut self, a: usize, b: usize, ohms: f64) {
        self.add_branch(None, a, b, Law::Ohms(ohms));
    }

    /// Every number that a fault's value can set, in a fixed order: see [`Circuit::set_number`].
    pub fn numbers(&self) -> Vec<f64> {
        let mut out = Vec::with_capacity(self.branches.len() * 3 + self.devices.len() * 2 + 1);
        for b in &self.branches {
            out.push(b.series);
            out.push(b.replaced.unwrap_or(-1.0));
            out.push(match &b.law {
                Law::Ohms(x) | Law::Farads(x) => *x,
                Law::Load { part, .. } => *part,
                _ => -1.0,
            });
        }
        for d in &self.devices {
            match &d.kind {
                DeviceKind::Rcd {
                    trip_override,
                    seconds_override,
                    ..
                } => {
                    out.push(trip_override.unwrap_or(-1.0));
                    out.push(seconds_override.unwrap_or(-1.0));
                }
                _ => out.extend([-1.0, -1.0]),
            }
        }
        out.push(self.volts_override.unwrap_or(-1.0));
        out
    }

    /// Sets number `index` of [`Circuit::numbers`].
    pub fn set_number(&mut self, index: usize, value: f64) {
        let branches = self.branches.len() * 3;
        if index < branches {
            let b = &mut self.branches[index / 3];
            match index % 3 {
                0 => b.series = value,
                1 => b.replaced = Some(value),
                _ => match &mut b.law {
                    Law::Ohms(x) | Law::Farads(x) => *x = value,
                    Law::Load { part, .. } => *part = value,
                    _ => {}
                },
            }
        } else if let Some(d) = self.devices.get_mut((index - branches) / 2) {
            if let DeviceKind::Rcd {
                trip_override,
                seconds_override,
                ..
            } = &mut d.kind
            {
                if (index - branches).is_multiple_of(2) {
                    *trip_override = Some(value);
                } else {
                    *seconds_override = Some(value);
                }
            }
        } else {
            self.volts_override = Some(value);
        }
    }

    /// Adds a node under a name that is also a terminal.
    pub(super) fn add_node(&mut self, name: &str) -> usize {
        if let Some(&node) = self.terminals.get(name) {
            return node;
        }
        let node = self.nodes.len();
        self.nodes.push(name.to_owned());
        self.terminals.insert(name.to_owned(), node);
        node
    }

    /// Adds a branch.
    pub(super) fn add_branch(
        &mut self,
        key: Option<String>,
        a: usize,
        b: usize,
        law: Law,
    ) -> usize {
        let index = self.branches.len();
        if let Some(key) = &key {
            self.keys.insert(key.clone(), index);
        }
        self.branches.push(Branch {
            key,
            a,
            b,
            law,
            devices: Vec::new(),
            ends: Vec::new(),
            needs: Needs::Nothing,
            series: 0.0,
            replaced: None,
        });
        index
    }

    /// Adds a device, through no branch yet.
    pub(super) fn add_device(&mut self, id: &str, kind: DeviceKind) -> usize {
        let index = self.devices.len();
        self.devices.push(Device {
            id: id.to_owned(),
            kind,
            through: Vec::new(),
        });
        self.device_ids.insert(id.to_owned(), index);
        index
    }

    /// The liftable end of that id, made on first use.
    pub(super) fn add_end(&mut self, id: &str) -> usize {
        if let Some(&end) = self.end_ids.get(id) {
            return end;
        }
        let index = self.ends.len();
        self.ends.push(id.to_owned());
        self.end_ids.insert(id.to_owned(), index);
        index
    }
}
