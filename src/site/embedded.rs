//! The invented sites inside the binary: a house, a TT farm with a pump shed, a three-phase shop.

use include_dir::{Dir, include_dir};

static SITES: Dir<'_> = include_dir!("$CARGO_MANIFEST_DIR/knowledge/sites");

/// The site file of a name (`house`, `farm`, `shop`); `None`: there is no such site.
pub fn embedded(name: &str) -> Option<&'static str> {
    SITES.get_file(format!("{name}.json"))?.contents_utf8()
}

/// The names of the embedded sites, in order.
pub fn embedded_names() -> Vec<&'static str> {
    let mut names: Vec<&str> = SITES
        .files()
        .filter_map(|f| f.path().file_name()?.to_str()?.strip_suffix(".json"))
        .collect();
    names.sort_unstable();
    names
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::site::{Feed, Known, Site, System, load_str};

    fn load(name: &str) -> Site {
        let (site, warnings) =
            load_str(embedded(name).expect(name), &Known::contract()).expect(name);
        assert!(warnings.is_empty(), "{name}: {warnings:?}");
        site
    }

    #[test]
    fn the_house_the_farm_and_the_shop_load_without_a_warning() {
        assert_eq!(embedded_names(), ["farm", "house", "shop"]);
        let house = load("house");
        assert_eq!(
            (house.boards[0].circuits.len(), house.points().count()),
            (10, 25)
        );
        let farm = load("farm");
        assert_eq!(farm.supply.system, System::Tt);
        assert!(
            farm.boards
                .iter()
                .any(|b| matches!(b.feed, Feed::Submain { .. }))
        );
        assert_eq!(
            farm.rcd("rcd1").and_then(|r| r.after.as_deref()),
            Some("rcd0")
        );
        let shop = load("shop");
        let circuits: usize = shop.boards.iter().map(|b| b.circuits.len()).sum();
        assert_eq!(
            (shop.boards.len(), circuits, shop.points().count()),
            (4, 120, 400)
        );
    }

    #[test]
    fn no_other_name_gives_a_file() {
        for name in ["", "../sites/house", "castle", "/etc/hosts"] {
            assert_eq!(embedded(name), None);
        }
    }
}
