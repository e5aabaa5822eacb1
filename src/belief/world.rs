//! A hypothesis as a circuit whose fault values can be set without building it anew.

use super::model::Model;
use crate::faults::{Fault, FaultError, Telltale, edits, looks, outcomes};
use crate::knowledge::{Manner, Prior, Provoke};
use crate::network::params::{at_normal, median};
use crate::network::{Circuit, NetworkError, Wiring};

/// How a number of the circuit follows from an unknown.
#[derive(Clone, Copy, Debug, PartialEq)]
enum Form {
    /// a + b · value.
    Linear(f64, f64),
    /// k / value.
    Over(f64),
}

#[derive(Clone, Debug)]
struct Slot {
    number: usize,
    unknown: usize,
    form: Form,
}

/// A hypothesis' circuit: its wiring, its unknown values, how it comes and goes, what a look finds.
#[derive(Clone, Debug)]
pub struct World {
    /// The circuit, planned; its fault values are those last set.
    pub wiring: Wiring,
    slots: Vec<Slot>,
    /// Priors of the unknowns: values, then positions.
    pub unknowns: Vec<Prior>,
    manners: Vec<Manner>,
    /// Looks.
    pub looks: Vec<Telltale>,
    /// Outcomes of checks beside the circuit's.
    pub outcomes: Vec<Telltale>,
    /// Whether its circuit differs from the sound one at all.
    pub edited: bool,
}

/// Why a hypothesis has no circuit.
#[derive(Debug, thiserror::Error)]
pub enum WorldError {
    /// Its faults do not fit the site.
    #[error(transparent)]
    Fault(#[from] FaultError),
    /// Its edits do not fit the circuit.
    #[error(transparent)]
    Network(#[from] NetworkError),
}

impl World {
    /// The sound installation.
    pub fn sound(model: &Model) -> Self {
        Self {
            wiring: model.sound.clone(),
            slots: Vec::new(),
            unknowns: Vec::new(),
            manners: Vec::new(),
            looks: Vec::new(),
            outcomes: Vec::new(),
            edited: false,
        }
    }

    /// A circuit of its own making, without unknowns.
    pub fn of_circuit(circuit: Circuit) -> Self {
        Self {
            wiring: Wiring::new(circuit),
            slots: Vec::new(),
            unknowns: Vec::new(),
            manners: Vec::new(),
            looks: Vec::new(),
            outcomes: Vec::new(),
            edited: true,
        }
    }

    /// The installation under faults. A fault whose kind has no edit leaves the circuit as it is.
    ///
    /// # Errors
    /// Faults that do not fit this site or contradict each other.
    pub fn new(model: &Model, faults: &[Fault]) -> Result<Self, WorldError> {
        let mut world = Self::sound(model);
        world.looks = looks(&model.knowledge, &model.site, faults)?;
        world.outcomes = outcomes(&model.knowledge, &model.site, faults)?;
        let mut physical: Vec<Fault> = Vec::new();
        // (fault index, is a position) of each unknown.
        let mut of: Vec<(usize, bool)> = Vec::new();
        for fault in faults {
            let Some(kind) = model.knowledge.fault(&fault.kind) else {
                continue;
            };
            if let Some(manner) = &kind.manner {
                world.manners.push(manner.clone());
            }
            if kind.edits.is_empty() {
                continue;
            }
            let mut fault = fault.clone();
            if let Some(value) = &kind.value
                && fault.value.is_none()
            {
                fault.value = Some(median(&value.prior));
                of.push((physical.len(), false));
                world.unknowns.push(value.prior.clone());
            }
            if kind.position && fault.position.is_none() {
                fault.position = Some(0.5);
                of.push((physical.len(), true));
                world.unknowns.push(Prior::Uniform {
                    low: 0.0,
                    high: 1.0,
                });
            }
            physical.push(fault);
        }
        if physical.is_empty() {
            return Ok(world);
        }
        let circuit = |faults: &[Fault]| -> Result<Circuit, WorldError> {
            Ok(model
                .network
                .edited(&edits(&model.knowledge, &model.site, faults)?)?)
        };
        let base = circuit(&physical)?;
        let at = base.numbers();
        for (unknown, &(fault, position)) in of.iter().enumerate() {
            let start = if position {
                0.5
            } else {
                physical[fault].value.unwrap_or(1.0)
            };
            let with = |value: f64| -> Result<Vec<f64>, WorldError> {
                let mut faults = physical.clone();
                if position {
                    faults[fault].position = Some(value);
                } else {
                    faults[fault].value = Some(value);
                }
                Ok(circuit(&faults)?.numbers())
            };
            let other = with(start * 0.8)?;
            for (number, (&x, &y)) in at.iter().zip(&other).enumerate() {
                if x == y {
                    continue;
                }
                let slope = (x - y) / (start * 0.2);
                let linear = Form::Linear(x - slope * start, slope);
                let reciprocal = Form::Over(x * start);
                // A reciprocal gives y = x / 0.8 exactly; anything else here is linear.
                let form = if (y * 0.8 - x).abs() <= 1e-9 * x.abs() {
                    reciprocal
                } else {
                    linear
                };
                world.slots.push(Slot {
                    number,
                    unknown,
                    form,
                });
            }
        }
        world.edited = true;
        world.wiring = Wiring::new(base);
        Ok(world)
    }

    /// Values of the unknowns at standard normal deviates.
    pub fn values(&self, z: &[f64]) -> Vec<f64> {
        self.unknowns
            .iter()
            .zip(z)
            .map(|(prior, &z)| at_normal(prior, z))
            .collect()
    }

    /// Sets the unknowns.
    pub fn set(&mut self, z: &[f64]) {
        let values = self.values(z);
        for slot in &self.slots {
            let v = values[slot.unknown];
            let x = match slot.form {
                Form::Linear(a, b) => a + b * v,
                Form::Over(k) => k / v,
            };
            self.wiring.circuit.set_number(slot.number, x);
        }
    }

    /// Probability that its faults show in a reading, so provoked or not.
    pub fn shows(&self, provoke: Option<Provoke>) -> f64 {
        self.manners
            .iter()
            .map(|m| {
                provoke
                    .and_then(|p| m.provoked.get(&p).copied())
                    .unwrap_or(m.shows)
            })
            .fold(1.0, f64::min)
    }
}
