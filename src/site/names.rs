//! What a person calls a place, a terminal, a device or a conductor's end, in the site's words.

use super::model::{Curve, Feed, Site, SourceKind};
use super::spot::Spot;
use super::words::{Words, words};

/// The human name of an id; an id that this site does not have comes back as it is.
///
/// Two ids joined by `+` (a test that spans two places) become two names.
pub fn name_of(site: &Site, id: &str) -> String {
    if id.contains('+') {
        let parts: Vec<String> = id.split('+').map(|part| name_of(site, part)).collect();
        return parts.join(" and ");
    }
    let words = words(site);
    if id == "soil" {
        return "a stake in open ground".into();
    }
    if id == "service.fuse" {
        return "service fuse".into();
    }
    if let Some(place) = Spot::read(site, id) {
        return place_name(site, &words, place);
    }
    let named = match id.strip_suffix("@board") {
        Some(end) => lifted(site, &words, end),
        None => part_name(site, &words, id),
    };
    named.unwrap_or_else(|| id.to_owned())
}

fn place_name(site: &Site, words: &Words, place: Spot) -> String {
    match place {
        Spot::Service => "the incoming supply".into(),
        Spot::Network => "the network in the street".into(),
        Spot::Board(b) => site.boards[b].name.clone(),
        Spot::Main(b, m) => {
            let main = &site.boards[b].mains[m];
            let tariff = main
                .tariff
                .as_ref()
                .map(|t| format!(" ({t})"))
                .unwrap_or_default();
            let of = if b == site.main_board {
                String::new()
            } else {
                format!(" of {}", site.boards[b].name)
            };
            format!("main switch{tariff}{of}")
        }
        Spot::Rcd(b, r) => format!("{} {}", words.rcd, site.boards[b].rcds[r].id),
        Spot::Circuit(b, c) => site.boards[b].circuits[c].name.clone(),
        Spot::Breaker(b, c) => {
            let circuit = &site.boards[b].circuits[c];
            let device = if circuit.breaker.curve == Curve::Fuse {
                "fuse"
            } else {
                "breaker"
            };
            format!("{device} of {}", circuit.name)
        }
        Spot::SubmainBreaker(b) => {
            let fuse = matches!(&site.boards[b].feed, Feed::Submain { breaker, .. } if breaker.curve == Curve::Fuse);
            let device = if fuse { "fuse" } else { "breaker" };
            format!("{device} of the submain to {}", site.boards[b].name)
        }
        Spot::Point(at) => {
            let (point, circuit) = (site.point(at), site.circuit_of(at));
            format!("{} ({})", point.name, circuit.name)
        }
        Spot::Equipment(e) => site.equipment[e].name.clone(),
        Spot::Bond(b) => site.bonds[b].name.clone(),
        Spot::Electrode(b) if b == site.main_board => "earth electrode".into(),
        Spot::Electrode(b) => format!("earth electrode of {}", site.boards[b].name),
        Spot::Source(s) => {
            let source = &site.sources[s];
            let kind = match source.kind {
                SourceKind::PvInverter => "PV inverter",
                SourceKind::Battery => "battery",
                SourceKind::Generator => "generator",
            };
            format!("{kind} {}", source.id)
        }
    }
}

/// A conductor lifted at the board that feeds it: `c1.N`.
fn lifted(site: &Site, words: &Words, end: &str) -> Option<String> {
    let (head, conductor) = end.rsplit_once('.')?;
    let conductor = words.conductor(designation(conductor)?);
    match Spot::read(site, head)? {
        Spot::Circuit(b, c) => Some(format!(
            "{conductor} of {} at its board",
            site.boards[b].circuits[c].name
        )),
        Spot::Board(b) => match &site.boards[b].feed {
            Feed::Submain { board, .. } => Some(format!(
                "{conductor} of the submain to {} at {}",
                site.boards[b].name, site.boards[*board].name
            )),
            Feed::Service => None,
        },
        _ => None,
    }
}

fn designation(text: &str) -> Option<&str> {
    matches!(text, "L" | "L1" | "L2" | "L3" | "N" | "PE").then_some(text)
}

fn part_name(site: &Site, words: &Words, id: &str) -> Option<String> {
    let (head, tail) = id.rsplit_once('.')?;
    if let Some(conductor) = designation(tail) {
        return terminal(site, words, head, conductor);
    }
    Some(match (Spot::read(site, head)?, tail) {
        (Spot::Board(b), "link") => format!("{} of {}", words.link, site.boards[b].name),
        (Spot::Board(b), "main-neutral") => {
            format!(
                "incoming {} at the {} bar of {}",
                words.neutral, words.neutral, site.boards[b].name
            )
        }
        (Spot::Board(b), "main-earth") => {
            format!(
                "{} at the {} bar of {}",
                words.main_earth, words.earth, site.boards[b].name
            )
        }
        (Spot::Bond(b), "bond") => format!("bonding conductor of {}", site.bonds[b].name),
        (Spot::Bond(b), "pipe") => site.bonds[b].name.clone(),
        (Spot::Equipment(e), "frame") => format!("metal of {}", site.equipment[e].name),
        (place @ Spot::Point(_), "split") => {
            format!("cables going on from {}", place_name(site, words, place))
        }
        _ => return None,
    })
}

