//! Boards of a site file: feeds, main switches, RCDs.

use std::collections::BTreeMap;

use super::circuits;
use super::devices::{mains, rcd_lines, rcds};
use super::error::SiteError;
use super::feeds::{Fed, Feeds, phase_of, phase_word, wanted};
use super::form::{BoardForm, BreakerForm, CurveForm, LinkAtForm, SubmainForm};
use super::number::{AMPS, METRES, MM2};
use super::reader::{Reader, metal};
use crate::site::model::{
    Board, Breaker, Cable, Curve, Earthing, Feed, LinkAt, MainSwitch, Phase, System,
};

/// What the rest of the file says that boards depend on.
#[derive(Clone, Copy, Debug)]
pub struct Context {
    /// Phases of the supply.
    pub supply: Phase,
    /// Earthing system.
    pub system: System,
}

/// Checks all boards; they come out in feeding order.
pub fn boards(
    reader: &mut Reader<'_>,
    forms: &[BoardForm],
    feeds: &Feeds<'_>,
    context: Context,
) -> Result<Vec<Board>, SiteError> {
    for (i, form) in forms.iter().enumerate() {
        reader.ids.take(&format!("boards[{i}]"), &form.id)?;
    }
    if forms.iter().all(|b| b.circuits.is_empty()) {
        return Err(SiteError::new(
            "boards",
            "there are no circuits",
            "add at least one circuit with its points",
        ));
    }
    let placed: BTreeMap<usize, usize> = feeds
        .order
        .iter()
        .enumerate()
        .map(|(new, old)| (*old, new))
        .collect();
    let mut done: Vec<Board> = Vec::with_capacity(forms.len());
    for &old in &feeds.order {
        let form = &forms[old];
        let path = format!("boards[{old}]");
        let feed = match feeds.fed[old] {
            Fed::Service => Feed::Service,
            Fed::Board(from, submain) => {
                let index = placed[&from];
                let natural = || wanted(forms, feeds, old);
                feed(
                    reader,
                    &path,
                    &form.id,
                    submain,
                    (index, &done),
                    context,
                    natural,
                )?
            }
        };
        let phase = match &feed {
            Feed::Service => context.supply,
            Feed::Submain { phase, .. } => *phase,
        };
        let mains = mains(reader, &path, form, phase, matches!(feed, Feed::Service))?;
        let rcds = rcds(reader, &path, form, phase, &feed)?;
        let earthing = match feeds.fed[old] {
            Fed::Service => None,
            Fed::Board(_, submain) => outbuilding(
                reader,
                &format!("{path}.fed_from"),
                submain,
                &feed,
                &mains,
                context.system,
            )?,
        };
        let name = reader.name(&path, form.name.as_ref(), &form.id)?;
        let home = circuits::Home {
            board: &form.id,
            phase,
            mains: &mains,
            rcds: &rcds,
        };
        let circuits = circuits::circuits(reader, &path, &form.circuits, &home, forms)?;
        rcd_lines(&path, form, &rcds, &circuits)?;
        done.push(Board {
            id: form.id.clone(),
            name,
            feed,
            mains,
            rcds,
            circuits,
            earthing,
        });
    }
    Ok(done)
}

/// A breaker; what is left out is C 20 A, noted at `place`.
pub fn breaker(
    reader: &mut Reader<'_>,
    path: &str,
    form: Option<&BreakerForm>,
    amps: f64,
    place: &str,
) -> Result<Breaker, SiteError> {
    let empty = BreakerForm::default();
    let form = form.unwrap_or(&empty);
    if form.amps.is_none() {
        reader.assume("breaker's rating not given: taken as usual for what hangs on it (C 20 A; 63 A for a submain)", place);
    }
    Ok(Breaker {
        curve: match form.curve {
            Some(CurveForm::B) => Curve::B,
            Some(CurveForm::D) => Curve::D,
            Some(CurveForm::Fuse) => Curve::Fuse,
            Some(CurveForm::C) | None => Curve::C,
        },
        amps: reader.number_or(&format!("{path}.amps"), form.amps, AMPS, amps)?,
    })
}

