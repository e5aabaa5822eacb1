//! What is refused whatever it might tell (trade.md D.3, D.4).

use super::Ground;
use super::isolate::{is_dead_everywhere, isolates};
use super::needs::{added_watts, check_that_proves, low_impedance, proofs_needed};
use super::places::{
    board_of_end, conductor_of, is_line, is_off, mains_of, place_of, place_of_end, source_is_off,
    terminals_of,
};
use super::proof::is_stake_check;
use super::state::State;
use super::words::{list, words};
use crate::checks::Check;
use crate::knowledge::{Hookup, Provoke, SourceMode, UnplugSet};

/// Why a check may not be made, and what may be done instead.
#[derive(Clone, Debug, PartialEq, Eq, serde::Serialize)]
pub struct Refusal {
    /// The reason.
    pub reason: String,
    /// The safer way, where there is one.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub safer: Option<String>,
}

impl Refusal {
    pub(super) fn new(reason: impl Into<String>, safer: impl Into<String>) -> Self {
        Self {
            reason: reason.into(),
            safer: Some(safer.into()),
        }
    }

    pub(super) fn plain(reason: impl Into<String>) -> Self {
        Self {
            reason: reason.into(),
            safer: None,
        }
    }
}

/// The first rule that forbids the check in the present state.
pub(super) fn refusal(ground: &Ground<'_>, state: &State, check: &Check) -> Option<Refusal> {
    fuse(ground, check)
        .or_else(|| standing(ground, state, check))
        .or_else(|| lifts(ground, check))
        .or_else(|| dead_quantity(ground, check))
        .or_else(|| sources(ground, check))
        .or_else(|| wetting(ground, check))
        .or_else(|| unprovable(ground, state, check))
}

fn fuse(ground: &Ground<'_>, check: &Check) -> Option<Refusal> {
    let opens = check
        .setup
        .open
        .iter()
        .any(|device| device == "service.fuse");
    (opens && !ground.site.may_isolate_supply).then(|| {
        Refusal::new(
            "the service fuse is not this person's to open",
            "have the network operator make the service dead",
        )
    })
}

/// A tingle, a shock, flaring lamps: metal is live until a stake says otherwise.
fn standing(ground: &Ground<'_>, state: &State, check: &Check) -> Option<Refusal> {
    let upstream = check
        .setup
        .open
        .iter()
        .any(|device| device == "service.fuse");
    if is_stake_check(ground.site, check) || upstream {
        return None;
    }
    let earth = words(ground.site).earth;
    match state.stake() {
        None if state.is_standing() => Some(Refusal::new(
            format!(
                "every metal part counts as live until the {earth} bar has been read against a stake"
            ),
            format!(
                "first volts from {earth} bar to a stake in open ground, 10 m clear; nobody in reach of metal"
            ),
        )),
        Some(stake) if stake.volts > ground.numbers.touch_volts => {
            let mains_off = state.network_attended()
                && mains_of(ground.site, ground.site.main_board)
                    .iter()
                    .all(|m| check.setup.open.contains(m));
            (!mains_off).then(|| {
                Refusal::new(
                    format!("{:.0} V from {earth} bar to stake: withdraw; nothing more is tested live here", stake.volts),
                    "have the network operator make the service dead upstream",
                )
            })
        }
        Some(stake) if stake.volts > ground.numbers.dead_volts && stirs(ground, check) => {
            Some(Refusal::new(
                format!(
                    "{:.0} V from {earth} bar to stake: no load, loop, RCD or low-impedance test, and nothing touched",
                    stake.volts
                ),
                "high-impedance volts to the stake and a clamp, gloved; then the network operator",
            ))
        }
        _ => None,
    }
}

