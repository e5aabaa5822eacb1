//! From parameters to admittances: the law of each branch, in AC and in DC.
//!
//! Copper by IEC 60228 (class 1/2 maximum d.c. resistance at 20 °C), α = 0.00393 /K (IEC 60287-1-1);
//! aluminium α = 0.00403 /K. Loads are constant impedances: `Y = (P − jP·tan φ) / 230²`.

use num_complex::Complex64;

use super::circuit::{Branch, Circuit, Law, Needs};
use super::params::Common;
use super::state::Switching;
use crate::knowledge::SourceMode;
use crate::site::Metal;

/// How two nodes hang together through a branch.
#[derive(Clone, Copy, Debug, PartialEq)]
pub enum Link {
    /// Not at all.
    Open,
    /// Without any impedance.
    Ideal,
    /// Through an admittance, S.
    Through(Complex64),
}

/// Whether a solution is at supply frequency or for an instrument's DC.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Kind {
    /// Supply frequency.
    Ac,
    /// Direct current: capacitances open, electronics blocking.
    Dc,
}

/// IEC 60228 maximum d.c. resistance at 20 °C, Ω/km: (mm², copper class 1/2, aluminium).
const IEC_60228: &[(f64, f64, f64)] = &[
    (0.5, 36.0, 0.0),
    (0.75, 24.5, 0.0),
    (1.0, 18.1, 0.0),
    (1.5, 12.1, 0.0),
    (2.5, 7.41, 0.0),
    (4.0, 4.61, 0.0),
    (6.0, 3.08, 0.0),
    (10.0, 1.83, 3.08),
    (16.0, 1.15, 1.91),
    (25.0, 0.727, 1.20),
    (35.0, 0.524, 0.868),
    (50.0, 0.387, 0.641),
    (70.0, 0.268, 0.443),
    (95.0, 0.193, 0.320),
    (120.0, 0.153, 0.253),
    (150.0, 0.124, 0.206),
    (185.0, 0.0991, 0.164),
    (240.0, 0.0754, 0.125),
];

/// Resistance of a conductor at 20 °C, Ω/m; between and beyond table rows by its section.
pub fn ohms_per_metre(mm2: f64, metal: Metal) -> f64 {
    for &(section, copper, aluminium) in IEC_60228 {
        let row = match metal {
            Metal::Copper => copper,
            Metal::Aluminium => aluminium,
        };
        if (section - mm2).abs() < 1e-9 && row > 0.0 {
            return row / 1000.0;
        }
    }
    // Resistivity that the table's rows imply, within 1 %: 18.3 and 30.6 mΩ·mm²/m.
    match metal {
        Metal::Copper => 0.0183 / mm2,
        Metal::Aluminium => 0.0306 / mm2,
    }
}

/// Values of one world beside the circuit: parameters, common ids, ω.
#[derive(Clone, Copy)]
pub struct Values<'a> {
    /// One number per parameter.
    pub theta: &'a [f64],
    /// Ids of those used by name.
    pub common: &'a Common,
}

/// Below this, Ω, a branch is a wire: its current follows from Kirchhoff's law, not from its drop.
const IDEAL_OHMS: f64 = 1e-9;

fn impedance(r: f64, x: f64) -> Link {
    if r.is_infinite() {
        Link::Open
    } else if r < IDEAL_OHMS && x.abs() < IDEAL_OHMS {
        Link::Ideal
    } else {
        let z = Complex64::new(r, x);
        Link::Through(z.conj() / z.norm_sqr())
    }
}

fn admittance(y: Complex64) -> Link {
    if y.re == 0.0 && y.im == 0.0 {
        Link::Open
    } else {
        Link::Through(y)
    }
}

/// Whether a branch conducts in this switching state, as far as devices, ends and needs go.
fn conducts(circuit: &Circuit, branch: &Branch, sw: &Switching, theta: &[f64]) -> bool {
    if branch.devices.iter().any(|&d| sw.device_open[d])
        || branch.ends.iter().any(|&e| sw.end_lifted[e])
    {
        return false;
    }
    match branch.needs {
        Needs::Nothing => true,
        Needs::Plugged(i) => sw.plugged[i],
        Needs::On(i) => sw.plugged[i] && sw.on[i].unwrap_or(theta[circuit.items[i].on.0] > 0.5),
        Needs::Provoked(p) => sw.provoke == Some(p),
        Needs::SourceOn(i) => sw.sources[i] == SourceMode::On,
        Needs::SourceBackup(i) => sw.sources[i] == SourceMode::Backup,
    }
}

