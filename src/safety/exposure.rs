//! What a check does to the circuit while it is made: the states it passes, and the current its instrument drives.

use super::Ground;
use super::isolate::{isolates, isolation};
use super::places::{conductors_at, cuts, mains_of, place_of};
use super::point::state_key;
use crate::checks::Check;
use crate::knowledge::{Hookup, Meter, Setup, SourceMode, UnplugSet, procedure::MeterWord};
use crate::network::Edit;

/// One state that a check passes through, with what its instrument adds there.
#[derive(Clone, Debug, PartialEq)]
pub(super) struct Stance {
    /// Setup, its loads taken out.
    pub setup: Setup,
    /// Loads and the instrument's burden, as resistances.
    pub burden: Vec<Edit>,
    /// Ends that are about to be lifted.
    pub lifting: Vec<String>,
    /// The instrument's current lasts a fraction of a second: volts count, not the let-go current.
    pub brief: bool,
    /// Everything ahead of the boards is open: only what comes from outside can flow.
    pub dead: bool,
    /// The earthing or the incoming neutral is parted.
    pub parts_earthing: bool,
    /// Amperes that loads, burdens and equipment switched on add at most.
    pub added_amps: f64,
    /// Circuits that lose load, where losing it may unbalance lines or leave a source unmatched.
    pub lose: Vec<String>,
}

impl Stance {
    /// Equal stances have equal keys.
    pub fn key(&self) -> String {
        let s = &self.setup;
        let unplug = match &s.unplug {
            UnplugSet::All(_) => "all".to_owned(),
            UnplugSet::These(items) => items.join("+"),
        };
        format!(
            "{}|{unplug}|{}|{}|{:?}|{:?}|{}|{}",
            state_key(s),
            s.on.join("+"),
            s.off.join("+"),
            s.provoke,
            self.burden,
            self.lifting.join("+"),
            self.brief
        )
    }
}

/// A stance with its sums.
fn stance(
    ground: &Ground<'_>,
    setup: Setup,
    burden: Vec<Edit>,
    lifting: Vec<String>,
    brief: bool,
    dead: bool,
) -> Stance {
    let parts_earthing = setup.lift.iter().any(|end| parts_earthing(end));
    let added_amps = added_amps(ground, &setup, &burden);
    let lose = if dead {
        Vec::new()
    } else {
        losing(ground, &setup)
    };
    Stance {
        setup,
        burden,
        lifting,
        brief,
        dead,
        parts_earthing,
        added_amps,
        lose,
    }
}

fn added_amps(ground: &Ground<'_>, setup: &Setup, burden: &[Edit]) -> f64 {
    let site = ground.site;
    let volts = site.supply.volts;
    let through = |edit: &Edit| match edit {
        Edit::Shunt { ohms, .. } => volts / ohms,
        _ => 0.0,
    };
    let watts = |id: &String| {
        site.equipment_index(id)
            .and_then(|e| site.equipment.get(e))
            .and_then(|e| e.watts)
            .unwrap_or(UNKNOWN_WATTS)
    };
    burden.iter().map(through).sum::<f64>() + setup.on.iter().map(watts).sum::<f64>() / volts
}

/// Circuits that a setup takes load off; on one phase without a source that only takes current away.
fn losing(ground: &Ground<'_>, setup: &Setup) -> Vec<String> {
    let site = ground.site;
    let lone = site.supply.phases == 1 && site.sources.is_empty();
    if lone
        || (setup.open.is_empty()
            && setup.unplug.is_empty()
            && setup.off.is_empty()
            && setup.sources.is_empty())
    {
        return Vec::new();
    }
    let switched = |place: &str| {
        cuts(site, place)
            .iter()
            .any(|cut| cut.iter().any(|d| setup.open.contains(d)))
    };
    let idle = |index: (usize, usize)| {
        site.equipment.iter().any(|e| {
            let here = (e.at.board, e.at.circuit) == index;
            let pulled = match &setup.unplug {
                UnplugSet::All(_) => e.plug,
                UnplugSet::These(items) => items.contains(&e.id),
            };
            here && (pulled || setup.off.contains(&e.id))
        })
    };
    let everywhere = !setup.sources.is_empty();
    let circuits = site.boards.iter().enumerate().flat_map(|(b, board)| {
        board
            .circuits
            .iter()
            .enumerate()
            .map(move |(c, circuit)| ((b, c), circuit))
    });
    circuits
        .filter(|(index, circuit)| everywhere || switched(&circuit.id) || idle(*index))
        .map(|(_, circuit)| circuit.id.clone())
        .collect()
}

