//! Places of work: which conductors a terminal's place has, and which devices isolate it.

use crate::knowledge::{Hookup, Setup, SourceMode};
use crate::site::{Feed, Site, SourcePlace, lines_of};

/// The conductors of one place, as terminals of contract §2.
#[derive(Clone, Debug, Default, PartialEq, Eq)]
pub struct Conductors {
    /// Line terminals.
    pub lines: Vec<String>,
    /// Neutral terminal.
    pub neutral: Option<String>,
    /// Protective conductor there, or the earth bar that is in reach where none runs.
    pub earth: Option<String>,
}

impl Conductors {
    fn of(base: &str, lines: &[&str], earth: Option<String>) -> Self {
        Self {
            lines: lines.iter().map(|line| format!("{base}.{line}")).collect(),
            neutral: Some(format!("{base}.N")),
            earth,
        }
    }

    /// All of them, lines first.
    pub fn all(&self) -> impl Iterator<Item = &String> {
        self.lines.iter().chain(&self.neutral).chain(&self.earth)
    }
}

/// The place of a terminal: `c1.p1` of `c1.p1.L`, `kettle` of `kettle.frame`, `electrode` of itself.
pub fn place_of(terminal: &str) -> &str {
    match terminal.rsplit_once('.') {
        Some((place, "L" | "L1" | "L2" | "L3" | "N" | "PE" | "frame" | "pipe")) => place,
        _ => terminal,
    }
}

/// The last word of a terminal (`L`, `N`, `PE`, `frame`…), or nothing.
pub fn conductor_of(terminal: &str) -> &str {
    terminal.rsplit_once('.').map_or("", |(_, word)| word)
}

/// Whether a terminal is a line conductor.
pub fn is_line(terminal: &str) -> bool {
    matches!(conductor_of(terminal), "L" | "L1" | "L2" | "L3")
}

/// Conductors at a place: `service`, a board, `msb.rcd1`, a circuit, a point, `shed.feed`, `shed.in`.
pub fn conductors_at(site: &Site, place: &str) -> Option<Conductors> {
    let main = site.boards.get(site.main_board)?;
    if place == "service" {
        let earth = if site.feed_has_pe(site.main_board) {
            "service.PE".to_owned()
        } else {
            format!("{}.PE", main.id)
        };
        return Some(Conductors::of(
            place,
            lines_of(site.supply_phase()),
            Some(earth),
        ));
    }
    if let Some(board) = site.board_index(place) {
        return Some(Conductors::of(
            place,
            lines_of(site.board_phase(board)),
            Some(format!("{place}.PE")),
        ));
    }
    let of_circuit = |board: usize, circuit: usize| {
        let home = site.boards.get(board)?;
        let row = home.circuits.get(circuit)?;
        let earth = if row.cable.pe_mm2.is_some() {
            format!("{place}.PE")
        } else {
            format!("{}.PE", home.id)
        };
        Some(Conductors::of(place, lines_of(row.phase), Some(earth)))
    };
    if let Some((board, circuit)) = site.circuit_index(place) {
        return of_circuit(board, circuit);
    }
    let (head, tail) = place.split_once('.')?;
    if let Some((board, rcd)) = site.rcd_index(tail)
        && site.boards.get(board).is_some_and(|b| b.id == head)
    {
        return Some(Conductors::of(
            place,
            lines_of(site.rcd_phase(board, rcd)),
            Some(format!("{head}.PE")),
        ));
    }
    if let Some(board) = site.board_index(head) {
        let earth = match tail {
            "feed" if site.feed_has_pe(board) => Some(format!("{place}.PE")),
            "feed" => feeding_board(site, board)
                .and_then(|b| site.boards.get(b))
                .map(|b| format!("{}.PE", b.id)),
            "in" => Some(format!("{head}.PE")),
            _ => return None,
        };
        return Some(Conductors::of(
            place,
            lines_of(site.board_phase(board)),
            earth,
        ));
    }
    let at = site.point_ref(place)?;
    of_circuit(at.board, at.circuit)
}

