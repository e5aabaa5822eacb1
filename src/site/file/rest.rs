//! Supply, earthing, bonds, equipment and sources of a site file.

use std::collections::BTreeMap;

use super::boards::{link_allowed, link_at};
use super::error::{SiteError, shorten};
use super::form::{
    ClassForm, EarthingForm, EquipmentForm, SourceForm, SourceKindForm, SupplyForm, SystemForm,
};
use super::number::{HERTZ, METRES, MM2, Num, RATIO, VOLTS, WATTS};
use super::reader::{Reader, metal};
use crate::quantity::{nearest, nearest_text};
use crate::site::model::{
    Board, Bond, Class, Conductor, Earthing, Equipment, PointRef, Source, SourceKind, SourcePlace,
    Supply, System,
};

/// Checks the supply.
pub fn supply(reader: &mut Reader<'_>, form: &SupplyForm) -> Result<Supply, SiteError> {
    let phases = form.phases.unwrap_or(1);
    if phases != 1 && phases != 3 {
        return Err(SiteError::new(
            "supply.phases",
            format!("{phases} phases"),
            "1 or 3",
        ));
    }
    let empty = Default::default();
    Ok(Supply {
        phases: phases as u8,
        volts: reader.number_or("supply.volts", form.volts, VOLTS, 230.0)?,
        volts_given: form.volts.is_some(),
        hertz: reader.number_or("supply.hertz", form.hertz, HERTZ, 50.0)?,
        system: match form.system {
            SystemForm::TnCS => System::TnCS,
            SystemForm::TnS => System::TnS,
            SystemForm::Tt => System::Tt,
        },
        network_ohms: reader.ohms("supply.network_ohms", form.network_ohms)?,
        network_x_over_r: reader.number_or(
            "supply.network_x_over_r",
            form.network_x_over_r,
            RATIO,
            0.4,
        )?,
        network_earth_ohms: reader.ohms("supply.network_earth_ohms", form.network_earth_ohms)?,
        service: reader.conductor(
            "supply.service",
            form.service.as_ref().unwrap_or(&empty),
            20.0,
            16.0,
        )?,
    })
}

/// Checks the main earthing; gives it and the bonds.
pub fn earthing(
    reader: &mut Reader<'_>,
    form: Option<&EarthingForm>,
    main: &Board,
    boards: &[Board],
    system: System,
) -> Result<(Earthing, Vec<Bond>), SiteError> {
    let empty = EarthingForm::default();
    let form = form.unwrap_or(&empty);
    if let Some(name) = &form.board
        && *name != main.id
    {
        if boards.iter().any(|b| b.id == *name) {
            return Err(SiteError::new(
                "earthing.board",
                format!(
                    "the main earthing is at `{name}`, but the service feeds `{}`",
                    main.id
                ),
                "name the board fed from the service; an outbuilding's own link and electrode go in its `fed_from`",
            ));
        }
        return Err(SiteError::unknown(
            "earthing.board",
            "board",
            name,
            boards.iter().map(|b| b.id.as_str()),
        ));
    }
    let link = form.link.unwrap_or(system == System::TnCS);
    link_allowed("earthing.link", link, system)?;
    if system == System::TnCS && !link {
        reader.warn("earthing.link", "TN-C-S without a neutral-earth link: `link` is the installation as meant; one that is missing by mistake is a fault");
    }
    let empty_conductor = Default::default();
    let conductor = form.main_earth.as_ref().unwrap_or(&empty_conductor);
    let earthing = Earthing {
        link,
        link_at: link_at(form.link_at, &main.mains),
        main_earth: Some(reader.conductor("earthing.main_earth", conductor, 4.0, 6.0)?),
        electrode_ohms: reader.ohms("earthing.electrode_ohms", form.electrode_ohms)?,
    };
    let mut bonds = Vec::new();
    for (i, b) in form.bonds.iter().flatten().enumerate() {
        let path = format!("earthing.bonds[{i}]");
        reader.ids.take(&path, &b.id)?;
        bonds.push(Bond {
            id: b.id.clone(),
            name: reader.name(&path, b.name.as_ref(), &format!("{} pipe", b.id))?,
            conductor: Conductor {
                metres: reader.number_or(&format!("{path}.metres"), b.metres, METRES, 8.0)?,
                mm2: reader.number_or(&format!("{path}.mm2"), b.mm2, MM2, 4.0)?,
                metal: metal(b.metal),
            },
            pipe_ohms: reader.ohms(&format!("{path}.pipe_ohms"), b.pipe_ohms)?,
            street_metal: b.street_metal,
            street_ohms: reader.ohms(&format!("{path}.street_ohms"), b.street_ohms)?,
        });
    }
    Ok((earthing, bonds))
}

/// Points of all boards by `c1.p1`.
pub fn point_index(boards: &[Board]) -> BTreeMap<String, PointRef> {
    let mut index = BTreeMap::new();
    for (board, b) in boards.iter().enumerate() {
        for (circuit, c) in b.circuits.iter().enumerate() {
            for (point, p) in c.points.iter().enumerate() {
                index.insert(
                    format!("{}.{}", c.id, p.id),
                    PointRef {
                        board,
                        circuit,
                        point,
                    },
                );
            }
        }
    }
    index
}

