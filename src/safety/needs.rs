//! What must be proved before a check, and which check proves it.

use super::Ground;
use super::isolate::isolation;
use super::places::{conductor_of, is_line, place_of};
use crate::checks::Check;
use crate::knowledge::{Hookup, Meter, Setup, procedure::MeterWord};
use crate::site::System;

/// A loop tester's current where the hookup names none, A (contract §3).
const LOOP_AMPS: f64 = 10.0;

/// A voltmeter of fewer ohms loads what it measures (contract §3: low-z is 3 kΩ).
const HIGH_OHMS: f64 = 1e5;

/// Whether a voltmeter loads what it measures.
pub(super) fn low_impedance(meter: &Option<Meter>) -> bool {
    match meter {
        Some(Meter::Named(MeterWord::LowZ)) => true,
        Some(Meter::Ohms(ohms)) => *ohms < HIGH_OHMS,
        Some(Meter::Named(MeterWord::HighZ)) | None => false,
    }
}

/// Watts that a setup adds: its loads, and the equipment that it switches on (unknown watts count as infinite).
pub(super) fn added_watts(ground: &Ground<'_>, setup: &Setup) -> f64 {
    let loads: f64 = setup.load.iter().map(|l| l.watts.abs()).sum();
    let of = |id: &String| {
        let site = ground.site;
        site.equipment_index(id)
            .and_then(|e| site.equipment.get(e))
            .and_then(|e| e.watts)
            .unwrap_or(f64::INFINITY)
    };
    loads + setup.on.iter().map(of).sum::<f64>()
}

/// The proofs that must stand before a check: its own, and those that its load, its loop current, its
/// path through the protective conductor, or its lifting ask for.
pub(super) fn proofs_needed(ground: &Ground<'_>, check: &Check) -> Vec<String> {
    let mut needed = check.needs.clone();
    let mut add = |proof: String| {
        if !needed.contains(&proof) {
            needed.push(proof);
        }
    };
    let numbers = ground.numbers;
    let linked = ground.site.supply.system == System::TnCS;
    let loop_amps = match &check.hookup {
        Hookup::Loop { amps, .. } => amps.unwrap_or(LOOP_AMPS),
        _ => 0.0,
    };
    let gives_it = check.proves.iter().any(|p| p.what == numbers.supply_proof);
    let loads = check.energised && added_watts(ground, &check.setup) > numbers.free_watts;
    let supply = linked && !check.staged && !gives_it;
    if supply && (loads || loop_amps > numbers.free_loop_amps) {
        add(numbers.supply_proof.clone());
    }
    // At a board the bars themselves are read, and what that needs the check says.
    if let Some(place) = earth_path(check).filter(|place| ground.site.point_ref(place).is_some()) {
        add(numbers.earth_proof.replace("{at}", &place));
    }
    for end in check
        .setup
        .lift
        .iter()
        .filter(|end| end.ends_with(".main-earth"))
    {
        if quiet_check(ground, check, end).is_some() {
            add(quiet_proof(end, &isolation(ground, check).open));
        }
    }
    needed
}

/// The place whose protective conductor carries the test's current, if the test drives one through it.
pub(super) fn earth_path(check: &Check) -> Option<String> {
    let through = |between: &[String; 2]| {
        let line = between.iter().find(|t| is_line(t))?;
        let earth = between
            .iter()
            .find(|t| matches!(conductor_of(t), "PE" | "frame" | "pipe"))?;
        Some(
            place_of(if conductor_of(earth) == "PE" {
                earth
            } else {
                line
            })
            .to_owned(),
        )
    };
    match &check.hookup {
        Hookup::Loop { between, .. } => through(between),
        Hookup::Volts { between, meter } if low_impedance(meter) => through(between),
        Hookup::TripTime { rcd, at, .. } | Hookup::Ramp { rcd, at } => {
            Some(at.clone().unwrap_or_else(|| rcd.clone()))
        }
        _ => None,
    }
}

/// How the proof of a conductor without current begins.
pub(super) const QUIET: &str = "no current in ";

/// The proof that a conductor to be lifted carries next to nothing once this is open.
pub(super) fn quiet_proof(end: &str, open: &[String]) -> String {
    let mut open = open.to_vec();
    open.sort();
    open.dedup();
    format!("{QUIET}{end} with {} open", open.join("+"))
}

/// The check whose clamp gives the quiet proof of an end in the state in which it is lifted.
pub(super) fn quiet_check<'a>(ground: &Ground<'a>, check: &Check, end: &str) -> Option<&'a Check> {
    let wanted = quiet_proof(end, &isolation(ground, check).open);
    ground
        .catalogue
        .iter()
        .find(|c| proves_quiet(c).is_some_and(|proof| proof == wanted))
}

/// The quiet proof that a clamp reading round one liftable end may give.
pub(super) fn proves_quiet(check: &Check) -> Option<String> {
    let Hookup::Amps { around } = &check.hookup else {
        return None;
    };
    match around.as_slice() {
        [end] if check.setup.lift.is_empty() && check.setup.load.is_empty() => {
            Some(quiet_proof(end, &check.setup.open))
        }
        _ => None,
    }
}

/// The cheapest check at hand whose reading gives a proof, other than the one that needs it.
pub(super) fn check_that_proves<'a>(
    ground: &Ground<'a>,
    check: &Check,
    proof: &str,
) -> Option<&'a Check> {
    // Only such a proof is looked for among the clamps: naming one is work.
    let quiet = proof.starts_with(QUIET);
    ground
        .catalogue
        .iter()
        .filter(|c| !c.proves.is_empty() || quiet)
        .filter(|c| (c.test.as_str(), c.at.as_str()) != (check.test.as_str(), check.at.as_str()))
        .filter(|c| {
            c.proves.iter().any(|p| p.what == proof)
                || (quiet && proves_quiet(c).is_some_and(|known| known == proof))
        })
        .min_by(|a, b| a.minutes.total_cmp(&b.minutes))
}
