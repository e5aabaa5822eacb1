//! Which voltages prove a place dead: every pair of its conductors, and each to an independent stake.

use super::Ground;
use super::places::{
    Conductors, conductor_of, conductors_at, neutral_bar, parts_neutral, place_of, place_of_end,
    terminals_of,
};
use super::point::Want;
use super::words::letter;
use crate::checks::Check;

/// The reference that hangs on nothing of the installation.
const STAKE: &str = "soil";

/// Collects wants, each pair once.
struct Wants<'a> {
    ground: &'a Ground<'a>,
    list: Vec<Want>,
}

impl Wants<'_> {
    fn add(&mut self, a: &str, b: &str, limit_volts: f64) {
        let same = |w: &Want| {
            (w.between[0] == a && w.between[1] == b) || (w.between[0] == b && w.between[1] == a)
        };
        if let Some(known) = self.list.iter_mut().find(|w| same(w)) {
            known.limit_volts = known.limit_volts.min(limit_volts);
            return;
        }
        if a == b {
            return;
        }
        let name = self.name(a, b);
        self.list.push(Want {
            name,
            between: [a.to_owned(), b.to_owned()],
            limit_volts,
        });
    }

    fn name(&self, a: &str, b: &str) -> String {
        let site = self.ground.site;
        let (place, other) = (place_of(a), place_of(b));
        let short = |terminal: &str| match conductor_of(terminal) {
            word @ ("L" | "L1" | "L2" | "L3" | "N" | "PE") => letter(site, word),
            word @ ("frame" | "pipe") => word.to_owned(),
            _ => terminal.to_owned(),
        };
        match (b, place == other) {
            (STAKE, _) => format!("{place} {}-stake", short(a)),
            (_, true) => format!("{place} {}-{}", short(a), short(b)),
            (_, false) => format!("{place} {}-{other} {}", short(a), short(b)),
        }
    }

    fn dead(&self) -> f64 {
        self.ground.numbers.dead_volts
    }

    /// Every pair of a place's conductors, and each to the stake.
    fn whole(&mut self, conductors: &Conductors) {
        let limit = self.dead();
        let all: Vec<&String> = conductors.all().collect();
        for (index, a) in all.iter().enumerate() {
            for b in all.iter().skip(index + 1) {
                self.add(a, b, limit);
            }
        }
        for a in all {
            self.add(a, STAKE, limit);
        }
    }

    /// A terminal that is no conductor of a cable: a frame, a pipe, an electrode.
    fn metal(&mut self, terminal: &str) {
        if terminal != STAKE {
            let limit = self.dead();
            self.add(terminal, STAKE, limit);
        }
    }

    /// One place of work by its name.
    fn place(&mut self, place: &str, terminal: &str) {
        match conductors_at(self.ground.site, place) {
            Some(conductors) => self.whole(&conductors),
            None => self.metal(terminal),
        }
    }

    /// What else must be dead where an end is to be lifted.
    fn end(&mut self, end: &str) {
        let site = self.ground.site;
        if end.ends_with(".main-neutral") {
            self.place("service", "service.N");
        }
        if end.ends_with(".main-earth") || end.ends_with(".link") || end.ends_with(".bond") {
            let bar = format!("{}.PE", place_of_end(site, end));
            self.add(
                &bar,
                STAKE,
                self.ground.numbers.earth_lift_volts.min(self.dead()),
            );
        }
        if let Some(bond) = end.strip_suffix(".bond") {
            self.metal(&format!("{bond}.pipe"));
        }
        let place = place_of_end(site, end);
        self.place(&place, &place);
        for onward in onward_places(self.ground, end) {
            self.place(&onward, &onward);
        }
    }
}

