//! What every instrument shows: hookups resolved on a circuit, and read through a solver.
//!
//! Long because every quantity of contract §3 is resolved and read here.

use num_complex::Complex64;

use super::circuit::{Circuit, DeviceKind};
use super::law::Kind;
use super::protect::{self, residual, settle, strain, threshold};
use super::solve::{Extra, Phasors, Solver};
use super::state::Switching;
use super::{NetworkError, Outcome, Prediction};
use crate::knowledge::{Hookup, Meter, MeterWord};
use crate::numeric::special;
use crate::quantity::{Unit, Word};

/// A hookup on a given circuit: nodes and branches in place of names.
#[derive(Clone, Debug, PartialEq)]
pub enum Probe {
    /// Voltmeter.
    Volts {
        /// Nodes.
        between: [usize; 2],
        /// Its input at supply frequency, S.
        input: Complex64,
        /// Draws enough to trip an RCD.
        heavy: bool,
    },
    /// Clamp: branches, each counted from `a` to `b`.
    Amps {
        /// Branches.
        around: Vec<usize>,
    },
    /// DC between joined groups.
    Insulation {
        /// Nodes.
        between: [Vec<usize>; 2],
    },
    /// DC between two nodes.
    Continuity {
        /// Nodes.
        between: [usize; 2],
    },
    /// Loop impedance.
    Loop {
        /// Nodes.
        between: [usize; 2],
        /// Test current, A.
        amps: f64,
    },
    /// RCD time.
    TripTime {
        /// Device.
        rcd: usize,
        /// L and PE there.
        between: [usize; 2],
        /// Of IΔn.
        multiple: f64,
    },
    /// RCD ramp.
    Ramp {
        /// Device.
        rcd: usize,
        /// L and PE there.
        between: [usize; 2],
    },
    /// Does it stay in.
    Holds {
        /// Device.
        device: usize,
    },
    /// Does the lamp change.
    Lamp {
        /// L and N there.
        between: [usize; 2],
        /// Equipment that the setup switches on.
        on: Vec<usize>,
    },
}

/// Ω of a low-impedance voltmeter (trade.md A59, seen).
pub const LOW_Z_OHMS: f64 = 3000.0;

fn line_of(circuit: &Circuit, place: &str) -> Result<usize, NetworkError> {
    circuit
        .terminal(&format!("{place}.L"))
        .or_else(|e| circuit.terminal(&format!("{place}.L1")).map_err(|_| e))
}

impl Circuit {
    /// The branch that a clamp at `name` encloses, counted away from the supply.
    pub fn clamp(&self, name: &str) -> Result<usize, NetworkError> {
        let candidates = [
            name.to_owned(),
            format!("{name} main"),
            format!("{name}@board"),
            name.strip_suffix(".N")
                .map(|b| format!("{b}.main-neutral"))
                .unwrap_or_default(),
            name.strip_suffix(".PE")
                .map(|b| format!("{b}.incoming-pe"))
                .unwrap_or_default(),
            name.replace(".feed.", ".") + "@board",
        ];
        for key in &candidates {
            if let Some(&b) = self.keys.get(key)
                && !key.starts_with("network.")
                && !key.starts_with("street.")
                && !key.starts_with("into ")
            {
                return Ok(b);
            }
        }
        let shown: Vec<String> = self
            .ends
            .iter()
            .filter(|e| !e.ends_with(".split"))
            .map(|e| e.trim_end_matches("@board").to_owned())
            .chain(
                self.keys
                    .keys()
                    .filter(|k| k.starts_with("service."))
                    .cloned(),
            )
            .collect();
        Err(NetworkError::UnknownPlace {
            what: "place for a clamp",
            name: name.to_owned(),
            nearest: crate::quantity::suggest::nearest(name, &shown, 3),
        })
    }

