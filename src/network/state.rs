//! Setup → switching state: which devices are open, which ends lifted, what is plugged in and on.

use super::NetworkError;
use super::circuit::Circuit;
use crate::knowledge::{Provoke, Setup, SourceMode, UnplugSet};
use crate::quantity::suggest::nearest;

/// The switching state of a circuit.
#[derive(Clone, Debug, PartialEq)]
pub struct Switching {
    /// Per device.
    pub device_open: Vec<bool>,
    /// Per liftable end.
    pub end_lifted: Vec<bool>,
    /// Per equipment.
    pub plugged: Vec<bool>,
    /// Per equipment: its own switch, or as found.
    pub on: Vec<Option<bool>>,
    /// Added loads: test-load branch, W.
    pub loads: Vec<(usize, f64)>,
    /// Provocation.
    pub provoke: Option<Provoke>,
    /// Per source.
    pub sources: Vec<SourceMode>,
}

/// What equipment does that the setup does not name.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Unnamed {
    /// On or off as found: a parameter says which.
    AsFound,
    /// Off (`predict`).
    Off,
}

fn unknown<'a>(
    what: &'static str,
    name: &str,
    names: impl Iterator<Item = &'a String>,
) -> NetworkError {
    NetworkError::UnknownPlace {
        what,
        name: name.to_owned(),
        nearest: nearest(name, names.map(String::as_str), 3),
    }
}

impl Circuit {
    /// A device's index.
    pub fn device(&self, id: &str) -> Result<usize, NetworkError> {
        self.device_ids
            .get(id)
            .copied()
            .ok_or_else(|| unknown("device", id, self.device_ids.keys()))
    }

    /// A terminal's node.
    pub fn terminal(&self, name: &str) -> Result<usize, NetworkError> {
        self.node(name).ok_or_else(|| {
            let shown = self
                .terminals
                .keys()
                .filter(|t| !t.starts_with("network.") && !t.starts_with("street."));
            unknown("terminal", name, shown)
        })
    }

    /// The switching state that a setup asks for.
    ///
    /// # Errors
    /// A device, end, equipment, source or load place that is not here; fixed equipment to be unplugged.
    pub fn switching(&self, setup: &Setup, unnamed: Unnamed) -> Result<Switching, NetworkError> {
        let default_on = match unnamed {
            Unnamed::AsFound => None,
            Unnamed::Off => Some(false),
        };
        let mut sw = Switching {
            device_open: vec![false; self.devices.len()],
            end_lifted: vec![false; self.ends.len()],
            plugged: vec![true; self.items.len()],
            on: vec![default_on; self.items.len()],
            loads: Vec::new(),
            provoke: setup.provoke,
            sources: vec![SourceMode::On; self.source_backup.len()],
        };
        for id in &setup.open {
            sw.device_open[self.device(id)?] = true;
        }
        for id in &setup.closed {
            let device = self.device(id)?;
            if sw.device_open[device] {
                return Err(NetworkError::Bad(format!(
                    "{id} cannot be open and closed at once"
                )));
            }
        }
        for id in &setup.lift {
            let end = self
                .end_ids
                .get(id)
                .ok_or_else(|| unknown("conductor end", id, self.end_ids.keys()))?;
            sw.end_lifted[*end] = true;
        }
        let item = |id: &String| {
            self.item_ids
                .get(id)
                .copied()
                .ok_or_else(|| unknown("equipment", id, self.item_ids.keys()))
        };
        match &setup.unplug {
            UnplugSet::All(_) => {
                for (plugged, it) in sw.plugged.iter_mut().zip(&self.items) {
                    *plugged = !it.plug;
                }
            }
            UnplugSet::These(list) => {
                for id in list {
                    let i = item(id)?;
                    if !self.items[i].plug {
                        return Err(NetworkError::Bad(format!(
                            "{id} is fixed and has no plug; open its circuit or switch it off"
                        )));
                    }
                    sw.plugged[i] = false;
                }
            }
        }
        for id in &setup.off {
            sw.on[item(id)?] = Some(false);
        }
        for id in &setup.on {
            sw.on[item(id)?] = Some(true);
        }
        for load in &setup.load {
            let branch = self
                .load_branches
                .get(&load.at)
                .ok_or_else(|| unknown("board or point", &load.at, self.load_branches.keys()))?;
            if !load.watts.is_finite() || load.watts < 0.0 {
                return Err(NetworkError::Bad(format!(
                    "a load of {} W at {}: give watts above zero",
                    load.watts, load.at
                )));
            }
            sw.loads.push((*branch, load.watts));
        }
        for (id, mode) in &setup.sources {
            let i = self
                .source_ids
                .get(id)
                .ok_or_else(|| unknown("source", id, self.source_ids.keys()))?;
            if *mode == SourceMode::Backup && !self.source_backup[*i] {
                return Err(NetworkError::Bad(format!(
                    "{id} cannot feed the site alone: its `backup` is false"
                )));
            }
            sw.sources[*i] = *mode;
        }
        Ok(sw)
    }
}
