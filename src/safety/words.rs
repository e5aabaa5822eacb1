//! The few words of the trade that hold points and refusals speak, by the site's word set.

use crate::site::{Site, WordSet};

/// Words of one site.
#[derive(Clone, Copy, Debug)]
pub struct Words {
    /// `active` / `line`.
    pub line: &'static str,
    /// `earth` / `PE`.
    pub earth: &'static str,
    /// `main earth` / `main earthing conductor`.
    pub main_earth: &'static str,
    /// Letters of line and earth in a pair of terminals.
    pub letters: (&'static str, &'static str),
}

/// The words of a site.
pub fn words(site: &Site) -> Words {
    match site.words {
        WordSet::AuNz => Words {
            line: "active",
            earth: "earth",
            main_earth: "main earth",
            letters: ("A", "E"),
        },
        WordSet::Iec => Words {
            line: "line",
            earth: "PE",
            main_earth: "main earthing conductor",
            letters: ("L", "PE"),
        },
    }
}

/// Items as a person lists them: `a, b and c`.
pub fn list(items: &[String]) -> String {
    match items {
        [] => "nothing".to_owned(),
        [one] => one.clone(),
        [first @ .., last] => format!("{} and {last}", first.join(", ")),
    }
}

/// A conductor's letter as the site's person says it: `A`, `A1`, `N`, `E`.
pub fn letter(site: &Site, conductor: &str) -> String {
    let (line, earth) = words(site).letters;
    match conductor {
        "PE" => earth.to_owned(),
        other => other.replacen('L', line, 1),
    }
}

/// What a person calls a terminal: `the copper water pipe`, `the frame of kettle`, `E of main switchboard`.
pub fn terminal_name(site: &Site, terminal: &str) -> String {
    let Some((place, conductor)) = terminal.rsplit_once('.') else {
        return match terminal {
            "soil" => "a stake in open ground".to_owned(),
            "electrode" => "the top of the earth electrode".to_owned(),
            other => other.to_owned(),
        };
    };
    if conductor == "pipe"
        && let Some(bond) = site.bond_index(place).and_then(|b| site.bonds.get(b))
    {
        return format!("the {} (taps)", bond.name);
    }
    if conductor == "frame"
        && let Some(item) = site
            .equipment_index(place)
            .and_then(|e| site.equipment.get(e))
    {
        return format!("the frame of the {}", item.name);
    }
    if let Some(board) = site.board_index(place).and_then(|b| site.boards.get(b)) {
        return match conductor {
            "PE" => format!("the earth bar of the {}", board.name),
            "N" => format!("the neutral bar of the {}", board.name),
            "electrode" => format!("the top of the electrode of the {}", board.name),
            _ => format!("{} of the {}", letter(site, conductor), board.name),
        };
    }
    format!("{} at {place}", letter(site, conductor))
}