/// Whether an energised check draws current or puts a hand on conductors.
fn stirs(ground: &Ground<'_>, check: &Check) -> bool {
    let draws = match &check.hookup {
        Hookup::Volts { meter, .. } => low_impedance(meter),
        Hookup::Loop { .. }
        | Hookup::TripTime { .. }
        | Hookup::Ramp { .. }
        | Hookup::Lamp { .. } => true,
        Hookup::Holds { .. } => true,
        Hookup::Amps { .. }
        | Hookup::Insulation { .. }
        | Hookup::Continuity { .. }
        | Hookup::Seen { .. } => false,
    };
    let lifts = !check.setup.lift.is_empty();
    check.energised
        && (draws
            || lifts
            || added_watts(ground, &check.setup) > 0.0
            || check.setup.provoke.is_some())
}

/// Main earth, link and bond stay where they are while any supply is on; a neutral never leaves before its lines.
fn lifts(ground: &Ground<'_>, check: &Check) -> Option<Refusal> {
    check
        .setup
        .lift
        .iter()
        .find_map(|end| lift(ground, check, end))
}

fn lift(ground: &Ground<'_>, check: &Check, end: &str) -> Option<Refusal> {
    let site = ground.site;
    let setup = &check.setup;
    let board = board_of_end(site, end)?;
    let home = site.boards.get(board)?;
    let off = is_off(site, &home.id, setup);
    let mains = list(&mains_of(site, board));
    let feeding = (0..site.sources.len())
        .find(|s| !source_is_off(site, *s, setup) && !check_isolates_source(ground, check));
    if end.ends_with(".main-earth") || end.ends_with(".link") || end.ends_with(".bond") {
        if !off {
            return Some(Refusal::new(
                format!(
                    "{end} may be the only neutral left: it is not parted while any supply is on"
                ),
                format!(
                    "open and lock {mains} (every tariff and source) and prove dead first, or clamp instead of lifting"
                ),
            ));
        }
        if let Some(source) = feeding.and_then(|s| site.sources.get(s)) {
            return Some(Refusal::new(
                format!("{end} is not parted while {} can feed", source.id),
                format!("switch {} off and lock it", source.id),
            ));
        }
        return None;
    }
    if end.ends_with(".main-neutral") {
        let all_open = mains_of(site, board).iter().all(|m| setup.open.contains(m));
        let dead = setup.open.iter().any(|device| device == "service.fuse");
        return (!(all_open && dead)).then(|| {
            Refusal::new(
                "the incoming neutral is parted only with every main switch open and the supply proved dead",
                "open every main switch and the service fuse, prove dead at the service, then lift it",
            )
        });
    }
    if end.contains(".N@") || end.contains(".PE@") {
        let place = place_of_end(site, end);
        let head = end.split('.').next().unwrap_or(end);
        let lines_lifted = setup
            .lift
            .iter()
            .any(|e| e.starts_with(&format!("{head}.L")) && e.ends_with("@board"));
        if !is_off(site, &place, setup) && !lines_lifted {
            let line = words(site).line;
            return Some(Refusal::new(
                format!(
                    "{end} is not parted while its {line}s are closed: what is left behind it rises to full volts"
                ),
                format!(
                    "{line}s off first ({head}.breaker, better {mains}), prove dead, then lift, then prove again"
                ),
            ));
        }
    }
    None
}

/// Dead tests take their sources off by the isolating hold point.
fn check_isolates_source(ground: &Ground<'_>, check: &Check) -> bool {
    ground
        .site
        .sources
        .iter()
        .all(|s| !s.backup && !check.setup.sources.contains_key(&s.id))
        && isolates(check)
}