/// Checks the equipment.
pub fn equipment(
    reader: &mut Reader<'_>,
    forms: &[EquipmentForm],
    points: &BTreeMap<String, PointRef>,
    bonds: &[Bond],
) -> Result<Vec<Equipment>, SiteError> {
    let mut done: Vec<Equipment> = Vec::with_capacity(forms.len());
    for (i, form) in forms.iter().enumerate() {
        let path = format!("equipment[{i}]");
        reader.ids.take(&path, &form.id)?;
        let Some(&at) = points.get(&form.at) else {
            return Err(no_point(&format!("{path}.at"), &form.at, points));
        };
        let kind = kind(reader, &path, form);
        let mut touches = Vec::new();
        for (t, name) in form.touches.iter().flatten().enumerate() {
            let Some(bond) = bonds.iter().position(|b| b.id == *name) else {
                let names = bonds.iter().map(|b| b.id.as_str());
                return Err(SiteError::unknown(
                    format!("{path}.touches[{t}]"),
                    "bond",
                    name,
                    names,
                ));
            };
            if !touches.contains(&bond) {
                touches.push(bond);
            }
        }
        touches.sort_unstable();
        let class = match form.class {
            Some(ClassForm::I) => Class::I,
            Some(ClassForm::II) => Class::II,
            None => reader.known.kinds.get(&kind).copied().unwrap_or(Class::I),
        };
        let word = if kind == "other" {
            form.id.replace('-', " ")
        } else {
            kind.clone()
        };
        done.push(Equipment {
            id: form.id.clone(),
            name: reader.name(&path, form.name.as_ref(), &word)?,
            kind,
            at,
            watts: form
                .watts
                .map(|n: Num| reader.number(&format!("{path}.watts"), n, WATTS))
                .transpose()?,
            class,
            plug: form.plug.unwrap_or(true),
            touches,
        });
    }
    distinct(&mut done);
    Ok(done)
}

/// Two pieces of equipment that would read alike are told apart by their ids.
fn distinct(equipment: &mut [Equipment]) {
    let mut count: BTreeMap<String, usize> = BTreeMap::new();
    for e in equipment.iter() {
        *count.entry(e.name.clone()).or_default() += 1;
    }
    for e in equipment {
        if count.get(&e.name).is_some_and(|n| *n > 1) {
            e.name = format!("{} {}", e.name, e.id);
        }
    }
}

fn kind(reader: &mut Reader<'_>, path: &str, form: &EquipmentForm) -> String {
    let Some(kind) = &form.kind else {
        reader.assume(
            "equipment's kind not given: taken as `other`",
            form.id.as_str(),
        );
        return "other".into();
    };
    if kind == "other" || reader.known.kinds.contains_key(kind) {
        return kind.clone();
    }
    let near = nearest(kind, reader.known.kinds.keys(), 2);
    let tail = if near.is_empty() {
        String::new()
    } else {
        format!("; {}", nearest_text(&near))
    };
    reader.warn(
        format!("{path}.kind"),
        format!(
            "`{}` is not a kind of equipment known here: taken as `other`{tail}",
            shorten(kind)
        ),
    );
    "other".into()
}

fn no_point(path: &str, name: &str, points: &BTreeMap<String, PointRef>) -> SiteError {
    // A circuit alone is the likely slip: its points are then the cure.
    let inside: Vec<&String> = points
        .keys()
        .filter(|p| p.split('.').next() == Some(name))
        .take(6)
        .collect();
    if inside.is_empty() {
        return SiteError::unknown(path, "point", name, points.keys());
    }
    let names: Vec<&str> = inside.iter().map(|s| s.as_str()).collect();
    SiteError::new(
        path,
        format!("`{name}` is a circuit, not a point"),
        format!("one of {}", names.join(", ")),
    )
}

/// Checks the sources.
pub fn sources(
    reader: &mut Reader<'_>,
    forms: &[SourceForm],
    boards: &[Board],
    points: &BTreeMap<String, PointRef>,
) -> Result<Vec<Source>, SiteError> {
    let mut done = Vec::with_capacity(forms.len());
    for (i, form) in forms.iter().enumerate() {
        let path = format!("sources[{i}]");
        reader.ids.take(&path, &form.id)?;
        let board = boards.iter().position(|b| b.id == form.at);
        let at = match (board, points.get(&form.at)) {
            (Some(board), _) => SourcePlace::Board(board),
            (None, Some(&point)) => SourcePlace::Point(point),
            (None, None) => {
                let names = boards
                    .iter()
                    .map(|b| b.id.as_str())
                    .chain(points.keys().map(String::as_str));
                return Err(SiteError::unknown(
                    format!("{path}.at"),
                    "board or point",
                    &form.at,
                    names,
                ));
            }
        };
        if form.watts.is_none() {
            reader.assume("source's rating not given: taken as 5 kW", form.id.as_str());
        }
        done.push(Source {
            id: form.id.clone(),
            kind: match form.kind {
                SourceKindForm::PvInverter => SourceKind::PvInverter,
                SourceKindForm::Battery => SourceKind::Battery,
                SourceKindForm::Generator => SourceKind::Generator,
            },
            at,
            watts: reader.number_or(&format!("{path}.watts"), form.watts, WATTS, 5000.0)?,
            backup: form.backup.unwrap_or(false),
        });
    }
    Ok(done)
}