    /// Resolves a hookup's names on this circuit; `on` is what the setup switches on.
    ///
    /// # Errors
    /// A terminal, device or conductor that is not here; a hookup across nothing; a number out of range.
    pub fn probe(&self, hookup: &Hookup, on: &[String]) -> Result<Probe, NetworkError> {
        let pair = |b: &[String; 2]| -> Result<[usize; 2], NetworkError> {
            if b[0] == b[1] {
                return Err(NetworkError::Bad(format!(
                    "both probes are on {}: name two terminals",
                    b[0]
                )));
            }
            Ok([self.terminal(&b[0])?, self.terminal(&b[1])?])
        };
        let rcd = |id: &str, at: &Option<String>| -> Result<(usize, [usize; 2]), NetworkError> {
            let device = self.device(id)?;
            let DeviceKind::Rcd { load, .. } = &self.devices[device].kind else {
                return Err(NetworkError::Bad(format!("{id} is not an RCD")));
            };
            let between = match at {
                Some(at) => [line_of(self, at)?, self.terminal(&format!("{at}.PE"))?],
                None => {
                    let line = *load
                        .first()
                        .ok_or_else(|| NetworkError::Bad(format!("{id} has no load terminals")))?;
                    let board = self.nodes[line].split('.').next().unwrap_or_default();
                    [line, self.terminal(&format!("{board}.PE"))?]
                }
            };
            Ok((device, between))
        };
        Ok(match hookup {
            Hookup::Volts { between, meter } => {
                let omega = 2.0 * std::f64::consts::PI * self.hertz;
                let (input, heavy) = match meter {
                    None | Some(Meter::Named(MeterWord::HighZ)) => {
                        (Complex64::new(1e-7, omega * 100e-12), false)
                    }
                    Some(Meter::Named(MeterWord::LowZ)) => {
                        (Complex64::new(1.0 / LOW_Z_OHMS, 0.0), true)
                    }
                    Some(Meter::Ohms(r)) if *r > 0.0 && r.is_finite() => {
                        (Complex64::new(1.0 / r, 0.0), *r < 50e3)
                    }
                    Some(Meter::Ohms(r)) => {
                        return Err(NetworkError::Bad(format!(
                            "a meter of {r} Ω: give ohms above zero"
                        )));
                    }
                };
                Probe::Volts {
                    between: pair(between)?,
                    input,
                    heavy,
                }
            }
            Hookup::Amps { around } => {
                if around.is_empty() {
                    return Err(NetworkError::Bad(
                        "a clamp around nothing: name a conductor".to_owned(),
                    ));
                }
                let mut branches = Vec::new();
                for name in around {
                    let b = self.clamp(name)?;
                    if branches.contains(&b) {
                        return Err(NetworkError::Bad(format!("{name} is in the clamp twice")));
                    }
                    branches.push(b);
                }
                Probe::Amps { around: branches }
            }
            Hookup::Insulation {
                between,
                test_volts,
            } => {
                if ![250.0, 500.0, 1000.0].contains(test_volts) {
                    return Err(NetworkError::Bad(format!(
                        "{test_volts} V test: 250, 500 or 1000"
                    )));
                }
                let group = |names: &Vec<String>| -> Result<Vec<usize>, NetworkError> {
                    if names.is_empty() {
                        return Err(NetworkError::Bad(
                            "an insulation test needs terminals on both sides".to_owned(),
                        ));
                    }
                    names.iter().map(|n| self.terminal(n)).collect()
                };
                Probe::Insulation {
                    between: [group(&between[0])?, group(&between[1])?],
                }
            }
            Hookup::Continuity { between } => Probe::Continuity {
                between: pair(between)?,
            },
            Hookup::Loop { between, amps } => {
                let amps = amps.unwrap_or(10.0);
                if !(amps > 0.0 && amps <= 100.0) {
                    return Err(NetworkError::Bad(format!(
                        "a loop test of {amps} A: 0.015 or 10 is usual"
                    )));
                }
                Probe::Loop {
                    between: pair(between)?,
                    amps,
                }
            }
            Hookup::TripTime {
                rcd: id,
                at,
                multiple,
                half_cycle: _,
            } => {
                if ![0.5, 1.0, 2.0, 5.0].contains(multiple) {
                    return Err(NetworkError::Bad(format!(
                        "{multiple} times the rated current: 0.5, 1 or 5"
                    )));
                }
                let (rcd, between) = rcd(id, at)?;
                Probe::TripTime {
                    rcd,
                    between,
                    multiple: *multiple,
                }
            }
            Hookup::Ramp { rcd: id, at } => {
                let (rcd, between) = rcd(id, at)?;
                Probe::Ramp { rcd, between }
            }
            Hookup::Holds { device } => Probe::Holds {
                device: self.device(device)?,
            },
            Hookup::Lamp { at } => {
                let on =
                    on.iter()
                        .map(|id| {
                            self.item_ids.get(id).copied().ok_or_else(|| {
                                NetworkError::UnknownPlace {
                                    what: "equipment",
                                    name: id.clone(),
                                    nearest: Vec::new(),
                                }
                            })
                        })
                        .collect::<Result<_, _>>()?;
                Probe::Lamp {
                    between: [line_of(self, at)?, self.terminal(&format!("{at}.N"))?],
                    on,
                }
            }
            Hookup::Seen { .. } => {
                return Err(NetworkError::Bad(
                    "what is seen does not follow from the circuit".to_owned(),
                ));
            }
        })
    }
}

