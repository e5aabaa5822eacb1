//! Isolating: the state in which things are opened and locked, and whether a check's places are dead in its setup.

use super::Ground;
use super::places::{board_of_end, cuts, is_off, mains_of, place_of, terminals_of};
use super::words::list;
use crate::checks::Check;
use crate::knowledge::{Setup, SourceMode, UnplugSet};

/// The state in which a check's ends are lifted: its own openings, and, where it ends up energised,
/// every main switch of the boards at which something is lifted.
pub(super) fn isolation(ground: &Ground<'_>, check: &Check) -> Setup {
    let mut setup = Setup {
        open: check.setup.open.clone(),
        ..Setup::default()
    };
    setup.unplug = check.setup.unplug.clone();
    setup.off = check.setup.off.clone();
    if check.energised {
        for board in check
            .setup
            .lift
            .iter()
            .filter_map(|end| board_of_end(ground.site, end))
        {
            for main in mains_of(ground.site, board) {
                if !setup.open.contains(&main) {
                    setup.open.push(main);
                }
            }
        }
    }
    for source in &ground.site.sources {
        setup.sources.insert(source.id.clone(), SourceMode::Off);
    }
    setup
}

/// Whether a check needs something made dead: it is a dead one with something opened or lifted, or it lifts.
pub(super) fn isolates(check: &Check) -> bool {
    !check.setup.lift.is_empty() || (!check.energised && !check.setup.open.is_empty())
}

/// What to do to isolate.
pub(super) fn isolate_text(ground: &Ground<'_>, off: &Setup) -> String {
    let unplug = match &off.unplug {
        UnplugSet::All(_) => "Unplug everything. ".to_owned(),
        UnplugSet::These(items) if items.is_empty() => String::new(),
        UnplugSet::These(items) => format!("Unplug {}. ", list(items)),
    };
    let switched = if off.off.is_empty() {
        String::new()
    } else {
        format!("Switch off {}. ", list(&off.off))
    };
    let sources: Vec<String> = off.sources.keys().cloned().collect();
    let feeds = if sources.is_empty() {
        String::new()
    } else {
        format!(
            " Switch off and lock {} too, AC and DC sides, and wait until they have discharged.",
            list(&sources)
        )
    };
    let neutral = ground
        .site
        .boards
        .iter()
        .flat_map(|b| &b.mains)
        .any(|m| off.open.contains(&m.id) && !m.switches_neutral());
    let stays = if neutral {
        " The neutral is not switched: it stays joined to the network."
    } else {
        ""
    };
    format!(
        "{unplug}{switched}Open {}; lock, tag, keep the key. See a load go off: a label is no proof.{feeds}{stays}",
        list(&off.open)
    )
}

/// Whether every place that a check touches or lifts at is switched off in its setup.
pub(super) fn is_dead_everywhere(ground: &Ground<'_>, check: &Check) -> bool {
    terminals_of(ground.site, &check.hookup)
        .iter()
        .all(|terminal| {
            let place = place_of(terminal);
            cuts(ground.site, place).is_empty() || is_off(ground.site, place, &check.setup)
        })
}