fn feed(
    reader: &mut Reader<'_>,
    path: &str,
    id: &str,
    form: &SubmainForm,
    (index, done): (usize, &[Board]),
    context: Context,
    natural: impl Fn() -> Phase,
) -> Result<Feed, SiteError> {
    let path = format!("{path}.fed_from");
    let from = &done[index];
    let available = match &from.feed {
        Feed::Service => context.supply,
        Feed::Submain { phase, .. } => *phase,
    };
    let rcd = match &form.rcd {
        None => None,
        Some(name) => match from.rcds.iter().find(|r| r.id == *name) {
            Some(rcd) => Some(rcd),
            None => {
                let names = from.rcds.iter().map(|r| r.id.as_str());
                return Err(SiteError::unknown(
                    format!("{path}.rcd"),
                    &format!("RCD on board `{}`", from.id),
                    name,
                    names,
                ));
            }
        },
    };
    let phase = match (form.phase, available) {
        (Some(named), _) => phase_of(named),
        (None, Phase::One(line)) => Phase::One(line),
        (None, Phase::Three) => natural(),
    };
    fits(&format!("{path}.phase"), phase, available, &from.id)?;
    if let (Some(rcd), Phase::Three) = (rcd, phase)
        && rcd.poles != 4
    {
        return Err(SiteError::new(
            format!("{path}.rcd"),
            format!(
                "RCD `{}` has {} poles, but this submain has three phases",
                rcd.id, rcd.poles
            ),
            "give the RCD `\"poles\": 4`, or the submain its one `phase`",
        ));
    }
    let empty = Default::default();
    let cable = form.cable.as_ref().unwrap_or(&empty);
    let mm2 = reader.number_or(&format!("{path}.cable.mm2"), cable.mm2, MM2, 10.0)?;
    let pe_mm2 = match cable.pe_mm2 {
        None => Some(mm2),
        Some(None) => None,
        Some(Some(n)) => Some(reader.number(&format!("{path}.cable.pe_mm2"), n, MM2)?),
    };
    if form.metres.is_none() {
        reader.assume("submain's length not given: taken as 20 m", id);
    }
    Ok(Feed::Submain {
        board: index,
        rcd: rcd.map(|r| r.id.clone()),
        breaker: breaker(
            reader,
            &format!("{path}.breaker"),
            form.breaker.as_ref(),
            63.0,
            id,
        )?,
        phase,
        cable: Cable {
            mm2,
            pe_mm2,
            metal: metal(cable.metal),
        },
        metres: reader.number_or(&format!("{path}.metres"), form.metres, METRES, 20.0)?,
    })
}

/// Whether `phase` can be had on a board that has `available`.
pub fn fits(path: &str, phase: Phase, available: Phase, board: &str) -> Result<(), SiteError> {
    if available == Phase::Three || phase == available {
        return Ok(());
    }
    Err(SiteError::new(
        path,
        format!(
            "`{}` is not on board `{board}`, which has {} alone",
            phase_word(phase),
            phase_word(available)
        ),
        format!(
            "write `\"{}\"`, leave the key out, or give the supply or the submain its three phases",
            phase_word(available)
        ),
    ))
}

fn outbuilding(
    reader: &mut Reader<'_>,
    path: &str,
    form: &SubmainForm,
    feed: &Feed,
    mains: &[MainSwitch],
    system: System,
) -> Result<Option<Earthing>, SiteError> {
    let link = form.link.unwrap_or(false);
    link_allowed(&format!("{path}.link"), link, system)?;
    let pe = matches!(feed, Feed::Submain { cable, .. } if cable.pe_mm2.is_some());
    if pe && link {
        reader.warn(
            format!("{path}.link"),
            "this board has both a link of its own and a PE from its feed: neutral current returns by the PE; \
             with its own link, `pe_mm2` is usually null",
        );
    }
    let electrode = link || !pe || form.main_earth.is_some() || form.electrode_ohms.is_some();
    if !electrode {
        return Ok(None);
    }
    let empty = Default::default();
    let main_earth = form.main_earth.as_ref().unwrap_or(&empty);
    Ok(Some(Earthing {
        link,
        link_at: link_at(form.link_at, mains),
        main_earth: Some(reader.conductor(&format!("{path}.main_earth"), main_earth, 4.0, 6.0)?),
        electrode_ohms: reader.ohms(&format!("{path}.electrode_ohms"), form.electrode_ohms)?,
    }))
}

/// A link exists on TN-C-S alone.
pub fn link_allowed(path: &str, link: bool, system: System) -> Result<(), SiteError> {
    let name = match system {
        System::TnCS => return Ok(()),
        System::TnS => "TN-S",
        System::Tt => "TT",
    };
    if !link {
        return Ok(());
    }
    Err(SiteError::new(
        path,
        format!("a neutral-earth link does not belong to a {name} installation"),
        "write false, or make `supply.system` \"TN-C-S\"; a link that is there by mistake is a fault to be found",
    ))
}

/// Where the link sits: on the supply side of a switched neutral unless told.
pub fn link_at(form: Option<LinkAtForm>, mains: &[MainSwitch]) -> LinkAt {
    match form {
        Some(LinkAtForm::Bar) => LinkAt::Bar,
        Some(LinkAtForm::Incoming) => LinkAt::Incoming,
        None if mains.first().is_some_and(MainSwitch::switches_neutral) => LinkAt::Incoming,
        None => LinkAt::Bar,
    }
}