/// The link that branch `index` makes.
pub fn link(circuit: &Circuit, index: usize, sw: &Switching, values: Values, kind: Kind) -> Link {
    let branch = &circuit.branches[index];
    if branch.series.is_infinite() || !conducts(circuit, branch, sw, values.theta) {
        return Link::Open;
    }
    let theta = values.theta;
    let common = values.common;
    let omega = match kind {
        Kind::Ac => 2.0 * std::f64::consts::PI * circuit.hertz,
        Kind::Dc => 0.0,
    };
    let ac = kind == Kind::Ac;
    let base = if let Some(ohms) = branch.replaced {
        impedance(ohms, 0.0)
    } else {
        match &branch.law {
            Law::Cable {
                metres,
                mm2,
                metal,
                scale,
                reactive,
            } => {
                let length = metres * scale.map_or(1.0, |s| theta[s.0]);
                let alpha = match metal {
                    Metal::Copper => 0.00393,
                    Metal::Aluminium => 0.00403,
                };
                let r = length
                    * ohms_per_metre(*mm2, *metal)
                    * (1.0 + alpha * (theta[common.celsius.0] - 20.0))
                    + theta[common.joint.0];
                let x = if ac && *reactive {
                    length * theta[common.reactance.0]
                } else {
                    0.0
                };
                impedance(r, x)
            }
            Law::Joint => impedance(theta[common.joint.0], 0.0),
            Law::Contact => impedance(theta[common.contact.0], 0.0),
            Law::NetworkHalf => {
                let z = theta[common.network_ohms.0] / 2.0;
                let ratio = theta[common.x_over_r.0];
                let r = z / (1.0 + ratio * ratio).sqrt();
                impedance(r, if ac { r * ratio } else { 0.0 })
            }
            Law::Param { ohms, factor, gate } => {
                if gate.is_some_and(|g| theta[g.0] < 0.5) {
                    Link::Open
                } else {
                    impedance(theta[ohms.0] * factor, 0.0)
                }
            }
            Law::Insulation { metres, farads } => {
                let length = metres.max(0.0);
                let insulation = theta[common.insulation.0];
                let g = if *farads >= 1.0 && insulation.is_finite() {
                    length / insulation
                } else {
                    0.0
                };
                admittance(Complex64::new(
                    g,
                    omega * theta[common.farads.0] * farads * length,
                ))
            }
            Law::Leak { farads, ohms } => {
                let ohms = theta[ohms.0];
                let g = if ohms.is_finite() { 1.0 / ohms } else { 0.0 };
                admittance(Complex64::new(g, omega * theta[farads.0]))
            }
            Law::Load {
                watts,
                power_factor,
                share,
                electronics,
                part,
            } => {
                let found = match branch.needs {
                    Needs::On(i) if sw.on[i].is_none() => theta[common.as_found.0],
                    _ => 1.0,
                };
                let watts = theta[watts.0] * share * found;
                let pf = theta[power_factor.0].clamp(0.05, 1.0);
                let tan = (1.0 - pf * pf).sqrt() / pf;
                let g = watts / (230.0 * 230.0 * part);
                if ac {
                    admittance(Complex64::new(g, -g * tan))
                } else if *electronics {
                    Link::Open
                } else {
                    admittance(Complex64::new(g, 0.0))
                }
            }
            Law::FeedIn { watts, share } => {
                if ac {
                    admittance(Complex64::new(
                        -theta[watts.0] * share / (230.0 * 230.0),
                        0.0,
                    ))
                } else {
                    Link::Open
                }
            }
            Law::Ohms(ohms) => impedance(*ohms, 0.0),
            Law::Farads(farads) => admittance(Complex64::new(0.0, omega * farads)),
            Law::TestLoad => {
                let watts: f64 = sw.loads.iter().filter(|l| l.0 == index).map(|l| l.1).sum();
                admittance(Complex64::new(watts / (230.0 * 230.0), 0.0))
            }
        }
    };
    if branch.series == 0.0 {
        return base;
    }
    match base {
        Link::Open => Link::Open,
        Link::Ideal => impedance(branch.series, 0.0),
        Link::Through(y) => {
            let z = y.conj() / y.norm_sqr() + branch.series;
            Link::Through(z.conj() / z.norm_sqr())
        }
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn copper_at_temperature_by_iec_60287() {
        // trade.md E13b: 1 + 0.00393 · 55 = 1.21615.
        let factor = 1.0 + 0.00393 * (75.0 - 20.0);
        assert!((factor - 1.21615_f64).abs() < 1e-12);
        assert_eq!(ohms_per_metre(2.5, Metal::Copper), 7.41e-3);
        assert!((ohms_per_metre(3.0, Metal::Copper) - 6.1e-3).abs() < 1e-4);
    }
}
