//! What a check does to the circuit while it is made: the states it passes, and the current its instrument drives.

use super::Ground;
use super::hold::{isolates, isolation};
use super::places::{conductors_at, place_of};
use super::point::state_key;
use crate::checks::Check;
use crate::knowledge::{Hookup, Meter, Setup, UnplugSet, procedure::MeterWord};
use crate::network::Edit;

/// One state that a check passes through, with what its instrument adds there.
#[derive(Clone, Debug, PartialEq)]
pub(super) struct Stance {
    /// Setup.
    pub setup: Setup,
    /// Burden of the instrument.
    pub burden: Vec<Edit>,
    /// Ends that are about to be lifted.
    pub lifting: Vec<String>,
}

impl Stance {
    /// Equal stances have equal keys.
    pub fn key(&self) -> String {
        let s = &self.setup;
        let loads: Vec<String> = s
            .load
            .iter()
            .map(|l| format!("{}:{}", l.at, l.watts))
            .collect();
        let unplug = match &s.unplug {
            UnplugSet::All(_) => "all".to_owned(),
            UnplugSet::These(items) => items.join("+"),
        };
        format!(
            "{}|{unplug}|{}|{}|{}|{:?}|{:?}|{}",
            state_key(s),
            s.on.join("+"),
            s.off.join("+"),
            loads.join("+"),
            s.provoke,
            self.burden,
            self.lifting.join("+")
        )
    }
}

/// The states of a check in order; none where it leaves everything as found and drives no current.
pub(super) fn stances(ground: &Ground<'_>, check: &Check) -> Vec<Stance> {
    let mut all = Vec::new();
    if isolates(check) {
        let off = isolation(ground, check);
        let lift = check.setup.lift.clone();
        all.push(Stance {
            setup: off.clone(),
            burden: Vec::new(),
            lifting: lift.clone(),
        });
        if !lift.is_empty() {
            all.push(Stance {
                setup: Setup { lift, ..off },
                burden: Vec::new(),
                lifting: Vec::new(),
            });
        }
        if !check.energised {
            return all;
        }
    }
    let burden = burden(ground, &check.hookup);
    let setup = Setup {
        closed: Vec::new(),
        ..check.setup.clone()
    };
    if setup != Setup::default() || !burden.is_empty() {
        all.push(Stance {
            setup,
            burden,
            lifting: Vec::new(),
        });
    }
    all
}

/// The instrument's path while it measures, as a resistance that draws its current at the line's volts.
fn burden(ground: &Ground<'_>, hookup: &Hookup) -> Vec<Edit> {
    let volts = ground.site.supply.volts;
    let shunt = |a: &str, b: &str, ohms: f64| Edit::Shunt {
        between: [a.to_owned(), b.to_owned()],
        ohms,
        when: None,
    };
    match hookup {
        Hookup::Loop {
            between: [a, b],
            amps,
        } => vec![shunt(a, b, volts / amps.unwrap_or(10.0).max(1e-6))],
        Hookup::Volts {
            between: [a, b],
            meter: Some(meter),
        } => match meter {
            Meter::Named(MeterWord::LowZ) => vec![shunt(a, b, 3000.0)],
            Meter::Ohms(ohms) if *ohms > 0.0 && *ohms < 1e5 => vec![shunt(a, b, *ohms)],
            _ => Vec::new(),
        },
        Hookup::TripTime {
            rcd, at, multiple, ..
        } => rcd_burden(ground, rcd, at.as_deref(), *multiple),
        // A ramp ends at one and a half times the rating (trade.md A57).
        Hookup::Ramp { rcd, at } => rcd_burden(ground, rcd, at.as_deref(), 1.5),
        _ => Vec::new(),
    }
}

fn rcd_burden(ground: &Ground<'_>, rcd: &str, at: Option<&str>, multiple: f64) -> Vec<Edit> {
    let site = ground.site;
    let place = at.map(|at| place_of(at).to_owned()).or_else(|| {
        let (board, _) = site.rcd_index(rcd)?;
        site.boards.get(board).map(|b| format!("{}.{rcd}", b.id))
    });
    let Some(conductors) = place.and_then(|p| conductors_at(site, &p)) else {
        return Vec::new();
    };
    let amps = site.rcd(rcd).map_or(0.03, |device| device.amps) * multiple;
    match (conductors.lines.first(), conductors.earth) {
        (Some(line), Some(earth)) if amps > 0.0 => {
            vec![Edit::Shunt {
                between: [line.clone(), earth],
                ohms: site.supply.volts / amps,
                when: None,
            }]
        }
        _ => Vec::new(),
    }
}

/// Pairs of touchable metal, each with what it may be touched together with; soil always, and where
/// equipment stands, pipes and its board's earth bar. The flag: it is the frame of one piece of equipment.
pub(super) fn touchables(ground: &Ground<'_>) -> Vec<([String; 2], bool)> {
    let site = ground.site;
    let soil = || "soil".to_owned();
    let mut pairs = Vec::new();
    for (index, board) in site.boards.iter().enumerate() {
        pairs.push(([format!("{}.PE", board.id), soil()], false));
        if board
            .earthing
            .as_ref()
            .is_some_and(|e| e.main_earth.is_some())
        {
            let top = if index == site.main_board {
                "electrode".to_owned()
            } else {
                format!("{}.electrode", board.id)
            };
            pairs.push(([top, soil()], false));
        }
    }
    for bond in &site.bonds {
        pairs.push(([format!("{}.pipe", bond.id), soil()], false));
    }
    for item in &site.equipment {
        let frame = format!("{}.frame", item.id);
        pairs.push(([frame.clone(), soil()], true));
        for (index, bond) in site.bonds.iter().enumerate() {
            if !item.touches.contains(&index) {
                pairs.push(([frame.clone(), format!("{}.pipe", bond.id)], true));
            }
        }
    }
    pairs
}
