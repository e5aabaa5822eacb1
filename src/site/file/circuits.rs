//! Circuits and points of a site file.

use std::collections::BTreeMap;

use super::boards::{breaker, fits};
use super::error::SiteError;
use super::feeds::phase_of;
use super::form::{BoardForm, CircuitForm, PointForm, PointKindForm};
use super::ids::pattern;
use super::number::{METRES, MM2};
use super::reader::{Reader, metal};
use crate::site::model::{Cable, Circuit, MainSwitch, Phase, Point, PointKind, Rcd};

/// The board on which circuits hang.
pub struct Home<'a> {
    /// Its id.
    pub board: &'a str,
    /// Its phases.
    pub phase: Phase,
    /// Its main switches.
    pub mains: &'a [MainSwitch],
    /// Its RCDs.
    pub rcds: &'a [Rcd],
}

/// Checks a board's circuits.
pub fn circuits(
    reader: &mut Reader<'_>,
    path: &str,
    forms: &[CircuitForm],
    home: &Home<'_>,
    all: &[BoardForm],
) -> Result<Vec<Circuit>, SiteError> {
    let mut done = Vec::with_capacity(forms.len());
    for (i, form) in forms.iter().enumerate() {
        let path = format!("{path}.circuits[{i}]");
        reader.ids.take(&path, &form.id)?;
        let name = reader.name(&path, form.name.as_ref(), &format!("circuit {}", form.id))?;
        let rcd = match &form.rcd {
            None => None,
            Some(id) if home.rcds.iter().any(|r| r.id == *id) => Some(id.clone()),
            Some(id) => return Err(wrong_rcd(&path, id, home, all)),
        };
        let main = match &form.main {
            None => home.mains.first().map(|m| m.id.clone()),
            Some(id) if home.mains.iter().any(|m| m.id == *id) => Some(id.clone()),
            Some(id) => {
                let names = home.mains.iter().map(|m| m.id.as_str());
                let what = format!("main switch on board `{}`", home.board);
                return Err(SiteError::unknown(format!("{path}.main"), &what, id, names));
            }
        };
        let phase = match (form.phase, home.phase) {
            (Some(named), _) => phase_of(named),
            (None, Phase::One(line)) => Phase::One(line),
            (None, Phase::Three) => {
                reader.assume(
                    "circuit's phase not given on a three-phase board: taken as L1",
                    form.id.as_str(),
                );
                Phase::One(1)
            }
        };
        fits(&format!("{path}.phase"), phase, home.phase, home.board)?;
        let empty = Default::default();
        let cable = form.cable.as_ref().unwrap_or(&empty);
        if cable.mm2.is_none() {
            reader.assume(
                "cable's section not given: taken as 2.5 mm²",
                form.id.as_str(),
            );
        }
        let mm2 = reader.number_or(&format!("{path}.cable.mm2"), cable.mm2, MM2, 2.5)?;
        let pe = reader.number_or(
            &format!("{path}.cable.pe_mm2"),
            cable.pe_mm2.flatten(),
            MM2,
            mm2,
        )?;
        let breaker = breaker(
            reader,
            &format!("{path}.breaker"),
            form.breaker.as_ref(),
            20.0,
            &form.id,
        )?;
        let points = points(reader, &path, form, home.board)?;
        let cable = Cable {
            mm2,
            pe_mm2: Some(pe),
            metal: metal(cable.metal),
        };
        done.push(Circuit {
            id: form.id.clone(),
            name,
            rcd,
            main,
            phase,
            breaker,
            cable,
            points,
        });
    }
    Ok(done)
}

fn wrong_rcd(path: &str, id: &str, home: &Home<'_>, all: &[BoardForm]) -> SiteError {
    let elsewhere = all
        .iter()
        .find(|b| b.rcds.iter().flatten().any(|r| r.id == id));
    if let Some(other) = elsewhere {
        return SiteError::new(
            format!("{path}.rcd"),
            format!(
                "RCD `{id}` is on board `{}`, this circuit on `{}`",
                other.id, home.board
            ),
            "name an RCD of the same board, or null",
        );
    }
    let names = home.rcds.iter().map(|r| r.id.as_str());
    SiteError::unknown(
        format!("{path}.rcd"),
        &format!("RCD on board `{}`", home.board),
        id,
        names,
    )
}

