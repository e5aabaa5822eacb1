//! Where the current goes: the whole circuit solved under given faults, beside the sound one.

use std::collections::BTreeMap;

use serde::Serialize;

use super::Session;
use super::error::SessionError;
use crate::faults::{Fault, edits};
use crate::knowledge::Setup;
use crate::network::protect::residual;
use crate::network::{ExactSolver, Solver, Unnamed, Values};
use crate::numeric::special;
use crate::site::ends;

/// Current in a conductor.
#[derive(Clone, Debug, PartialEq, Serialize)]
pub struct PathRow {
    /// Conductor: a place for a clamp (contract §3 `amps`).
    pub at: String,
    /// A rms under the faults.
    pub amps: f64,
    /// A rms in the sound installation.
    pub sound: f64,
}

/// What an RCD sees.
#[derive(Clone, Debug, PartialEq, Serialize)]
pub struct RcdRow {
    /// RCD.
    pub rcd: String,
    /// A rms of the phasor sum in its core.
    pub amps: f64,
    /// Its rated residual current, A.
    pub rated: f64,
}

/// Touchable metal against remote earth.
#[derive(Clone, Debug, PartialEq, Serialize)]
pub struct MetalRow {
    /// Earth bar, pipe.
    pub at: String,
    /// V rms.
    pub volts: f64,
}

/// Where the current goes.
#[derive(Clone, Debug, Default, PartialEq, Serialize)]
pub struct PathView {
    /// Conductors that carry what they should not, or otherwise than sound, the largest difference first.
    pub conductors: Vec<PathRow>,
    /// RCDs.
    pub rcds: Vec<RcdRow>,
    /// Metal.
    pub metal: Vec<MetalRow>,
}

/// Under this no clamp shows a current, A.
const LEAST_AMPS: f64 = 0.5e-3;

/// Solved amps and volts by name.
struct Solved {
    amps: BTreeMap<String, f64>,
    rcds: Vec<RcdRow>,
    metal: Vec<MetalRow>,
}

impl Session {
    /// Where the current goes under these faults: in service, every piece of equipment on, nothing tripped,
    /// unknowns at their prior median.
    ///
    /// # Errors
    /// `unknown-word`, `unknown-place`, `conflict`, `not-predictable`.
    pub fn current_path(&self, faults: &[Fault]) -> Result<PathView, SessionError> {
        let wrong = self.solved(faults)?;
        let sound = self.solved(&[])?;
        let mut conductors: Vec<PathRow> = wrong
            .amps
            .iter()
            .map(|(at, amps)| {
                let sound = sound.amps.get(at).copied().unwrap_or(0.0);
                PathRow {
                    at: at.clone(),
                    amps: *amps,
                    sound,
                }
            })
            .filter(|row| (row.amps - row.sound).abs() > LEAST_AMPS.max(0.02 * row.sound))
            .collect();
        let changed = |row: &PathRow| (row.amps - row.sound).abs();
        conductors.sort_by(|a, b| {
            changed(b)
                .total_cmp(&changed(a))
                .then_with(|| a.at.cmp(&b.at))
        });
        Ok(PathView {
            conductors,
            rcds: wrong.rcds,
            metal: wrong.metal,
        })
    }

    fn solved(&self, faults: &[Fault]) -> Result<Solved, SessionError> {
        let model = &self.visit.engine.model;
        let edits = edits(&model.knowledge, &model.site, faults)?;
        let circuit = model.network.edited(&edits)?;
        let theta = model.network.point_values(&BTreeMap::new())?;
        let on = model
            .site
            .equipment
            .iter()
            .map(|item| item.id.clone())
            .collect();
        let setup = Setup {
            on,
            ..Setup::default()
        };
        let switching = circuit.switching(&setup, Unnamed::Off)?;
        let values = Values {
            theta: &theta,
            common: &model.network.common,
        };
        let solver = ExactSolver {
            circuit: &circuit,
            values,
        };
        let phasors = solver.phasors(&switching, &[]);
        let size = |z| special::abs(z);

        let mains = ["L", "L1", "L2", "L3", "N", "PE"].map(|word| format!("service.{word}"));
        let clamps = ends(&model.site)
            .into_iter()
            .filter(|end| !end.ends_with(".split"))
            .chain(mains);
        let amps = clamps
            .filter_map(|name| {
                let branch = circuit.clamp(&name).ok()?;
                Some((name, size(*phasors.amps.get(branch)?)))
            })
            .collect();
        let rcds = model
            .site
            .boards
            .iter()
            .flat_map(|board| &board.rcds)
            .filter_map(|rcd| {
                let device = *circuit.device_ids.get(&rcd.id)?;
                let amps = size(residual(&circuit, device, &phasors));
                Some(RcdRow {
                    rcd: rcd.id.clone(),
                    amps,
                    rated: rcd.amps,
                })
            })
            .collect();
        let bars = model
            .site
            .boards
            .iter()
            .map(|board| format!("{}.PE", board.id));
        let pipes = model
            .site
            .bonds
            .iter()
            .map(|bond| format!("{}.pipe", bond.id));
        let metal = bars
            .chain(pipes)
            .filter_map(|at| {
                let node = circuit.node(&at)?;
                let volts = *phasors.volts.get(node)? - *phasors.volts.get(circuit.soil)?;
                Some(MetalRow {
                    at,
                    volts: size(volts),
                })
            })
            .collect();
        Ok(Solved { amps, rcds, metal })
    }
}
