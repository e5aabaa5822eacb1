//! Conditions on a place: the words of `only` in knowledge.

use super::model::{Board, Class, Feed, PointKind, Site, System};
use super::place::Place;
use super::spot::Spot;
use crate::knowledge::EquipmentRow;

/// Whether a place meets a condition of [`crate::knowledge::words::ONLY`]; `None`: no such word.
///
/// `other-bar` and `nearest-point` are about the far end of a fault and hold for every place alone.
pub fn holds(word: &str, place: &Place, site: &Site, equipment: &[EquipmentRow]) -> Option<bool> {
    let home = site.boards.get(place.board(site));
    let board = |test: fn(&Board) -> bool| home.is_some_and(test);
    let device = match place.spot {
        Spot::Equipment(e) => site.equipment.get(e),
        _ => None,
    };
    let rcd = || place.rcd(site).and_then(|(_, id)| site.rcd(id));
    let system = site.supply.system;
    Some(match word {
        "TN-C-S" => system == System::TnCS,
        "TN-S" => system == System::TnS,
        "TT" => system == System::Tt,
        "TN" => system != System::Tt,
        "has-link" => board(|b| b.earthing.as_ref().is_some_and(|e| e.link)),
        "no-link" => board(|b| !b.earthing.as_ref().is_some_and(|e| e.link)),
        "has-electrode" => board(|b| b.earthing.as_ref().is_some_and(|e| e.main_earth.is_some())),
        "main-board" => place.spot == Spot::Board(site.main_board),
        // These three are about boards among other places, which they let pass.
        "unlinked" | "fed" | "fed-earth" if !matches!(place.spot, Spot::Board(_)) => true,
        "unlinked" => board(|b| !b.earthing.as_ref().is_some_and(|e| e.link)),
        "fed" => board(|b| matches!(b.feed, Feed::Submain { .. })),
        "fed-earth" => board(|b| match &b.feed {
            Feed::Submain { cable, .. } => cable.pe_mm2.is_some(),
            Feed::Service => false,
        }),
        "submain" => board(|b| matches!(b.feed, Feed::Submain { .. })),
        "has-pe" => board(|b| match &b.feed {
            Feed::Submain { cable, .. } => cable.pe_mm2.is_some(),
            Feed::Service => true,
        }),
        "mains-open-neutral" => {
            board(|b| !b.mains.is_empty() && b.mains.iter().all(|m| m.switches_neutral()))
        }
        "solid-neutral" => {
            board(|b| b.mains.is_empty() || !b.mains.iter().all(|m| m.switches_neutral()))
        }
        "switched-rcd" => rcd().is_some_and(|r| r.poles != 1),
        "delayed" => rcd().is_some_and(|r| r.delayed),
        "not-delayed" => rcd().is_some_and(|r| !r.delayed),
        "on-rcd" => place.rcd(site).is_some(),
        "other-bar" | "nearest-point" => true,
        "light-or-switch" => match place.spot {
            Spot::Point(p) => matches!(
                site.point(p).kind,
                PointKind::Light | PointKind::Switch | PointKind::Junction
            ),
            _ => false,
        },
        "class-I" => device.is_some_and(|e| e.class == Class::I),
        "class-II" => device.is_some_and(|e| e.class == Class::II),
        "element" => device.is_some_and(|e| {
            equipment
                .iter()
                .any(|row| row.kind == e.kind && row.element)
        }),
        "plug" => device.is_some_and(|e| e.plug),
        "fixed" => device.is_some_and(|e| !e.plug),
        "three-phase" => site.supply.phases == 3,
        "single-phase" => site.supply.phases != 3,
        "backup" => match place.spot {
            Spot::Source(s) => site.sources.get(s).is_some_and(|s| s.backup),
            _ => false,
        },
        _ => return None,
    })
}