/// Equipment whose watts the site does not give is taken as the largest on a plug.
const UNKNOWN_WATTS: f64 = 3600.0;

/// Ends whose lifting parts the earthing or the incoming neutral.
fn parts_earthing(end: &str) -> bool {
    [".link", ".main-earth", ".bond", ".main-neutral"]
        .iter()
        .any(|suffix| end.ends_with(suffix))
        || end.contains(".feed")
}

/// With every main switch of the main board open and every source off.
pub(super) fn mains_off(ground: &Ground<'_>) -> Setup {
    let sources = ground
        .site
        .sources
        .iter()
        .map(|s| (s.id.clone(), SourceMode::Off))
        .collect();
    Setup {
        open: mains_of(ground.site, ground.site.main_board),
        sources,
        ..Setup::default()
    }
}

/// The states of a check in order; none where it leaves everything as found and drives no current.
pub(super) fn stances(ground: &Ground<'_>, check: &Check) -> Vec<Stance> {
    let mut all = Vec::new();
    if isolates(check) {
        let off = isolation(ground, check);
        let outside = mains_off(ground);
        let dead = outside.open.iter().all(|main| off.open.contains(main));
        let lift = check.setup.lift.clone();
        let bare = |setup: Setup, lifting: Vec<String>, dead: bool| {
            stance(ground, setup, Vec::new(), lifting, false, dead)
        };
        if dead {
            // Opening more behind open mains changes nothing: one state serves every such check.
            all.push(bare(outside, lift.clone(), true));
        } else {
            all.push(bare(off.clone(), lift.clone(), false));
        }
        if lift.iter().any(|end| parts_earthing(end)) || (!dead && !lift.is_empty()) {
            all.push(bare(Setup { lift, ..off }, Vec::new(), false));
        }
        if !check.energised {
            return all;
        }
    }
    let instrument = burden(ground, &check.hookup);
    let brief = !instrument.is_empty() && !matches!(check.hookup, Hookup::Volts { .. });
    let loads = check
        .setup
        .load
        .iter()
        .filter_map(|l| load(ground, &l.at, l.watts));
    let burden: Vec<Edit> = instrument.into_iter().chain(loads).collect();
    let brief = brief && check.setup.load.is_empty();
    let setup = Setup {
        closed: Vec::new(),
        load: Vec::new(),
        ..check.setup.clone()
    };
    if setup != Setup::default() || !burden.is_empty() {
        all.push(stance(ground, setup, burden, Vec::new(), brief, false));
    }
    all
}

/// A load as the resistance that draws its watts at 230 V.
fn load(ground: &Ground<'_>, at: &str, watts: f64) -> Option<Edit> {
    let conductors = conductors_at(ground.site, at)?;
    let line = conductors.lines.first()?.clone();
    (watts > 0.0).then(|| Edit::Shunt {
        between: [line, conductors.neutral.unwrap_or_default()],
        ohms: 230.0 * 230.0 / watts,
        when: None,
    })
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

/// Pairs of metal that many may touch, and soil: earth bars, electrodes, pipes.
pub(super) fn common_pairs(ground: &Ground<'_>) -> Vec<[String; 2]> {
    let site = ground.site;
    let soil = || "soil".to_owned();
    let mut pairs = Vec::new();
    for (index, board) in site.boards.iter().enumerate() {
        pairs.push([format!("{}.PE", board.id), soil()]);
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
            pairs.push([top, soil()]);
        }
    }
    pairs.extend(
        site.bonds
            .iter()
            .map(|bond| [format!("{}.pipe", bond.id), soil()]),
    );
    pairs
}

/// Frames of equipment, each to soil and to the pipes that it does not touch.
pub(super) fn frame_pairs(ground: &Ground<'_>) -> Vec<[String; 2]> {
    let site = ground.site;
    let mut pairs = Vec::new();
    for item in &site.equipment {
        let frame = format!("{}.frame", item.id);
        pairs.push([frame.clone(), "soil".to_owned()]);
        for (index, bond) in site.bonds.iter().enumerate() {
            if !item.touches.contains(&index) {
                pairs.push([frame.clone(), format!("{}.pipe", bond.id)]);
            }
        }
    }
    pairs
}
