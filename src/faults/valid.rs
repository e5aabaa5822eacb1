//! Whether a fault fits its kind's row and this site: place, other place, conductor, value, position.

use super::error::FaultError;
use super::fault::Fault;
use crate::knowledge::{FaultKind, fill, words};
use crate::quantity::suggest::nearest;
use crate::site::{Phase, Place, Site, name_of, place, places};

/// The place of a fault and the terminal or point of its `to`, both checked.
///
/// # Errors
/// [`FaultError::UnknownPlace`] and [`FaultError::Bad`].
pub(crate) fn checked(
    kind: &FaultKind,
    site: &Site,
    fault: &Fault,
) -> Result<(Place, Option<Place>), FaultError> {
    let bad = |why: String| FaultError::Bad {
        kind: kind.kind.clone(),
        at: fault.at.clone(),
        why,
    };
    let at = find(kind, site, &kind.at, &fault.at)?;
    let to = match (&kind.to, &fault.to) {
        (None, None) => None,
        (None, Some(_)) => return Err(bad("it has no `to`: leave it out".to_owned())),
        (Some(class), None) => {
            return Err(bad(format!("`to` is missing: name the {class} it goes to")));
        }
        (Some(class), Some(to)) if class == "bar" => {
            let bars = bars(site, at.board(site));
            let bar = bars.iter().find(|bar| bar.id == *to).cloned();
            Some(bar.ok_or_else(|| FaultError::UnknownPlace {
                kind: kind.kind.clone(),
                place: to.clone(),
                why: "`to` is a neutral bar of the same board".to_owned(),
                near: bars.iter().map(|bar| bar.id.clone()).collect(),
            })?)
        }
        (Some(class), Some(to)) => {
            let other = find(kind, site, std::slice::from_ref(class), to)?;
            if other.id == at.id {
                return Err(bad("`to` is the place itself: name another".to_owned()));
            }
            Some(other)
        }
    };
    if let Some(word) = &fault.conductor {
        let choices = conductors(kind, site, &at);
        let line_of_three = site.phase_of(&at.id) == Some(Phase::Three)
            && ["L", "L1", "L2", "L3"].contains(&word.as_str());
        if !choices.contains(word)
            && !(line_of_three
                && (choices.is_empty() || choices.iter().any(|c| c.starts_with('L'))))
        {
            return Err(bad(if choices.is_empty() {
                "it has no `conductor`: leave it out".to_owned()
            } else {
                format!("`conductor` {word} is not one of {}", choices.join(", "))
            }));
        }
    }
    if let Some(value) = fault.value {
        if kind.value.is_none() {
            return Err(bad("it has no `value`: leave it out".to_owned()));
        }
        if !value.is_finite() || value < 0.0 {
            return Err(bad(format!(
                "`value` {value} is not a number of zero or more"
            )));
        }
    }
    if let Some(position) = fault.position {
        if !kind.position {
            return Err(bad("it has no `position`: leave it out".to_owned()));
        }
        if !(0.0..=1.0).contains(&position) {
            return Err(bad(format!(
                "`position` {position} is not within 0 (line end) to 1"
            )));
        }
    }
    Ok((at, to))
}

fn find(kind: &FaultKind, site: &Site, classes: &[String], id: &str) -> Result<Place, FaultError> {
    place::find(site, classes, id).ok_or_else(|| {
        let fit: Vec<Place> = classes.iter().flat_map(|c| places(site, c)).collect();
        FaultError::UnknownPlace {
            kind: kind.kind.clone(),
            place: id.to_owned(),
            why: format!("that is no {} of this site", classes.join(" or ")),
            near: nearest(id, fit.iter().map(|p| p.id.as_str()), 3),
        }
    })
}

/// The neutral bars of a board, `msb.N` and `msb.rcd1.N`, as places of their terminals.
pub(crate) fn bars(site: &Site, board: usize) -> Vec<Place> {
    let Some(home) = site.boards.get(board) else {
        return Vec::new();
    };
    let bar = |id: String| Place {
        id,
        spot: crate::site::Spot::Board(board),
    };
    let rcds = home
        .rcds
        .iter()
        .map(|r| bar(format!("{}.{}.N", home.id, r.id)));
    std::iter::once(bar(format!("{}.N", home.id)))
        .chain(rcds)
        .collect()
}

/// The conductors that a kind may name at a place: of a line on a three-phase part each one.
pub(crate) fn conductors(kind: &FaultKind, site: &Site, at: &Place) -> Vec<String> {
    let three = site.phase_of(&at.id) == Some(Phase::Three);
    let mut out: Vec<String> = Vec::new();
    for word in &kind.conductors {
        let many: &[&str] = match word.as_str() {
            "L" if three => &["L1", "L2", "L3"],
            "L1" | "L2" | "L3" if !three => &["L"],
            other => &[other],
        };
        for one in many {
            if !out.iter().any(|have| have == one) {
                out.push((*one).to_owned());
            }
        }
    }
    out
}

/// Fills a template of a kind at a place.
///
/// # Errors
/// [`FaultError::UnknownPlace`] where the template names what this place does not have,
/// [`FaultError::Knowledge`] where it names what no place has.
pub(crate) fn filled(
    kind: &FaultKind,
    site: &Site,
    fault: &Fault,
    at: &Place,
    to: Option<&Place>,
    text: &str,
) -> Result<String, FaultError> {
    let lookup = |name: &str| match name {
        "to" => to.map(|t| t.id.clone()),
        "to-name" => to.map(|t| name_of(site, &t.id)),
        "circuits" => to.and_then(|t| both_circuits(site, at, t)),
        "conductor" => Some(conductor(kind, site, fault, at)),
        "conductor-name" => Some(site.conductor_name(&conductor(kind, site, fault, at))),
        _ => match name.strip_prefix("to-") {
            Some(rest) => to.and_then(|t| t.names(site, rest)),
            None => at.names(site, name),
        },
    };
    fill(text, lookup).map_err(|e| {
        if words::has(words::ID_NAMES, &e.name) || words::has(words::TEXT_NAMES, &e.name) {
            FaultError::UnknownPlace {
                kind: kind.kind.clone(),
                place: fault.at.clone(),
                why: format!("it has no {} here", e.name),
                near: Vec::new(),
            }
        } else {
            FaultError::Knowledge {
                kind: kind.kind.clone(),
                why: e.to_string(),
            }
        }
    })
}

/// The conductor of a fault: as told, else the kind's first.
pub(crate) fn conductor(kind: &FaultKind, site: &Site, fault: &Fault, at: &Place) -> String {
    let told = fault.conductor.clone().filter(|c| c != "L");
    told.or_else(|| conductors(kind, site, at).into_iter().next())
        .or_else(|| fault.conductor.clone())
        .unwrap_or_else(|| "L".to_owned())
}

/// The circuits of both ends in the file's order, so that it is one repair from either end.
fn both_circuits(site: &Site, at: &Place, to: &Place) -> Option<String> {
    let mut both = [at.circuit(site)?, to.circuit(site)?];
    both.sort_unstable();
    let id = |(b, c): (usize, usize)| Some(site.boards.get(b)?.circuits.get(c)?.id.as_str());
    Some(format!("{} {}", id(both[0])?, id(both[1])?))
}