/// The place whose conductors are worked on at a terminal, a device, an end or a piece of equipment.
fn work_place(ground: &Ground<'_>, terminal: &str) -> Option<String> {
    let site = ground.site;
    let place = place_of(terminal);
    let head = terminal.split('.').next().unwrap_or(terminal);
    let known = |p: &str| conductors_at(site, p).map(|_| p.to_owned());
    let board = |b: usize| site.boards.get(b).map(|b| b.id.clone());
    known(place)
        .or_else(|| known(head))
        .or_else(|| {
            site.rcd_index(head)
                .and_then(|(b, _)| board(b))
                .map(|b| format!("{b}.{head}"))
        })
        .or_else(|| site.main_switch_index(head).and_then(|(b, _)| board(b)))
        .or_else(|| site.bond_index(head).and_then(|_| board(site.main_board)))
        .or_else(|| {
            let at = site
                .equipment_index(head)
                .and_then(|e| site.equipment.get(e))?
                .at;
            let circuit = site.boards.get(at.board)?.circuits.get(at.circuit)?;
            Some(format!(
                "{}.{}",
                circuit.id,
                circuit.points.get(at.point)?.id
            ))
        })
}

/// Points whose cable a cut (`c1.p1.split`) takes off.
fn onward_places(ground: &Ground<'_>, end: &str) -> Vec<String> {
    let Some(at) = end
        .strip_suffix(".split")
        .and_then(|cut| ground.site.point_ref(cut))
    else {
        return Vec::new();
    };
    let Some(circuit) = ground
        .site
        .boards
        .get(at.board)
        .and_then(|b| b.circuits.get(at.circuit))
    else {
        return Vec::new();
    };
    let next = circuit.points.iter().filter(|p| p.from == Some(at.point));
    next.map(|p| format!("{}.{}", circuit.id, p.id)).collect()
}

/// Readings that prove dead what a check touches, opened and locked, before anything is lifted.
pub(super) fn before_lift(ground: &Ground<'_>, check: &Check) -> Vec<Want> {
    let mut wants = Wants {
        ground,
        list: Vec::new(),
    };
    for terminal in terminals_of(ground.site, &check.hookup) {
        if matches!(conductor_of(&terminal), "frame" | "pipe" | "electrode")
            || terminal == "electrode"
        {
            wants.metal(&terminal);
        } else if let Some(conductors) =
            work_place(ground, &terminal).and_then(|p| conductors_at(ground.site, &p))
        {
            wants.whole(&conductors);
        }
    }
    for end in &check.setup.lift {
        wants.end(end);
    }
    if wants.list.is_empty()
        && let Some(conductors) = conductors_at(ground.site, &check.place)
    {
        wants.whole(&conductors);
    }
    wants.list
}

/// Readings once ends are lifted: each parted neutral to earth, to the stake, to what it left, and to its neighbours.
pub(super) fn after_lift(ground: &Ground<'_>, check: &Check) -> Vec<Want> {
    let mut wants = Wants {
        ground,
        list: Vec::new(),
    };
    let limit = ground.numbers.dead_volts;
    let mut last: Option<String> = None;
    for end in check.setup.lift.iter().filter(|end| parts_neutral(end)) {
        let place = place_of_end(ground.site, end);
        for part in std::iter::once(place.clone()).chain(onward_places(ground, end)) {
            let Some(conductors) = conductors_at(ground.site, &part) else {
                continue;
            };
            let Some(neutral) = conductors.neutral else {
                continue;
            };
            if let Some(earth) = &conductors.earth {
                wants.add(&neutral, earth, limit);
                wants.add(earth, STAKE, limit);
            }
            wants.add(&neutral, STAKE, limit);
            if end.ends_with(".N@board") {
                if let Some(bar) = neutral_bar(ground.site, end) {
                    wants.add(&neutral, &bar, limit);
                }
                if let Some(before) = last.replace(neutral.clone()) {
                    wants.add(&before, &neutral, limit);
                }
            }
            if end.ends_with(".main-neutral") {
                wants.add("service.N", &neutral, limit);
                wants.add("service.N", STAKE, limit);
            }
        }
    }
    wants.list
}