/// Insulation and continuity are for dead conductors, and insulation between line and neutral for bare ones.
fn dead_quantity(ground: &Ground<'_>, check: &Check) -> Option<Refusal> {
    let dead_only = matches!(
        check.hookup,
        Hookup::Insulation { .. } | Hookup::Continuity { .. }
    );
    if !dead_only {
        return None;
    }
    let live_word = |t: &String| is_line(t) || conductor_of(t) == "N";
    if check.energised
        || (terminals_of(ground.site, &check.hookup)
            .iter()
            .any(live_word)
            && !is_dead_everywhere(ground, check))
    {
        return Some(Refusal::new(
            "this is a test for dead conductors, and the supply is on there",
            "open and lock what feeds it and prove dead first",
        ));
    }
    let Hookup::Insulation {
        between: [a, b], ..
    } = &check.hookup
    else {
        return None;
    };
    let parts = |one: &[String], other: &[String]| {
        one.iter().any(|t| is_line(t))
            && other.iter().any(|t| conductor_of(t) == "N")
            && !other.iter().any(|t| is_line(t))
    };
    let across = (parts(a, b) && !a.iter().any(|t| conductor_of(t) == "N"))
        || (parts(b, a) && !b.iter().any(|t| conductor_of(t) == "N"));
    let connected = across.then(|| equipment_left(ground, check)).flatten()?;
    let (line, _) = words(ground.site).letters;
    Some(Refusal::new(
        format!("insulation {line}–N with {connected} connected destroys it or reads it"),
        format!(
            "join {line} and N and test both to earth, or unplug everything on the circuit first"
        ),
    ))
}

/// Equipment that the setup leaves on a circuit under test.
fn equipment_left(ground: &Ground<'_>, check: &Check) -> Option<String> {
    let site = ground.site;
    let circuits: Vec<(usize, usize)> = terminals_of(site, &check.hookup)
        .iter()
        .filter_map(|t| {
            let head = place_of(t).split('.').next()?.to_owned();
            site.circuit_index(&head)
        })
        .collect();
    site.equipment
        .iter()
        .filter(|e| circuits.is_empty() || circuits.contains(&(e.at.board, e.at.circuit)))
        .find(|e| {
            let unplugged = e.plug
                && match &check.setup.unplug {
                    UnplugSet::All(_) => true,
                    UnplugSet::These(items) => items.contains(&e.id),
                };
            !unplugged && (e.plug || !check.setup.off.contains(&e.id))
        })
        .map(|e| e.name.clone())
}

/// What can backfeed is off before anything is called dead.
fn sources(ground: &Ground<'_>, check: &Check) -> Option<Refusal> {
    if check.energised || !isolates(check) {
        return None;
    }
    ground
        .site
        .sources
        .iter()
        .enumerate()
        .find_map(|(index, source)| {
            let named_on = check
                .setup
                .sources
                .get(&source.id)
                .is_some_and(|mode| *mode != SourceMode::Off);
            let stays =
                named_on || (source.backup && !source_is_off(ground.site, index, &check.setup));
            stays.then(|| {
                Refusal::new(
                    format!("{} can feed what this test calls dead", source.id),
                    format!(
                        "switch {} off on both sides, lock it, and prove dead",
                        source.id
                    ),
                )
            })
        })
}

/// Water on live parts only behind an RCD.
fn wetting(ground: &Ground<'_>, check: &Check) -> Option<Refusal> {
    if check.setup.provoke != Some(Provoke::Wet) || !check.energised {
        return None;
    }
    let site = ground.site;
    let bare = terminals_of(site, &check.hookup)
        .iter()
        .filter_map(|t| {
            place_of(t)
                .split('.')
                .next()
                .and_then(|head| site.circuit_index(head))
        })
        .filter_map(|(board, circuit)| site.boards.get(board).and_then(|b| b.circuits.get(circuit)))
        .any(|circuit| circuit.rcd.is_none());
    bare.then(|| {
        Refusal::new(
            "water on a live circuit without an RCD",
            "wet it with the circuit dead, and test its insulation",
        )
    })
}

/// A proof that nothing at hand can give.
fn unprovable(ground: &Ground<'_>, state: &State, check: &Check) -> Option<Refusal> {
    proofs_needed(ground, check).into_iter().find_map(|proof| {
        let open = !state.has(&proof) && check_that_proves(ground, check, &proof).is_none();
        open.then(|| {
            Refusal::plain(format!(
                "it needs this proved first: {proof}; and no test at hand proves it"
            ))
        })
    })
}
