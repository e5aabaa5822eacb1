//! The space of single hypotheses: every kind at every place that this site allows.
//!
//! A kind whose far end is a point of another circuit would give every pair of points. One pair of points
//! stands for each pair of circuits, the two whose cable lengths differ least, since what is repaired,
//! the place where two neutrals meet, is looked for along both cables anyway. Conditions are about `at`;
//! `other-bar` is about both ends, and the nearest point is always taken.

use std::collections::{BTreeMap, BTreeSet};

use super::build::{build, claims};
use super::error::FaultError;
use super::fault::Fault;
use super::pairs::exclusions;
use super::valid::{bars, checked, conductors, filled};
use crate::knowledge::{EditForm, EquipmentRow, FaultKind, Knowledge};
use crate::site::{Place, Site, circuit_pairs, holds, places};

/// Id of the hypothesis that nothing is wrong.
pub const NOTHING_WRONG: &str = "nothing-wrong";
/// Id of the hypothesis that it is none of the list.
pub const UNLISTED: &str = "unlisted";
/// What may be wrong: one fault, or two at once.
#[derive(Clone, Debug, PartialEq)]
pub struct Hypothesis {
    /// Readable and stable: `pe-open@c1.p2`, `joint-resistive@c1.p1:N`,
    /// `neutral-on-wrong-bar@c1>msb.rcd2.N`; of a pair both, joined by ` + `.
    pub id: String,
    /// The faults, value and position left to belief.
    pub faults: Vec<Fault>,
    /// Their rows among the kinds.
    pub kinds: Vec<usize>,
    /// Where they are: ids of their places.
    pub places: Vec<String>,
    /// Hypotheses with the same group ask for the same repair at the same place.
    pub group: String,
    /// `repair`, `call-network`, `isolate`, `refer`, `nothing-found`.
    pub action: String,
    /// Minutes of the repair.
    pub minutes: f64,
    /// The repair opens, cuts or replaces something sound to look at.
    pub invasive: bool,
    /// Dangerous if left.
    pub dangerous: bool,
    /// Nothing to repair.
    pub harmless: bool,
    /// Prior odds of being there against not, at an installation that calls; not normalised.
    pub prior: f64,
}

/// Every single hypothesis of a site, and which of them cannot be together.
#[derive(Clone, Debug, Default, PartialEq)]
pub struct Space {
    /// Singles, in order of kind and place.
    pub singles: Vec<Hypothesis>,
    /// For a single, the later ones that contradict it or say the same.
    pub excluded: BTreeMap<usize, BTreeSet<usize>>,
}

impl Space {
    /// A single, or a pair of singles, by id.
    pub fn by_id(&self, id: &str) -> Option<Hypothesis> {
        let single = |id: &str| self.singles.iter().position(|h| h.id == id);
        match id.split_once(" + ") {
            None => single(id).map(|i| self.singles[i].clone()),
            Some((a, b)) => {
                let (i, j) = (single(a)?, single(b)?);
                self.compatible(i, j).then(|| self.pair(i.min(j), i.max(j)))
            }
        }
    }
}

/// All singles of a site.
///
/// # Errors
/// [`FaultError::Knowledge`]: a word or a template of a kind has no meaning here.
pub fn enumerate(knowledge: &Knowledge, site: &Site) -> Result<Space, FaultError> {
    let mut singles = Vec::new();
    let mut claimed: Vec<BTreeSet<String>> = Vec::new();
    for (row, kind) in knowledge.faults.iter().enumerate() {
        for (fault, presence) in faults_of(kind, &knowledge.equipment, site)? {
            let (at, to) = checked(kind, site, &fault)?;
            let mut claim = BTreeSet::from([format!("{} at {}", kind.kind, fault.at)]);
            let edits = match build(kind, site, &fault, &at, to.as_ref()) {
                // A place without the RCD, the circuit, … that the kind speaks of does not have the fault.
                Err(FaultError::UnknownPlace { .. }) => continue,
                other => other?,
            };
            for edit in edits {
                claim.extend(claims(&edit).into_iter().map(|(key, _)| key));
            }
            claimed.push(claim);
            singles.push(Hypothesis {
                id: id_of(&fault),
                kinds: vec![row],
                places: vec![fault.at.clone()],
                group: filled(kind, site, &fault, &at, to.as_ref(), &kind.repair.group)?,
                action: kind.repair.action.clone(),
                minutes: kind.repair.minutes,
                invasive: kind.repair.invasive,
                dangerous: kind.dangerous,
                harmless: kind.harmless,
                prior: presence / (1.0 - presence).max(0.5),
                faults: vec![fault],
            });
        }
    }
    Ok(Space {
        singles,
        excluded: exclusions(&claimed),
    })
}

/// The id of a single fault, without its value.
pub fn id_of(fault: &Fault) -> String {
    let mut id = format!("{}@{}", fault.kind, fault.at);
    if let Some(conductor) = &fault.conductor {
        id.push(':');
        id.push_str(conductor);
    }
    if let Some(to) = &fault.to {
        id.push('>');
        id.push_str(to);
    }
    id
}

