//! Whether a check can be done with the instruments at hand and the leave given.

use std::collections::BTreeSet;

use super::check::Check;
use crate::knowledge::{KitRow, Knowledge};
use crate::site::Site;

/// The kit with what its instruments bring with them (a multimeter: a stake and a low-z tester).
pub fn whole_kit(knowledge: &Knowledge, kit: &BTreeSet<String>) -> BTreeSet<String> {
    let brought = |row: &&KitRow| kit.contains(&row.kind);
    let more = knowledge
        .kit
        .iter()
        .filter(brought)
        .flat_map(|row| row.brings.iter().cloned());
    kit.iter().cloned().chain(more).collect()
}

/// Whether a check can be done.
///
/// # Errors
/// Why not, in words: the instrument that is missing, or the leave to make the service dead.
pub fn availability(
    knowledge: &Knowledge,
    check: &Check,
    kit: &BTreeSet<String>,
    site: &Site,
) -> Result<(), String> {
    if !site.may_isolate_supply
        && check
            .setup
            .open
            .iter()
            .any(|device| device == "service.fuse")
    {
        return Err("it needs the service made dead at service.fuse, which is the network operator's to open here \
                    (may_isolate_supply is false)"
            .to_owned());
    }
    let kit = whole_kit(knowledge, kit);
    for need in &check.kit {
        if !need.split('|').any(|word| kit.contains(word.trim())) {
            let called = |word: &str| {
                let row = knowledge.kit.iter().find(|row| row.kind == word);
                row.map_or_else(|| word.to_owned(), |row| row.name.clone())
            };
            let names: Vec<String> = need.split('|').map(|word| called(word.trim())).collect();
            return Err(format!(
                "it needs {}, which is not in the kit",
                names.join(" or ")
            ));
        }
    }
    Ok(())
}
