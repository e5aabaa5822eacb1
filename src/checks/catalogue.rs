//! Every check of knowledge at every place of a site that it fits.

use super::check::Check;
use super::energised::energised_in;
use super::expand::{Filler, Miss};
use super::select::{Instance, instances};
use crate::knowledge::{CheckForm, Hookup, Knowledge, Setup, SourceMode};
use crate::network::{Network, Unnamed};
use crate::site::{Site, Spot, Topology, ends, holds};

/// A mistake of the knowledge files that a site brings out.
#[derive(Clone, Debug, PartialEq, Eq, thiserror::Error)]
#[error("check `{check}`: {why}")]
pub struct CheckError {
    /// The check.
    pub check: String,
    /// What is amiss, and the cure.
    pub why: String,
}

/// All checks of a site, in order of knowledge and place. Instances of one check with the same setup
/// and hookup are one.
///
/// A check does not fit a place that has no RCD, circuit, … of which it speaks, and is left out there.
/// Nor does one whose terminals, devices or ends the circuit of the site does not have; [`misfits`]
/// tells those.
///
/// # Errors
/// A selector, condition or name in braces that has no meaning.
pub fn catalogue(
    knowledge: &Knowledge,
    network: &Network,
    site: &Site,
) -> Result<Vec<Check>, CheckError> {
    let mut out = expanded(knowledge, site)?;
    out.retain(|check| misfit(check, network, site).is_none());
    Ok(out)
}

/// The instances that [`catalogue`] leaves out although their selector and conditions let them through,
/// each with what the circuit lacks: for whoever writes knowledge.
///
/// # Errors
/// As [`catalogue`].
pub fn misfits(
    knowledge: &Knowledge,
    network: &Network,
    site: &Site,
) -> Result<Vec<CheckError>, CheckError> {
    let amiss = |check: &Check| {
        misfit(check, network, site).map(|why| CheckError {
            check: check.test.clone(),
            why: format!("at {}: {why}", check.at),
        })
    };
    Ok(expanded(knowledge, site)?
        .iter()
        .filter_map(amiss)
        .collect())
}

fn misfit(check: &Check, network: &Network, site: &Site) -> Option<String> {
    let circuit = &network.circuit;
    if let Err(why) = circuit.switching(&check.setup, Unnamed::AsFound) {
        return Some(why.to_string());
    }
    match &check.hookup {
        Hookup::Seen { at, .. } => {
            (!can_be_looked_at(at, site)).then(|| format!("there is no `{at}` to look at here"))
        }
        hookup => circuit
            .probe(hookup, &check.setup.on)
            .err()
            .map(|why| why.to_string()),
    }
}

/// Whether a look has such a place (contract §3, `seen`).
fn can_be_looked_at(at: &str, site: &Site) -> bool {
    Spot::read(site, at).is_some() || ends(site).contains(at)
}

fn expanded(knowledge: &Knowledge, site: &Site) -> Result<Vec<Check>, CheckError> {
    let topology = Topology::new(site);
    let mut out: Vec<Check> = Vec::new();
    for (row, form) in knowledge.checks.iter().enumerate() {
        let fail = |why: String| CheckError {
            check: form.id.clone(),
            why,
        };
        let each = instances(&form.each, site, &knowledge.equipment)
            .ok_or_else(|| fail(format!("`each` cannot be `{}`", form.each)))?;
        let first = out.len();
        for instance in each {
            let mut fits = true;
            for word in &form.only {
                fits &=
                    holds(word, &instance.place, site, &knowledge.equipment).ok_or_else(|| {
                        fail(format!("`{word}` in `only` is no condition on a place"))
                    })?;
            }
            if !fits {
                continue;
            }
            match made(row, form, &instance, site, &topology) {
                Ok(check) => {
                    let same =
                        |have: &Check| have.setup == check.setup && have.hookup == check.hookup;
                    if !out[first..].iter().any(same) {
                        out.push(check);
                    }
                }
                Err(Miss::Absent) => {}
                Err(Miss::Unknown(why)) => return Err(fail(why)),
            }
        }
    }
    Ok(out)
}

fn made(
    row: usize,
    form: &CheckForm,
    instance: &Instance,
    site: &Site,
    topology: &Topology,
) -> Result<Check, Miss> {
    let filler = Filler { site, instance };
    let hookup = filler.hookup(&form.hookup)?;
    let setup = sources_off(filler.setup(&form.setup)?, &hookup, site);
    Ok(Check {
        test: form.id.clone(),
        at: instance.at.clone(),
        form: row,
        name: filler.text(&form.name)?,
        text: filler.text(&form.text)?,
        energised: energised_in(topology, &setup, &hookup, site),
        setup,
        hookup,
        unit: form.unit.clone(),
        minutes: form.minutes,
        kit: form.kit.clone(),
        hold: filler.hold(&form.hold)?,
        needs: filler.texts(&form.needs)?,
        proves: filler.proofs(&form.proves)?,
        hazard: form
            .hazard
            .as_ref()
            .map(|text| filler.text(text))
            .transpose()?,
        limits: form.limits.clone(),
        recheck_only: form.recheck_only,
        staged: form.staged,
        place: stand(instance, site),
    })
}

/// Dead readings, and whatever lifts an end, are made with everything off that could feed back.
fn sources_off(mut setup: Setup, hookup: &Hookup, site: &Site) -> Setup {
    let dead = match hookup {
        Hookup::Insulation { .. } | Hookup::Continuity { .. } => true,
        Hookup::Seen { .. } => !setup.open.is_empty(),
        _ => false,
    };
    if dead || !setup.lift.is_empty() {
        for source in &site.sources {
            setup
                .sources
                .entry(source.id.clone())
                .or_insert(SourceMode::Off);
        }
    }
    setup
}

/// Where the person stands: the point, or the board, or the bond or electrode itself.
fn stand(instance: &Instance, site: &Site) -> String {
    let place = &instance.place;
    match place.spot {
        Spot::Bond(_) | Spot::Electrode(_) => place.id.clone(),
        _ => match place.point(site) {
            Some(point) => site.point_id(point),
            None => site
                .boards
                .get(place.board(site))
                .map_or_else(String::new, |b| b.id.clone()),
        },
    }
}