/// Index of the board that feeds a board; nothing for the service.
pub fn feeding_board(site: &Site, board: usize) -> Option<usize> {
    match site.boards.get(board)?.feed {
        Feed::Service => None,
        Feed::Submain { board, .. } => Some(board),
    }
}

/// Sets of devices above a board's bars, each alone enough to take its lines off: all mains together,
/// then upstream devices one by one.
fn cuts_of_board(site: &Site, board: usize, depth: usize) -> Vec<Vec<String>> {
    let Some(home) = site.boards.get(board) else {
        return Vec::new();
    };
    let mut cuts = Vec::new();
    if !home.mains.is_empty() {
        cuts.push(home.mains.iter().map(|m| m.id.clone()).collect());
    }
    cuts.extend(cuts_of_feed(site, board, depth));
    cuts
}

/// Sets of devices ahead of a board's main switches, each alone enough.
fn cuts_of_feed(site: &Site, board: usize, depth: usize) -> Vec<Vec<String>> {
    let Some(home) = site.boards.get(board) else {
        return Vec::new();
    };
    match &home.feed {
        Feed::Service => vec![vec!["service.fuse".to_owned()]],
        // A chain longer than the number of boards would be a loop, which checking the site refuses.
        Feed::Submain { .. } if depth > site.boards.len() => Vec::new(),
        Feed::Submain {
            board: above, rcd, ..
        } => {
            let mut cuts = vec![vec![format!("{}.breaker", home.id)]];
            cuts.extend(rcd_chain(site, rcd.as_deref()));
            cuts.extend(cuts_of_board(site, *above, depth + 1));
            cuts
        }
    }
}

/// An RCD and those upstream of it, each a cut.
fn rcd_chain(site: &Site, first: Option<&str>) -> Vec<Vec<String>> {
    let mut cuts: Vec<Vec<String>> = Vec::new();
    let mut next = first;
    while let Some(rcd) = next.and_then(|id| site.rcd(id)) {
        if cuts.iter().any(|cut| cut.contains(&rcd.id)) {
            break;
        }
        cuts.push(vec![rcd.id.clone()]);
        next = rcd.after.as_deref();
    }
    cuts
}

/// Sets of devices, each alone enough to take the lines off a place; empty for a place without lines.
pub fn cuts(site: &Site, place: &str) -> Vec<Vec<String>> {
    if place == "service" {
        return vec![vec!["service.fuse".to_owned()]];
    }
    if let Some(board) = site.board_index(place) {
        return cuts_of_board(site, board, 0);
    }
    let circuit = site
        .circuit_index(place)
        .or_else(|| site.point_ref(place).map(|at| (at.board, at.circuit)));
    if let Some((board, circuit)) = circuit {
        let Some(row) = site.boards.get(board).and_then(|b| b.circuits.get(circuit)) else {
            return Vec::new();
        };
        let mut sets = vec![vec![format!("{}.breaker", row.id)]];
        sets.extend(rcd_chain(site, row.rcd.as_deref()));
        if let Some(main) = &row.main {
            sets.push(vec![main.clone()]);
        }
        sets.extend(cuts_of_feed(site, board, 0));
        return sets;
    }
    let Some((head, tail)) = place.split_once('.') else {
        return Vec::new();
    };
    if let Some((board, _)) = site.rcd_index(tail)
        && site.boards.get(board).is_some_and(|b| b.id == head)
    {
        let mut sets = rcd_chain(site, Some(tail));
        sets.extend(cuts_of_board(site, board, 0));
        return sets;
    }
    match (site.board_index(head), tail) {
        (Some(board), "feed" | "in") => cuts_of_feed(site, board, 0),
        _ => Vec::new(),
    }
}

/// Whether the lines of a place are switched off in a setup (sources apart).
pub fn is_off(site: &Site, place: &str, setup: &Setup) -> bool {
    cuts(site, place)
        .iter()
        .any(|cut| cut.iter().all(|device| setup.open.contains(device)))
}