fn ohms(z: Option<f64>) -> Outcome {
    Outcome::Number(z.unwrap_or(f64::INFINITY))
}

/// Reads a probe in a switching state; with `protection`, devices operate first, and a test that
/// itself trips one reads `trips`.
pub fn read(solver: &dyn Solver, probe: &Probe, state: &Switching, protection: bool) -> Prediction {
    let circuit = solver.circuit();
    let mut sw = state.clone();
    if let Probe::Holds { device } = probe {
        sw.device_open[*device] = false;
    }
    let mut tripped = Vec::new();
    let settled = |sw: &mut Switching, extra: &[Extra], tripped: &mut Vec<usize>| -> Phasors {
        if protection {
            let (phasors, operated) = settle(solver, sw, extra);
            tripped.extend(operated);
            phasors
        } else {
            protect::solve(solver, sw, extra)
        }
    };
    // A test that draws current: does it open something that stood?
    let test_trips = |sw: &Switching, extra: Extra| -> Vec<usize> {
        if !protection {
            return Vec::new();
        }
        let mut with = sw.clone();
        let (_, operated) = settle(solver, &mut with, &[extra]);
        operated
            .into_iter()
            .filter(|&d| matches!(circuit.devices[d].kind, DeviceKind::Rcd { .. }))
            .collect()
    };
    let stake = |nodes: &[usize; 2]| -> f64 {
        if nodes.contains(&circuit.soil) {
            solver.values().theta[solver.values().common.stake.0]
        } else {
            0.0
        }
    };
    let mut unit = Unit::None;
    let mut enclosed = 0.0;
    let outcome = match probe {
        Probe::Volts {
            between,
            input,
            heavy,
        } => {
            unit = Unit::Volt;
            settled(&mut sw, &[], &mut tripped);
            let [a, b] = *between;
            let lead = stake(between);
            let seen = Complex64::new(1.0, 0.0) / (Complex64::new(1.0, 0.0) / input + lead);
            let extra = Extra { a, b, y: seen };
            let by_test = if *heavy {
                test_trips(&sw, extra)
            } else {
                Vec::new()
            };
            if by_test.is_empty() {
                let p = protect::solve(solver, &mut sw, &[extra]);
                let share = special::abs(seen / input);
                Outcome::Number(special::abs(p.volts[a] - p.volts[b]) * share)
            } else {
                tripped.extend(by_test);
                Outcome::Word(Word::Trips)
            }
        }
        Probe::Amps { around } => {
            unit = Unit::Ampere;
            let p = settled(&mut sw, &[], &mut tripped);
            enclosed = around.iter().map(|&b| special::abs(p.amps[b])).sum();
            Outcome::Number(special::abs(around.iter().map(|&b| p.amps[b]).sum()))
        }
        Probe::Insulation { between } => {
            unit = Unit::Ohm;
            ohms(
                solver
                    .impedance(&sw, &between[0], &between[1], Kind::Dc)
                    .map(|z| z.re),
            )
        }
        Probe::Continuity { between } => {
            unit = Unit::Ohm;
            let z = solver
                .impedance(&sw, &between[..1], &between[1..], Kind::Dc)
                .map(|z| z.re);
            ohms(z.map(|z| z + stake(between)))
        }
        Probe::Loop { between, amps } => {
            unit = Unit::Ohm;
            settled(&mut sw, &[], &mut tripped);
            let [a, b] = *between;
            let by_test = test_trips(
                &sw,
                Extra {
                    a,
                    b,
                    y: Complex64::new(amps / 230.0, 0.0),
                },
            );
            if by_test.is_empty() {
                let z = solver.impedance(&sw, &between[..1], &between[1..], Kind::Ac);
                ohms(z.map(|z| special::abs(z + stake(between))))
            } else {
                tripped.extend(by_test);
                Outcome::Word(Word::Trips)
            }
        }
        Probe::TripTime {
            rcd,
            between,
            multiple,
        } => {
            let p = settled(&mut sw, &[], &mut tripped);
            let DeviceKind::Rcd {
                rated,
                trip_seconds,
                seconds_override,
                ..
            } = &circuit.devices[*rcd].kind
            else {
                return Prediction {
                    outcome: Outcome::Word(Word::NoTrip),
                    unit,
                    tripped: Vec::new(),
                    enclosed: 0.0,
                };
            };
            let amps = multiple * rated;
            let trip = match tester(solver, *rcd, *between, &sw, &p) {
                Some(t) if amps <= t.most * (1.0 + 1e-9) => {
                    special::abs(t.standing + t.transfer * amps) >= t.threshold
                }
                _ => false,
            };
            if trip && !sw.device_open[*rcd] {
                unit = Unit::Second;
                let at_rated = seconds_override.unwrap_or(solver.values().theta[trip_seconds.0]);
                // Break times shorten with the multiple as the limits of IEC 61008-1 do (300 ms to
                // about 100 ms in practice at 5 ×; trade.md A18, guess).
                Outcome::Number(if *multiple >= 5.0 {
                    at_rated / 3.0
                } else {
                    at_rated
                })
            } else {
                Outcome::Word(Word::NoTrip)
            }
        }
        Probe::Ramp { rcd, between } => {
            let p = settled(&mut sw, &[], &mut tripped);
            match ramp(solver, *rcd, *between, &sw, &p) {
                Some(amps) if !sw.device_open[*rcd] => {
                    unit = Unit::Ampere;
                    Outcome::Number(amps)
                }
                _ => Outcome::Word(Word::NoTrip),
            }
        }
        Probe::Holds { device } => {
            let p = settled(&mut sw, &[], &mut tripped);
            let out = if protection {
                tripped.contains(device)
            } else {
                strain(circuit, *device, &p, solver.values()) >= 1.0
            };
            Outcome::Word(if out { Word::Trips } else { Word::Holds })
        }
        Probe::Lamp { between, on } => {
            let mut before = sw.clone();
            if on.is_empty() {
                before.loads.clear();
            }
            for &i in on {
                before.on[i] = Some(false);
            }
            let drop = |p: &Phasors| special::abs(p.volts[between[0]] - p.volts[between[1]]);
            let off = drop(&settled(&mut before, &[], &mut Vec::new()));
            let lit = drop(&settled(&mut sw, &[], &mut tripped));
            let change = if off > 0.0 { (lit - off) / off } else { 0.0 };
            Outcome::Word(if change.abs() < 0.01 {
                Word::None
            } else if change < 0.0 {
                Word::Dims
            } else {
                Word::Brightens
            })
        }
    };
    let tripped = tripped
        .into_iter()
        .map(|d| circuit.devices[d].id.clone())
        .collect();
    Prediction {
        outcome,
        unit,
        tripped,
        enclosed,
    }
}

