//! What protective devices do with the phasors: residual current against a threshold, overcurrent
//! against a rating, one device at a time until nothing more operates.
//!
//! RCDs operate by IEC 61008-1 between half and the whole of IΔn: each has its own threshold. A breaker
//! or fuse counts as opening within a minute at 2.55 × its rating (IEC 60898-1, seen).

use super::circuit::{Circuit, DeviceKind, Needs};
use super::law::Values;
use super::solve::{Extra, Phasors, Solver};
use super::state::Switching;
use crate::knowledge::SourceMode;
use crate::numeric::special;
use num_complex::Complex64;

/// Multiple of its rating at which a breaker opens within a minute.
pub const BREAKER_MINUTE: f64 = 2.55;

/// The residual current of an RCD, A: the phasor sum of what passes its core.
pub fn residual(circuit: &Circuit, device: usize, phasors: &Phasors) -> Complex64 {
    circuit.devices[device]
        .through
        .iter()
        .map(|&b| phasors.amps[b])
        .sum()
}

/// The threshold of an RCD, A; infinite if it never operates.
pub fn threshold(circuit: &Circuit, device: usize, values: Values) -> Option<f64> {
    match &circuit.devices[device].kind {
        DeviceKind::Rcd {
            trip_amps,
            trip_override,
            ..
        } => Some(trip_override.unwrap_or(values.theta[trip_amps.0])),
        _ => None,
    }
}

/// How far a device is beyond operating: 1 is the edge; 0 for a plain switch.
pub fn strain(circuit: &Circuit, device: usize, phasors: &Phasors, values: Values) -> f64 {
    match &circuit.devices[device].kind {
        DeviceKind::Switch => 0.0,
        DeviceKind::Rcd {
            trip_amps,
            trip_override,
            ..
        } => {
            let threshold = trip_override.unwrap_or(values.theta[trip_amps.0]);
            special::abs(residual(circuit, device, phasors)) / threshold
        }
        DeviceKind::Breaker { amps } => {
            let worst = circuit.devices[device]
                .through
                .iter()
                .map(|&b| special::abs(phasors.amps[b]))
                .fold(0.0, f64::max);
            worst / (amps * BREAKER_MINUTE)
        }
    }
}

fn delayed(circuit: &Circuit, device: usize) -> bool {
    matches!(
        circuit.devices[device].kind,
        DeviceKind::Rcd { delayed: true, .. }
    )
}

/// Solves with sources that lose the supply switched off (an inverter does not feed a dead net).
pub fn solve(solver: &dyn Solver, sw: &mut Switching, extra: &[Extra]) -> Phasors {
    loop {
        let phasors = solver.phasors(sw, extra);
        let circuit = solver.circuit();
        let lost = circuit.branches.iter().find_map(|b| match b.needs {
            Needs::SourceOn(i) if sw.sources[i] == SourceMode::On => {
                let v = special::abs(phasors.volts[b.a] - phasors.volts[b.b]);
                (!(180.0..=276.0).contains(&v)).then_some(i)
            }
            _ => None,
        });
        match lost {
            Some(i) => sw.sources[i] = SourceMode::Off,
            None => return phasors,
        }
    }
}

/// Lets devices operate, the most strained first (delayed ones only when no other would), until none
/// would; returns the phasors then and the devices in the order of operation.
pub fn settle(solver: &dyn Solver, sw: &mut Switching, extra: &[Extra]) -> (Phasors, Vec<usize>) {
    let mut operated = Vec::new();
    loop {
        let phasors = solve(solver, sw, extra);
        let circuit = solver.circuit();
        let worst = (0..circuit.devices.len())
            .filter(|&d| !sw.device_open[d])
            .map(|d| {
                (
                    delayed(circuit, d),
                    strain(circuit, d, &phasors, solver.values()),
                    d,
                )
            })
            .filter(|c| c.1 >= 1.0)
            .min_by(|x, y| x.0.cmp(&y.0).then(y.1.total_cmp(&x.1)).then(x.2.cmp(&y.2)));
        match worst {
            Some((_, _, device)) => {
                sw.device_open[device] = true;
                operated.push(device);
            }
            None => return (phasors, operated),
        }
    }
}