fn points(
    reader: &mut Reader<'_>,
    path: &str,
    form: &CircuitForm,
    board: &str,
) -> Result<Vec<Point>, SiteError> {
    if form.points.is_empty() {
        return Err(SiteError::new(
            format!("{path}.points"),
            format!("circuit `{}` has no points", form.id),
            "add at least one point, or leave a spare breaker out",
        ));
    }
    let mut by_id: BTreeMap<&str, usize> = BTreeMap::new();
    for (i, p) in form.points.iter().enumerate() {
        let path = format!("{path}.points[{i}]");
        pattern(&path, &p.id)?;
        if p.id == "breaker" {
            return Err(SiteError::new(
                format!("{path}.id"),
                "`breaker` would be taken for the circuit's breaker",
                "choose another id for this point",
            ));
        }
        if let Some(first) = by_id.insert(&p.id, i) {
            return Err(SiteError::new(
                format!("{path}.id"),
                format!(
                    "point id `{}` is used twice in circuit `{}`: first as its point {}",
                    p.id,
                    form.id,
                    first + 1
                ),
                "give each point of a circuit its own id",
            ));
        }
    }
    let mut parents: Vec<Option<usize>> = Vec::with_capacity(form.points.len());
    for (i, p) in form.points.iter().enumerate() {
        parents.push(match p.from.as_deref() {
            None => i.checked_sub(1),
            Some(from) if from == p.id => {
                return Err(SiteError::new(
                    format!("{path}.points[{i}].from"),
                    format!("point `{from}` goes on from itself"),
                    "name the point before it, or the board",
                ));
            }
            Some(from) => match by_id.get(from) {
                Some(&parent) => Some(parent),
                None if from == board || from == "board" => None,
                None => {
                    let names = by_id.keys().copied().filter(|n| *n != p.id).chain([board]);
                    let what = format!("point of circuit `{}`", form.id);
                    return Err(SiteError::unknown(
                        format!("{path}.points[{i}].from"),
                        &what,
                        from,
                        names,
                    ));
                }
            },
        });
    }
    placed(reader, path, form, &parents)
}

/// Points in an order in which each comes after the one it goes on from, lengths checked.
fn placed(
    reader: &mut Reader<'_>,
    path: &str,
    form: &CircuitForm,
    parents: &[Option<usize>],
) -> Result<Vec<Point>, SiteError> {
    let mut new_index: Vec<Option<usize>> = vec![None; parents.len()];
    let mut done: Vec<Point> = Vec::with_capacity(parents.len());
    while done.len() < parents.len() {
        let before = done.len();
        for (i, p) in form.points.iter().enumerate() {
            let parent = match parents[i] {
                None => None,
                Some(at) if new_index[at].is_some() => new_index[at],
                Some(_) => continue,
            };
            if new_index[i].is_none() {
                let path = format!("{path}.points[{i}]");
                let point = point(reader, &path, &form.id, p, parent.map(|n| (n, &done[n])))?;
                new_index[i] = Some(done.len());
                done.push(point);
            }
        }
        if done.len() == before {
            let stuck = new_index.iter().position(Option::is_none).unwrap_or(0);
            return Err(SiteError::new(
                format!("{path}.points[{stuck}].from"),
                format!(
                    "point `{}` goes on from points that go on from it: a loop",
                    form.points[stuck].id
                ),
                "enter a ring as two branches, each from the board",
            ));
        }
    }
    Ok(done)
}

fn point(
    reader: &mut Reader<'_>,
    path: &str,
    circuit: &str,
    form: &PointForm,
    parent: Option<(usize, &Point)>,
) -> Result<Point, SiteError> {
    let metres = match form.metres {
        Some(n) => reader.number(&format!("{path}.metres"), n, METRES)?,
        None => {
            reader.assume(
                "point's length not given: taken as 4 m beyond the one before (8 m from the board)",
                format!("{circuit}.{}", form.id),
            );
            parent.map_or(8.0, |(_, p)| p.metres + 4.0)
        }
    };
    if let Some((_, before)) = parent
        && metres < before.metres
    {
        return Err(SiteError::new(
            format!("{path}.metres"),
            format!(
                "point `{}` at {metres} m goes on from `{}` at {} m, but is nearer to the board",
                form.id, before.id, before.metres
            ),
            "metres are cable length from the board, always; a branch names where it starts with `from`",
        ));
    }
    Ok(Point {
        id: form.id.clone(),
        name: reader.name(path, form.name.as_ref(), &form.id)?,
        metres,
        from: parent.map(|(i, _)| i),
        kind: match form.kind {
            None | Some(PointKindForm::Outlet) => PointKind::Outlet,
            Some(PointKindForm::Fixed) => PointKind::Fixed,
            Some(PointKindForm::Light) => PointKind::Light,
            Some(PointKindForm::Switch) => PointKind::Switch,
            Some(PointKindForm::Junction) => PointKind::Junction,
            Some(PointKindForm::Isolator) => PointKind::Isolator,
        },
    })
}
