//! Minutes between states of the installation: what a change of setup costs a person.

use std::collections::BTreeSet;

use super::check::Check;
use crate::knowledge::{Effort, Setup, UnplugSet};
use crate::site::Site;

/// Minutes from one setup to another: devices, ends, plugs, equipment, loads, provocation, sources.
///
/// `dead_work`: what follows is done on parts called dead. Then devices newly opened are also locked,
/// and dead is proved, once.
pub fn transition(from: &Setup, to: &Setup, dead_work: bool, site: &Site, effort: &Effort) -> f64 {
    let apart = |a: &[String], b: &[String]| {
        let (a, b): (BTreeSet<&String>, BTreeSet<&String>) =
            (a.iter().collect(), b.iter().collect());
        a.symmetric_difference(&b).count() as f64
    };
    let newly_open = to.open.iter().any(|device| !from.open.contains(device));
    let newly_lifted = to.lift.iter().any(|end| !from.lift.contains(end));
    let mut minutes = effort.switch * apart(&from.open, &to.open);
    if dead_work && (newly_open || newly_lifted) {
        minutes += effort.prove_dead;
    }
    minutes += effort.lift * apart(&from.lift, &to.lift);
    minutes += plugs(from, to, site, effort);
    minutes += effort.on_off * (apart(&from.on, &to.on) + apart(&from.off, &to.off));
    let loads = |setup: &Setup| -> Vec<String> {
        setup
            .load
            .iter()
            .map(|load| format!("{} {}", load.at, load.watts))
            .collect()
    };
    minutes += effort.load * apart(&loads(from), &loads(to));
    if to.provoke.is_some() && to.provoke != from.provoke {
        minutes += effort.provoke;
    }
    let modes = |setup: &Setup| -> Vec<String> {
        setup
            .sources
            .iter()
            .map(|(id, mode)| format!("{id} {mode:?}"))
            .collect()
    };
    let changed: BTreeSet<String> = modes(from)
        .iter()
        .chain(&modes(to))
        .filter_map(|m| m.split(' ').next())
        .map(str::to_owned)
        .collect();
    let kept = |id: &String| from.sources.get(id) == to.sources.get(id);
    minutes + effort.source * changed.iter().filter(|id| !kept(id)).count() as f64
}

/// Minutes to pull and restore plugs; many at once cost no more than all.
fn plugs(from: &Setup, to: &Setup, site: &Site, effort: &Effort) -> f64 {
    let out = |setup: &Setup| -> BTreeSet<String> {
        match &setup.unplug {
            UnplugSet::All(_) => site
                .equipment
                .iter()
                .filter(|e| e.plug)
                .map(|e| e.id.clone())
                .collect(),
            UnplugSet::These(list) => list.iter().cloned().collect(),
        }
    };
    let moved = out(from).symmetric_difference(&out(to)).count() as f64;
    (effort.plug * moved).min(effort.plug_all)
}

/// Minutes of walking from one place to another (boards, points, bonds, by id).
pub fn walk(from: &str, to: &str, effort: &Effort) -> f64 {
    if from.is_empty() || from == to {
        0.0
    } else {
        effort.walk
    }
}

impl Check {
    /// Minutes from a state of the installation, the person at `place` (empty: not known, nothing to
    /// walk), to the reading: the change of setup, the walk, the measurement.
    ///
    /// A board is walked to where devices or ends change there.
    pub fn minutes_from(&self, from: &Setup, place: &str, site: &Site, effort: &Effort) -> f64 {
        let at_board = from.open != self.setup.open || from.lift != self.setup.lift;
        let board = if at_board {
            self.board_of_work(from, site)
        } else {
            None
        };
        let walked = match board {
            Some(board) => walk(place, &board, effort) + walk(&board, &self.place, effort),
            None => walk(place, &self.place, effort),
        };
        walked + transition(from, &self.setup, self.dead_work(), site, effort) + self.minutes
    }

    /// Whether it is done on parts called dead: ends are lifted, or nothing touched is supplied.
    pub fn dead_work(&self) -> bool {
        !self.setup.lift.is_empty() || !self.energised
    }

    /// The board whose devices or ends change first.
    fn board_of_work(&self, from: &Setup, site: &Site) -> Option<String> {
        let changed = |a: &[String], b: &[String]| a.iter().find(|x| !b.contains(x)).cloned();
        let device = changed(&self.setup.open, &from.open)
            .or_else(|| changed(&from.open, &self.setup.open))
            .or_else(|| changed(&self.setup.lift, &from.lift))
            .or_else(|| changed(&from.lift, &self.setup.lift))?;
        let head = device.split(['.', '@']).next()?;
        let board = site
            .board_index(head)
            .or_else(|| site.circuit_index(head).map(|(b, _)| b))
            .or_else(|| site.rcd_index(head).map(|(b, _)| b))
            .or_else(|| site.main_switch_index(head).map(|(b, _)| b))
            .unwrap_or(site.main_board);
        site.boards.get(board).map(|b| b.id.clone())
    }
}