/// Whether a source cannot feed in this setup: off, or parted by an open device of its own.
pub fn source_is_off(site: &Site, index: usize, setup: &Setup) -> bool {
    let Some(source) = site.sources.get(index) else {
        return true;
    };
    if setup.sources.get(&source.id) == Some(&SourceMode::Off) {
        return true;
    }
    match &source.at {
        SourcePlace::Board(_) => false,
        SourcePlace::Point(at) => site
            .boards
            .get(at.board)
            .and_then(|b| b.circuits.get(at.circuit))
            .is_some_and(|c| setup.open.contains(&format!("{}.breaker", c.id))),
    }
}

/// Every main switch of a board, or what feeds it where it has none.
pub fn mains_of(site: &Site, board: usize) -> Vec<String> {
    cuts_of_board(site, board, 0)
        .into_iter()
        .next()
        .unwrap_or_default()
}

/// The board where a liftable end is landed: of `c1.N@board` that of `c1`, of `shed.N@board` the one that feeds `shed`.
pub fn board_of_end(site: &Site, end: &str) -> Option<usize> {
    let head = end.split('.').next().unwrap_or(end);
    if let Some((board, _)) = site.circuit_index(head) {
        return Some(board);
    }
    if let Some(board) = site.board_index(head) {
        return if end.ends_with("@board") {
            feeding_board(site, board)
        } else {
            Some(board)
        };
    }
    site.bond_index(head).map(|_| site.main_board)
}

/// The place whose conductors a lifted end belongs to.
pub fn place_of_end(site: &Site, end: &str) -> String {
    if let Some(cut) = end.strip_suffix(".split") {
        return cut.to_owned();
    }
    let head = end.split('.').next().unwrap_or(end);
    match (end.ends_with("@board"), site.board_index(head)) {
        (true, Some(_)) => format!("{head}.feed"),
        _ if site.bond_index(head).is_some() => site
            .boards
            .get(site.main_board)
            .map_or_else(|| head.to_owned(), |b| b.id.clone()),
        _ => head.to_owned(),
    }
}

/// Whether lifting an end parts a neutral from something (a link and a cut cable do too).
pub fn parts_neutral(end: &str) -> bool {
    end.ends_with(".N@board")
        || end.ends_with(".main-neutral")
        || end.ends_with(".link")
        || end.ends_with(".split")
}

/// The neutral bar on which a place's neutral lands: its RCD's, or its board's.
pub fn neutral_bar(site: &Site, place: &str) -> Option<String> {
    let head = place.split('.').next().unwrap_or(place);
    let (board, rcd) = if let Some((board, circuit)) = site.circuit_index(head) {
        (
            board,
            site.boards.get(board)?.circuits.get(circuit)?.rcd.clone(),
        )
    } else {
        match &site.boards.get(site.board_index(head)?)?.feed {
            Feed::Submain { board, rcd, .. } => (*board, rcd.clone()),
            Feed::Service => return Some("service.N".to_owned()),
        }
    };
    let id = &site.boards.get(board)?.id;
    Some(rcd.map_or_else(|| format!("{id}.N"), |rcd| format!("{id}.{rcd}.N")))
}

/// Terminals that a hookup touches or looks at closely.
pub fn terminals_of(site: &Site, hookup: &Hookup) -> Vec<String> {
    let rcd_load = |rcd: &str, at: &Option<String>| {
        at.clone().or_else(|| {
            let (board, _) = site.rcd_index(rcd)?;
            site.boards.get(board).map(|b| format!("{}.{rcd}", b.id))
        })
    };
    match hookup {
        Hookup::Volts { between, .. }
        | Hookup::Continuity { between }
        | Hookup::Loop { between, .. } => between.to_vec(),
        Hookup::Amps { around } => around.clone(),
        Hookup::Insulation { between, .. } => between.iter().flatten().cloned().collect(),
        Hookup::TripTime { rcd, at, .. } | Hookup::Ramp { rcd, at } => {
            rcd_load(rcd, at).into_iter().collect()
        }
        Hookup::Holds { device } => vec![device.clone()],
        Hookup::Lamp { at } | Hookup::Seen { at, .. } => vec![at.clone()],
    }
}
