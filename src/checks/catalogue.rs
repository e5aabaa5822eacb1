//! Every check of knowledge at every place of a site that it fits.

use super::check::Check;
use super::energised::energised;
use super::expand::{Filler, Miss};
use super::select::{Instance, instances};
use crate::knowledge::{CheckForm, Knowledge};
use crate::site::{Site, holds};

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
/// A check does not fit a place that has no RCD, circuit, … of which it speaks; it is left out there.
///
/// # Errors
/// A selector, condition or name in braces that has no meaning.
pub fn catalogue(knowledge: &Knowledge, site: &Site) -> Result<Vec<Check>, CheckError> {
    let mut out = Vec::new();
    for (row, form) in knowledge.checks.iter().enumerate() {
        let fail = |why: String| CheckError { check: form.id.clone(), why };
        let each = instances(&form.each, site, &knowledge.equipment)
            .ok_or_else(|| fail(format!("`each` cannot be `{}`", form.each)))?;
        let first = out.len();
        for instance in each {
            let mut fits = true;
            for word in &form.only {
                fits &= holds(word, &instance.place, site, &knowledge.equipment)
                    .ok_or_else(|| fail(format!("`{word}` in `only` is no condition on a place")))?;
            }
            if !fits {
                continue;
            }
            match made(row, form, &instance, site) {
                Ok(check) => {
                    let same = |have: &Check| have.setup == check.setup && have.hookup == check.hookup;
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

fn made(row: usize, form: &CheckForm, instance: &Instance, site: &Site) -> Result<Check, Miss> {
    let filler = Filler { site, instance };
    let setup = filler.setup(&form.setup)?;
    let hookup = filler.hookup(&form.hookup)?;
    Ok(Check {
        test: form.id.clone(),
        at: instance.at.clone(),
        form: row,
        name: filler.text(&form.name)?,
        text: filler.text(&form.text)?,
        energised: energised(&setup, &hookup, site),
        setup,
        hookup,
        unit: form.unit.clone(),
        minutes: form.minutes,
        kit: form.kit.clone(),
        hold: filler.hold(&form.hold)?,
        needs: filler.texts(&form.needs)?,
        proves: filler.proofs(&form.proves)?,
        hazard: form.hazard.as_ref().map(|text| filler.text(text)).transpose()?,
        limits: form.limits.clone(),
        recheck_only: form.recheck_only,
        staged: form.staged,
        place: stand(instance, site),
    })
}

/// Where the person stands: the point, or the board, or the bond or electrode itself.
fn stand(instance: &Instance, site: &Site) -> String {
    use crate::site::Spot;
    let place = &instance.place;
    match place.spot {
        Spot::Bond(_) | Spot::Electrode(_) => place.id.clone(),
        _ => match place.point(site) {
            Some(point) => site.point_id(point),
            None => site.boards.get(place.board(site)).map_or_else(String::new, |b| b.id.clone()),
        },
    }
}