fn terminal(site: &Site, words: &Words, head: &str, conductor: &str) -> Option<String> {
    let word = words.conductor(conductor);
    if let Some((board, part)) = head.split_once('.')
        && let Some(b) = site.board_index(board)
    {
        let board = &site.boards[b];
        let from = match &board.feed {
            Feed::Submain { board, .. } => Some(&site.boards[*board].name),
            Feed::Service => None,
        };
        return match (part, from) {
            ("feed", Some(from)) => {
                Some(format!("{word} of the submain to {} at {from}", board.name))
            }
            ("in", Some(_)) => Some(format!("incoming {word} of {}", board.name)),
            _ => {
                let rcd = board.rcds.iter().find(|r| r.id == part)?;
                Some(match conductor {
                    "N" => format!("{word} bar of {} {}", words.rcd, rcd.id),
                    _ => format!("{word} after {} {}", words.rcd, rcd.id),
                })
            }
        };
    }
    Some(match Spot::read(site, head)? {
        Spot::Service => format!("incoming {word}"),
        Spot::Board(b) => match conductor {
            "N" | "PE" => format!("{word} bar of {}", site.boards[b].name),
            _ => format!(
                "{word} of {}, load side of the main switch",
                site.boards[b].name
            ),
        },
        Spot::Circuit(b, c) => {
            format!("{word} of {} at its board", site.boards[b].circuits[c].name)
        }
        place @ Spot::Point(_) => format!("{word} at {}", place_name(site, words, place)),
        _ => return None,
    })
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::site::{devices, ends, samples, spots, terminals};

    #[test]
    fn names_in_the_words_of_the_site() {
        let site = samples::small();
        for (id, name) in [
            ("c1.p1", "bench (kitchen sockets)"),
            ("c1.p1.N", "neutral at bench (kitchen sockets)"),
            ("msb.PE", "earth bar of main switchboard"),
            ("msb.rcd1.N", "neutral bar of safety switch (RCD) rcd1"),
            ("msb.link", "neutral-earth link of main switchboard"),
            ("soil", "a stake in open ground"),
            ("c1.N@board", "neutral of kitchen sockets at its board"),
            ("c1.breaker", "breaker of kitchen sockets"),
            ("water.pipe", "copper water pipe"),
            ("kettle.frame", "metal of kettle"),
            (
                "shed.feed.L",
                "active of the submain to pump shed at main switchboard",
            ),
            ("shed.in.N", "incoming neutral of pump shed"),
            ("c1+c2", "kitchen sockets and bedroom sockets"),
            ("nonsense", "nonsense"),
        ] {
            assert_eq!(name_of(&site, id), name);
        }
    }

    #[test]
    fn everything_has_a_name_of_its_own_kind() {
        let site = samples::small();
        let all = terminals(&site)
            .into_iter()
            .chain(devices(&site))
            .chain(ends(&site))
            .chain(spots(&site).into_keys());
        // Ids of one part may well be the name, as with a kettle.
        for id in all.filter(|id| id.contains('.')) {
            assert_ne!(name_of(&site, &id), id, "{id} has no name");
        }
    }

    #[test]
    fn every_place_reads_back() {
        let site = samples::small();
        for (id, place) in spots(&site) {
            assert_eq!(Spot::read(&site, &id), Some(place), "{id}");
        }
    }

    #[test]
    fn the_terminals_of_the_contract() {
        let site = samples::small();
        let all = terminals(&site);
        for id in [
            "service.L",
            "service.N",
            "msb.L",
            "msb.N",
            "msb.PE",
            "msb.rcd1.L",
            "msb.rcd1.N",
            "c1.L",
            "c1.N",
            "c1.PE",
            "c1.p1.L",
            "kettle.frame",
            "water.pipe",
            "electrode",
            "shed.electrode",
            "soil",
            "shed.feed.L",
            "shed.feed.N",
            "shed.in.L",
            "shed.in.N",
        ] {
            assert!(all.contains(id), "{id}");
        }
        assert!(
            !all.contains("service.PE"),
            "no PE comes with a TN-C-S service"
        );
        assert!(!all.contains("shed.feed.PE"), "no PE runs to the shed");
        let ends = ends(&site);
        for id in [
            "msb.link",
            "shed.link",
            "msb.main-neutral",
            "msb.main-earth",
            "shed.main-earth",
            "water.bond",
            "c1.L@board",
            "c1.N@board",
            "c1.PE@board",
            "shed.N@board",
            "c1.p1.split",
        ] {
            assert!(ends.contains(id), "{id}");
        }
        assert!(!ends.contains("shed.PE@board"));
        let devices = devices(&site);
        for id in ["main", "rcd1", "c1.breaker", "shed.breaker", "service.fuse"] {
            assert!(devices.contains(id), "{id}");
        }
    }
}
