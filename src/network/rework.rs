//! Edits on a circuit: what faults do to branches, terminals and devices.

use super::NetworkError;
use super::circuit::{Circuit, DeviceKind, Law, Needs};
use super::edit::Edit;
use crate::quantity::suggest::nearest;

impl Circuit {
    /// The branch of a key; `into c1.N` is the circuit's end in its board, `into shed.N` its submain.
    pub fn branch(&self, key: &str) -> Result<usize, NetworkError> {
        if let Some(&branch) = self.keys.get(key) {
            return Ok(branch);
        }
        if let Some(rest) = key.strip_prefix("into ")
            && let Some(&branch) = self.keys.get(&format!("{rest}@board"))
        {
            return Ok(branch);
        }
        Err(NetworkError::UnknownPlace {
            what: "branch",
            name: key.to_owned(),
            nearest: nearest(key, self.keys.keys().map(String::as_str), 3),
        })
    }

    /// Puts edits on the circuit. Their order does not matter: edits that move terminals go first.
    ///
    /// # Errors
    /// A branch or place that is not here; edits that contradict each other on one branch.
    pub fn rework(&mut self, edits: &[Edit]) -> Result<(), NetworkError> {
        let moves =
            |e: &Edit| matches!(e, Edit::Swap { .. } | Edit::SwapService | Edit::Move { .. });
        let mut touched: Vec<String> = Vec::new();
        for edit in edits {
            self.check_conflict(edit, &mut touched)?;
        }
        for edit in edits.iter().filter(|e| moves(e)) {
            self.put(edit)?;
        }
        for edit in edits.iter().filter(|e| !moves(e)) {
            self.put(edit)?;
        }
        Ok(())
    }

    fn check_conflict(&self, edit: &Edit, touched: &mut Vec<String>) -> Result<(), NetworkError> {
        let mark = match edit {
            Edit::Series { branch, .. } | Edit::Replace { branch, .. } => {
                format!("branch {}", self.branch(branch)?)
            }
            Edit::Swap { at, conductors } => format!("terminals of {at} {}", conductors.join(" ")),
            Edit::SwapService => "the service".to_owned(),
            Edit::Move { end, .. } => end.clone(),
            Edit::SourceVolts(_) => "the supply's volts".to_owned(),
            Edit::Element { equipment, .. } => format!("the element of {equipment}"),
            Edit::TripAmps { rcd, .. } | Edit::DeadRcd { rcd } => format!("the threshold of {rcd}"),
            Edit::TripSeconds { rcd, .. } => format!("the time of {rcd}"),
            Edit::Shunt { .. } | Edit::Capacitor { .. } | Edit::NetworkInjection { .. } => {
                return Ok(());
            }
        };
        if touched.contains(&mark) {
            let branch = match edit {
                Edit::Series { branch, .. } | Edit::Replace { branch, .. } => branch.clone(),
                _ => mark,
            };
            return Err(NetworkError::Conflict { branch });
        }
        touched.push(mark);
        Ok(())
    }

    fn put(&mut self, edit: &Edit) -> Result<(), NetworkError> {
        match edit {
            Edit::Series { branch, ohms } => {
                let b = self.branch(branch)?;
                self.branches[b].series += ohms;
            }
            Edit::Replace { branch, ohms } => {
                let b = self.branch(branch)?;
                self.branches[b].replaced = Some(*ohms);
            }
            Edit::Shunt {
                between,
                ohms,
                when,
            } => {
                let (a, b) = (self.terminal(&between[0])?, self.terminal(&between[1])?);
                let branch = self.add_branch(None, a, b, Law::Ohms(*ohms));
                if let Some(p) = when {
                    self.branches[branch].needs = Needs::Provoked(*p);
                }
            }
            Edit::Capacitor { between, farads } => {
                let (a, b) = (self.terminal(&between[0])?, self.terminal(&between[1])?);
                self.add_branch(None, a, b, Law::Farads(*farads));
            }
            Edit::Swap { at, conductors } => self.swap(at, conductors)?,
            Edit::SwapService => {
                let line = if self.keys.contains_key("service.L") {
                    "service.L"
                } else {
                    "service.L1"
                };
                let (l, n) = (self.branch(line)?, self.branch("service.N")?);
                let a = self.branches[l].a;
                self.branches[l].a = self.branches[n].a;
                self.branches[n].a = a;
            }
            Edit::Move { end, to } => {
                let b = self.branch(end)?;
                let node = self.terminal(to)?;
                self.branches[b].a = node;
            }
            Edit::SourceVolts(volts) => self.volts_override = Some(*volts),
            Edit::Element {
                equipment,
                position,
                ohms,
            } => self.element(equipment, *position, *ohms)?,
            Edit::NetworkInjection { bond, ohms } => {
                let from = self
                    .node("network.source.L")
                    .or_else(|| self.node("network.source.L1"))
                    .ok_or_else(|| NetworkError::Bad("the network has no first line".to_owned()))?;
                let to = match bond {
                    Some(bond) => self.terminal(&format!("{bond}.pipe"))?,
                    None => self.soil,
                };
                self.add_branch(None, from, to, Law::Ohms(*ohms));
            }
            Edit::TripAmps { rcd, amps } => self.set_rcd(rcd, Some(*amps), None)?,
            Edit::TripSeconds { rcd, seconds } => self.set_rcd(rcd, None, Some(*seconds))?,
            Edit::DeadRcd { rcd } => self.set_rcd(rcd, Some(f64::INFINITY), None)?,
        }
        Ok(())
    }

