//! A complaint's sign at a place: its setup and hookup, filled as a check's are.

use super::expand::Filler;
use super::select::Instance;
use crate::knowledge::{Hookup, Setup};
use crate::site::{Site, place};

/// Setup and hookup of a sign at a place of one of `classes`; `None` where it does not fit there.
/// Of a frame or a pipe (`kettle.frame`, `water.pipe`) the thing itself is meant.
pub fn sign_at(
    site: &Site,
    classes: &[String],
    at: &str,
    setup: &Setup,
    hookup: &Hookup,
) -> Option<(Setup, Hookup)> {
    let id = at
        .strip_suffix(".frame")
        .or_else(|| at.strip_suffix(".pipe"))
        .unwrap_or(at);
    let place = place::find(site, classes, id)?;
    let instance = Instance {
        at: id.to_owned(),
        extra: Vec::new(),
        place,
    };
    let filler = Filler {
        site,
        instance: &instance,
    };
    Some((filler.setup(setup).ok()?, filler.hookup(hookup).ok()?))
}
