//! Which board feeds which: order without loops, and the phases that reach each.

use std::collections::{BTreeMap, BTreeSet};

use super::error::SiteError;
use super::form::{BoardForm, FeedForm, PhaseForm, SubmainForm};
use crate::site::model::Phase;

/// How one board of the file is fed.
#[derive(Clone, Copy, Debug)]
pub enum Fed<'a> {
    /// By the service.
    Service,
    /// By another board: its index in the file, and the form.
    Board(usize, &'a SubmainForm),
}

/// Feeds of all boards, and an order in which a board comes after the one that feeds it.
#[derive(Debug)]
pub struct Feeds<'a> {
    /// By index in the file.
    pub fed: Vec<Fed<'a>>,
    /// Indices in the file.
    pub order: Vec<usize>,
}

/// The line of a one-phase part.
pub fn phase_of(form: PhaseForm) -> Phase {
    match form {
        PhaseForm::L1 => Phase::One(1),
        PhaseForm::L2 => Phase::One(2),
        PhaseForm::L3 => Phase::One(3),
        PhaseForm::L1L2L3 => Phase::Three,
    }
}

/// How a person writes a phase.
pub fn phase_word(phase: Phase) -> String {
    match phase {
        Phase::One(line) => format!("L{line}"),
        Phase::Three => "L1L2L3".into(),
    }
}

/// Resolves `fed_from` of every board.
pub fn resolve(boards: &[BoardForm]) -> Result<Feeds<'_>, SiteError> {
    if boards.is_empty() {
        return Err(SiteError::new(
            "boards",
            "there are no boards",
            "add at least one board with its circuits",
        ));
    }
    let by_id: BTreeMap<&str, usize> = boards
        .iter()
        .enumerate()
        .map(|(i, b)| (b.id.as_str(), i))
        .collect();
    let mut fed = Vec::with_capacity(boards.len());
    let mut service: Option<usize> = None;
    for (i, board) in boards.iter().enumerate() {
        let path = format!("boards[{i}].fed_from");
        let feed = match &board.fed_from {
            None if boards.len() == 1 => Fed::Service,
            None => {
                return Err(SiteError::new(
                    path,
                    format!("board `{}` does not say what feeds it", board.id),
                    "`\"fed_from\": \"service\"` for the main board, or `{\"board\": …}` for a submain",
                ));
            }
            Some(FeedForm::Word(word)) if word == "service" => Fed::Service,
            Some(FeedForm::Word(word)) => {
                let hint = if by_id.contains_key(word.as_str()) {
                    format!(
                        "for a submain write {{\"board\": \"{word}\", \"metres\": …, \"cable\": {{…}}}}"
                    )
                } else {
                    "`\"service\"`, or `{\"board\": …}` for a submain".into()
                };
                return Err(SiteError::new(
                    path,
                    format!("a board is not fed from `{word}`"),
                    hint,
                ));
            }
            Some(FeedForm::Submain(form)) => match by_id.get(form.board.as_str()) {
                Some(&from) => Fed::Board(from, form),
                None => {
                    let others = boards
                        .iter()
                        .filter(|b| b.id != board.id)
                        .map(|b| b.id.as_str());
                    return Err(SiteError::unknown(
                        format!("{path}.board"),
                        "board",
                        &form.board,
                        others,
                    ));
                }
            },
        };
        if let Fed::Service = feed {
            if let Some(first) = service {
                return Err(SiteError::new(
                    path,
                    format!(
                        "boards `{}` and `{}` are both fed from the service",
                        boards[first].id, board.id
                    ),
                    "one board takes the service; enter the other as fed from it",
                ));
            }
            service = Some(i);
        }
        fed.push(feed);
    }
    let order = order(boards, &fed)?;
    Ok(Feeds { fed, order })
}

fn order(boards: &[BoardForm], fed: &[Fed<'_>]) -> Result<Vec<usize>, SiteError> {
    let mut done = BTreeSet::new();
    let mut order = Vec::with_capacity(fed.len());
    loop {
        let before = order.len();
        for (i, feed) in fed.iter().enumerate() {
            let ready = match feed {
                Fed::Service => true,
                Fed::Board(from, _) => done.contains(from),
            };
            if ready && done.insert(i) {
                order.push(i);
            }
        }
        if order.len() == fed.len() {
            return Ok(order);
        }
        if order.len() == before {
            return Err(feed_loop(boards, fed, &done));
        }
    }
}

fn feed_loop(boards: &[BoardForm], fed: &[Fed<'_>], done: &BTreeSet<usize>) -> SiteError {
    // Following feeds from a board that never became ready must run into a loop.
    let mut at = (0..fed.len()).find(|i| !done.contains(i)).unwrap_or(0);
    let mut seen: Vec<usize> = Vec::new();
    while !seen.contains(&at) {
        seen.push(at);
        if let Fed::Board(from, _) = fed[at] {
            at = from;
        }
    }
    let start = seen.iter().position(|s| *s == at).unwrap_or(0);
    let mut names: Vec<&str> = seen[start..]
        .iter()
        .map(|i| boards[*i].id.as_str())
        .collect();
    names.push(boards[at].id.as_str());
    SiteError::new(
        format!("boards[{at}].fed_from"),
        format!("boards feed each other in a loop: {}", names.join(" from ")),
        "one board must be fed from the service, and every submain must lead back to it",
    )
}

/// What a board of a three-phase supply needs, from what hangs on it: its own circuits and the boards it feeds.
///
/// Three where a main switch has 3 or 4 poles or two lines are named; else the one line that is named, or L1.
pub fn wanted(boards: &[BoardForm], feeds: &Feeds<'_>, index: usize) -> Phase {
    let mut lines = BTreeSet::new();
    let mut three = false;
    // Fed boards come later in the order, so one pass from `index` on gathers its whole subtree.
    let mut inside = BTreeSet::from([index]);
    for &i in &feeds.order {
        if let Fed::Board(from, form) = feeds.fed[i]
            && i != index
            && inside.contains(&from)
        {
            inside.insert(i);
            match form.phase {
                Some(PhaseForm::L1L2L3) => three = true,
                Some(phase) => {
                    lines.insert(phase);
                }
                None => {}
            }
        }
        if !inside.contains(&i) {
            continue;
        }
        let board = &boards[i];
        let mains = board
            .main_switch
            .iter()
            .chain(board.main_switches.iter().flatten());
        three |= mains.filter_map(|m| m.poles).any(|p| p >= 3);
        three |= board
            .rcds
            .iter()
            .flatten()
            .filter_map(|r| r.poles)
            .any(|p| p == 4);
        for phase in board.circuits.iter().filter_map(|c| c.phase) {
            if phase == PhaseForm::L1L2L3 {
                three = true;
            } else {
                lines.insert(phase);
            }
        }
    }
    match lines.first() {
        _ if three || lines.len() > 1 => Phase::Three,
        Some(&line) => phase_of(line),
        None => Phase::One(1),
    }
}