    fn set_rcd(
        &mut self,
        id: &str,
        amps: Option<f64>,
        seconds: Option<f64>,
    ) -> Result<(), NetworkError> {
        let device = self.device(id)?;
        match &mut self.devices[device].kind {
            DeviceKind::Rcd {
                trip_override,
                seconds_override,
                ..
            } => {
                *trip_override = amps.or(*trip_override);
                *seconds_override = seconds.or(*seconds_override);
                Ok(())
            }
            _ => Err(NetworkError::Bad(format!("{id} is not an RCD"))),
        }
    }

    /// Exchanges two conductors at a point's terminals: its equipment and probes see them exchanged,
    /// the cable that goes on does not.
    fn swap(&mut self, at: &str, conductors: &[String; 2]) -> Result<(), NetworkError> {
        let names = [
            format!("{at}.{}", conductors[0]),
            format!("{at}.{}", conductors[1]),
        ];
        let (x, y) = (self.terminal(&names[0])?, self.terminal(&names[1])?);
        for branch in &mut self.branches {
            let of_point = match branch.needs {
                Needs::Plugged(i) | Needs::On(i) => self.items[i].point == at,
                _ => branch.law == Law::TestLoad,
            };
            if of_point {
                for end in [&mut branch.a, &mut branch.b] {
                    if *end == x {
                        *end = y;
                    } else if *end == y {
                        *end = x;
                    }
                }
            }
        }
        self.terminals.insert(names[0].clone(), y);
        self.terminals.insert(names[1].clone(), x);
        Ok(())
    }

    /// Splits an element at `position` from L, with `ohms` from there to the frame. The element's
    /// switch is in its line, so switched off it still leaks to the neutral's end.
    fn element(&mut self, id: &str, position: f64, ohms: f64) -> Result<(), NetworkError> {
        if !(0.0..=1.0).contains(&position) {
            return Err(NetworkError::Bad(format!(
                "a position of {position} along an element: it runs from 0 (L) to 1"
            )));
        }
        let item = *self
            .item_ids
            .get(id)
            .ok_or_else(|| NetworkError::UnknownPlace {
                what: "equipment",
                name: id.to_owned(),
                nearest: nearest(id, self.item_ids.keys().map(String::as_str), 3),
            })?;
        let Some(&load) = self.items[item].loads.first() else {
            return Ok(());
        };
        let frame = self.items[item].frame;
        let (top, bottom, law) = {
            let b = &self.branches[load];
            (b.a, b.b, b.law.clone())
        };
        let share = |part: f64| match law.clone() {
            Law::Load {
                watts,
                power_factor,
                share,
                ..
            } => Law::Load {
                watts,
                power_factor,
                share,
                electronics: false,
                part,
            },
            other => other,
        };
        let node = self.nodes.len();
        self.nodes.push(format!("{id}.element"));
        // A leak at either very end still leaves the element whole.
        let position = position.clamp(1e-6, 1.0 - 1e-6);
        self.branches[load].series = f64::INFINITY;
        let upper = self.add_branch(None, top, node, share(position));
        self.branches[upper].needs = Needs::On(item);
        let lower = self.add_branch(None, node, bottom, share(1.0 - position));
        self.branches[lower].needs = Needs::Plugged(item);
        let leak = self.add_branch(None, node, frame, Law::Ohms(ohms));
        self.branches[leak].needs = Needs::Plugged(item);
        Ok(())
    }
}