/// Every fault of a kind, with its share of the presence.
fn faults_of(
    kind: &FaultKind,
    equipment: &[EquipmentRow],
    site: &Site,
) -> Result<Vec<(Fault, f64)>, FaultError> {
    let mut at = Vec::new();
    for place in kind.at.iter().flat_map(|class| places(site, class)) {
        let mut fits = true;
        for word in &kind.only {
            fits &= holds(word, &place, site, equipment).ok_or_else(|| FaultError::Knowledge {
                kind: kind.kind.clone(),
                why: format!("`{word}` in `only` is no condition on a place"),
            })?;
        }
        if fits {
            at.push(place);
        }
    }
    let ends = match kind.to.as_deref() {
        None => at.into_iter().map(|place| (place, None, 1.0)).collect(),
        Some("bar") => to_bars(site, &at),
        Some("point") => to_other_circuits(kind, site, &at),
        Some(class) => {
            let why = format!("`to` cannot be `{class}`: bar or point");
            return Err(FaultError::Knowledge {
                kind: kind.kind.clone(),
                why,
            });
        }
    };
    let mut out = Vec::new();
    for (place, to, share) in ends {
        let choices = conductors(kind, site, &place);
        let many: Vec<Option<String>> = if choices.is_empty() {
            vec![None]
        } else {
            choices.into_iter().map(Some).collect()
        };
        let presence = kind.presence * share / many.len() as f64;
        for conductor in many {
            let (kind, at) = (kind.kind.clone(), place.id.clone());
            out.push((
                Fault {
                    kind,
                    at,
                    to: to.clone(),
                    value: None,
                    conductor,
                    position: None,
                },
                presence,
            ));
        }
    }
    Ok(out)
}

type End = (Place, Option<String>, f64);

/// Each place with every other neutral bar of its board.
fn to_bars(site: &Site, at: &[Place]) -> Vec<End> {
    let mut out = Vec::new();
    for place in at {
        let own = format!("{}.N", place.bus(site));
        let others: Vec<Place> = bars(site, place.board(site))
            .into_iter()
            .filter(|bar| bar.id != own)
            .collect();
        let share = 1.0 / others.len().max(1) as f64;
        out.extend(
            others
                .into_iter()
                .map(|bar| (place.clone(), Some(bar.id), share)),
        );
    }
    out
}

/// For each pair of circuits one pair of points, the two nearest in cable length; both ways round
/// unless the fault treats its ends alike.
fn to_other_circuits(kind: &FaultKind, site: &Site, at: &[Place]) -> Vec<End> {
    let mut from: BTreeMap<(usize, usize), Vec<&Place>> = BTreeMap::new();
    let mut onto: BTreeMap<(usize, usize), Vec<&Place>> = BTreeMap::new();
    let targets = places(site, "point");
    let sort = |list: &mut BTreeMap<_, Vec<_>>, place| {
        list.entry(place_circuit(site, place))
            .or_default()
            .push(place);
    };
    at.iter().for_each(|place| sort(&mut from, place));
    targets.iter().for_each(|place| sort(&mut onto, place));
    let other_bar = kind.only.iter().any(|word| word == "other-bar");
    let nearest = |c: (usize, usize), d: (usize, usize)| -> Option<(Place, Place)> {
        let metres = |p: &Place| p.point(site).map_or(0.0, |p| site.point(p).metres);
        let mut best: Option<(f64, &Place, &Place)> = None;
        for &p in from.get(&c)? {
            for &q in onto.get(&d)? {
                let apart = (metres(p) - metres(q)).abs();
                if best.is_none_or(|(least, ..)| apart < least) {
                    best = Some((apart, p, q));
                }
            }
        }
        let (_, p, q) = best.filter(|(_, p, q)| !other_bar || p.bus(site) != q.bus(site))?;
        Some((p.clone(), q.clone()))
    };
    let mut found = Vec::new();
    let mut partners: BTreeMap<(usize, usize), usize> = BTreeMap::new();
    for (b, c, d) in circuit_pairs(site) {
        let (c, d) = ((b, c), (b, d));
        let both = [(c, nearest(c, d)), (d, nearest(d, c))];
        for (circuit, way) in &both {
            *partners.entry(*circuit).or_default() += usize::from(way.is_some());
        }
        found.push(both);
    }
    let share = |c: &(usize, usize)| {
        let points = from.get(c).map_or(0, Vec::len);
        points as f64 / partners.get(c).map_or(1, |n| (*n).max(1)) as f64
    };
    let alike = kind
        .edits
        .iter()
        .all(|e| matches!(e, EditForm::Shunt { .. }));
    let mut out = Vec::new();
    for ways in found {
        let made = ways
            .into_iter()
            .filter_map(|(c, way)| way.map(|(p, q)| (p, Some(q.id), share(&c))));
        let mut made: Vec<End> = made.collect();
        if alike && made.len() == 2 {
            let other = made.pop();
            made[0].2 += other.map_or(0.0, |end| end.2);
        }
        out.extend(made);
    }
    out
}

fn place_circuit(site: &Site, place: &Place) -> (usize, usize) {
    place.circuit(site).unwrap_or((usize::MAX, usize::MAX))
}