/// An RCD tester at its place: what the core sees of its current.
struct Tester {
    /// Residual without it, A.
    standing: Complex64,
    /// Residual per ampere of test current.
    transfer: Complex64,
    /// The most that the circuit lets it drive, A.
    most: f64,
    /// A.
    threshold: f64,
}

fn tester(
    solver: &dyn Solver,
    rcd: usize,
    between: [usize; 2],
    sw: &Switching,
    p: &Phasors,
) -> Option<Tester> {
    let [a, b] = between;
    let circuit = solver.circuit();
    let open = p.volts[a] - p.volts[b];
    if special::abs(open) < 1.0 {
        return None;
    }
    let most = match solver.impedance(sw, &[a], &[b], Kind::Ac) {
        Some(z) if special::abs(z) > 0.0 => special::abs(open) / special::abs(z),
        Some(_) => f64::INFINITY,
        None => return None,
    };
    let extra = Extra {
        a,
        b,
        y: Complex64::new(1e-4, 0.0),
    };
    let with = solver.phasors(sw, &[extra]);
    let current = extra.y * (with.volts[a] - with.volts[b]);
    let standing = residual(circuit, rcd, p);
    // The tester's current is in phase with the volts across it.
    let per_ampere = (residual(circuit, rcd, &with) - standing) / current;
    let phase = open / special::abs(open);
    Some(Tester {
        standing,
        transfer: per_ampere * phase,
        most,
        threshold: threshold(circuit, rcd, solver.values()).unwrap_or(f64::INFINITY),
    })
}

/// The tester's current at which `|standing + transfer · I|` meets the threshold, within 1.5 × IΔn.
fn ramp(
    solver: &dyn Solver,
    rcd: usize,
    between: [usize; 2],
    sw: &Switching,
    p: &Phasors,
) -> Option<f64> {
    let t = tester(solver, rcd, between, sw, p)?;
    let DeviceKind::Rcd { rated, .. } = solver.circuit().devices[rcd].kind else {
        return None;
    };
    let a = t.transfer.norm_sqr();
    let b = (t.standing * t.transfer.conj()).re;
    let c = t.standing.norm_sqr() - t.threshold * t.threshold;
    if c >= 0.0 {
        return Some(0.0);
    }
    if a == 0.0 || !c.is_finite() {
        return None;
    }
    let amps = (-b + (b * b - a * c).sqrt()) / a;
    (amps <= 1.5 * rated && amps <= t.most).then_some(amps)
}
