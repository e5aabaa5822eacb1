//! Holds what every file of the crate promised: the order of the layers and the habits of the house.

use std::collections::BTreeSet;
use std::fs;
use std::path::Path;

use crate::source::{Source, files, root, sources};

/// Layers by rank; a layer names only those of a lower rank, so siblings do not know each other.
const RANKS: [&[&str]; 11] = [
    &["quantity", "numeric"],
    &["knowledge"],
    &["site"],
    &["network"],
    &["faults", "checks"],
    &["safety", "belief"],
    &["plan"],
    &["session"],
    &["trial"],
    &["faces"],
    &["cli", "failure", "main", "lib"],
];

/// Longest file without a reason given in its head, unit tests not counted.
const LONGEST: usize = 400;

fn rank(layer: &str) -> Option<usize> {
    RANKS.iter().position(|layers| layers.contains(&layer))
}

/// Fails with one line for each breach.
fn hold(rule: &str, breaches: Vec<String>) {
    assert!(breaches.is_empty(), "{rule}\n  {}", breaches.join("\n  "));
}

/// Breaches of `found` in every source file.
fn each(found: impl Fn(&Source) -> Vec<String>) -> Vec<String> {
    sources("src")
        .iter()
        .flat_map(|s| found(s).into_iter().map(|b| format!("{}: {b}", s.path)))
        .collect()
}

/// Where `word` stands in `text` as a whole word.
fn whole_words<'a>(text: &'a str, word: &'a str) -> impl Iterator<Item = usize> + 'a {
    let part_of_word = |c: char| c.is_alphanumeric() || c == '_' || c == '-';
    text.match_indices(word)
        .map(|(at, _)| at)
        .filter(move |&at| {
            !text[..at].ends_with(part_of_word)
                && !text[at + word.len()..].starts_with(part_of_word)
        })
}

/// Names that `code` takes from the crate's root: `crate::x` and `crate::{x, y::z}`.
fn taken(code: &str) -> BTreeSet<String> {
    let mut names = BTreeSet::new();
    for (at, _) in code.match_indices("crate::") {
        let rest = &code[at + "crate::".len()..];
        let first = |path: &str| {
            path.trim()
                .chars()
                .take_while(|c| c.is_alphanumeric() || *c == '_')
                .collect::<String>()
        };
        match rest.strip_prefix('{') {
            None => drop(names.insert(first(rest))),
            Some(group) => {
                let mut depth = 0;
                let end = group.find(|c| {
                    depth += i32::from(c == '{') - i32::from(c == '}');
                    depth < 0
                });
                let mut depth = 0;
                let members = group[..end.unwrap_or(0)].split(|c| {
                    depth += i32::from(c == '{') - i32::from(c == '}');
                    c == ',' && depth == 0
                });
                names.extend(members.map(first).filter(|name| !name.is_empty()));
            }
        }
    }
    names
}

#[test]
fn a_layer_names_only_lower_ones() {
    let breaches = each(|source| {
        let Some(own) = rank(source.layer()) else {
            return vec![format!("`{}` is no known layer", source.layer())];
        };
        taken(&source.code)
            .iter()
            .filter(|name| *name != source.layer() && rank(name).is_none_or(|r| r >= own))
            .map(|name| format!("names crate::{name}"))
            .collect()
    });
    hold("a layer names only layers of a lower rank", breaches);
}

#[test]
fn no_layer_is_left_by_way_of_super() {
    let breaches = each(|source| {
        let escape = "super::".repeat(source.depth());
        if source.depth() > 0 && source.code.contains(&escape) {
            vec![format!("`{escape}` reaches the crate's root")]
        } else {
            Vec::new()
        }
    });
    hold("other layers are named by crate::", breaches);
}

#[test]
fn only_faces_print() {
    let breaches = each(|source| {
        if ["faces", "main"].contains(&source.layer()) {
            return Vec::new();
        }
        ["print!", "println!", "eprint!", "eprintln!", "dbg!"]
            .iter()
            .filter(|name| {
                whole_words(&source.code, name.trim_end_matches('!'))
                    .any(|at| source.code[at..].starts_with(*name))
            })
            .map(|name| format!("uses {name}"))
            .collect()
    });
    hold("only faces and main print", breaches);
}

#[test]
fn order_clock_and_chance_are_in_hand() {
    let breaches = each(|source| {
        let banned = |word: &&str| {
            let free = match *word {
                "rand_core" | "rand_pcg" => source.layer() == "numeric",
                "Timestamp::now" | "Zoned::now" | "SystemTime" | "Instant" => {
                    source.layer() == "session"
                }
                _ => false,
            };
            !free && whole_words(&source.code, word).next().is_some()
        };
        [
            "HashMap",
            "HashSet",
            "rand_core",
            "rand_pcg",
            "Timestamp::now",
            "Zoned::now",
            "SystemTime",
            "Instant",
        ]
        .iter()
        .filter(|word| banned(word))
        .map(|word| format!("uses {word}"))
        .collect()
    });
    hold(
        "maps are ordered; the clock is session's, chance is numeric's",
        breaches,
    );
}

#[test]
fn every_file_says_what_it_is_and_stays_short() {
    let breaches = each(|source| {
        let mut breaches = Vec::new();
        if !source.text.starts_with("//! ") {
            breaches.push("does not open with a //! sentence".to_owned());
        }
        let head = source
            .text
            .lines()
            .take_while(|line| line.starts_with("//!"));
        let reason = head
            .filter(|line| line.starts_with("//! Long because "))
            .count()
            > 0;
        let lines = source.code.lines().count();
        if lines > LONGEST && !reason {
            breaches.push(format!(
                "{lines} lines and no `//! Long because …` in its head"
            ));
        }
        breaches
    });
    hold(
        "a file opens with one sentence and has at most 400 lines",
        breaches,
    );
    let breaches = sources("tests")
        .into_iter()
        .filter(|s| !s.text.starts_with("//! "))
        .map(|s| s.path);
    hold("a test file opens with one sentence", breaches.collect());
}

/// Ids of all fault kinds and checks in knowledge/, but for words that the contract itself gives a meaning.
fn knowledge_ids() -> BTreeSet<String> {
    let contract = [
        "volts",
        "amps",
        "insulation",
        "continuity",
        "loop",
        "ramp",
        "holds",
        "lamp",
        "seen",
        "overload",
    ];
    let mut ids = BTreeSet::new();
    for file in files(&root().join("knowledge"), ".toml") {
        let text = fs::read_to_string(&file).expect("knowledge is readable");
        let table: toml::Table = text
            .parse()
            .unwrap_or_else(|e| panic!("{}: {e}", file.display()));
        for (list, key) in [("fault", "kind"), ("check", "id")] {
            let rows = table
                .get(list)
                .and_then(|rows| rows.as_array())
                .into_iter()
                .flatten();
            ids.extend(
                rows.filter_map(|row| row.get(key)?.as_str())
                    .map(str::to_owned),
            );
        }
    }
    ids.retain(|id| !contract.contains(&id.as_str()));
    ids
}

#[test]
fn no_code_knows_a_fault_or_a_check() {
    let ids = knowledge_ids();
    assert!(!ids.is_empty(), "knowledge/ holds no fault and no check");
    let breaches = each(|source| {
        let names = |literal: &str, id: &str| {
            // A single plain word may mean anything inside a sentence.
            if id.contains('-') {
                whole_words(literal, id).next().is_some()
            } else {
                literal == id
            }
        };
        source
            .literals
            .iter()
            .flat_map(|(line, literal)| {
                ids.iter()
                    .filter(|id| names(literal, id))
                    .map(move |id| format!("line {line} names `{id}`"))
            })
            .collect()
    });
    hold(
        "fault kinds and checks are data: no code names one",
        breaches,
    );
}

/// Files of a folder that its `mod` lines forget.
fn forgotten(folder: &Path, parent: &Path) -> Vec<String> {
    let text = fs::read_to_string(parent).unwrap_or_default();
    let mut breaches = Vec::new();
    let mut entries: Vec<_> = fs::read_dir(folder)
        .expect("a folder")
        .map(|e| e.expect("an entry").path())
        .collect();
    entries.sort();
    for entry in entries {
        let name = entry
            .file_stem()
            .map(|n| n.to_string_lossy().into_owned())
            .unwrap_or_default();
        let module = if entry.is_dir() {
            let inside = [entry.join("mod.rs"), folder.join(format!("{name}.rs"))];
            let Some(parent) = inside.iter().find(|file| file.exists()) else {
                continue;
            };
            breaches.extend(forgotten(&entry, parent));
            true
        } else {
            entry.extension().is_some_and(|e| e == "rs")
        };
        let declared = text
            .lines()
            .any(|line| line.trim_end().ends_with(&format!("mod {name};")));
        if module && !declared && !["mod", "main", "lib"].contains(&name.as_str()) {
            breaches.push(entry.display().to_string());
        }
    }
    breaches
}

#[test]
fn no_file_is_forgotten() {
    let root = root();
    let mut breaches = forgotten(&root.join("tests/suite"), &root.join("tests/suite/main.rs"));
    let crate_roots = ["src/lib.rs", "src/main.rs"]
        .map(|file| fs::read_to_string(root.join(file)).expect("a root"));
    breaches.extend(
        forgotten(&root.join("src"), &root.join("src/lib.rs"))
            .into_iter()
            .filter(|file| {
                let name = Path::new(file)
                    .file_stem()
                    .map(|n| n.to_string_lossy().into_owned())
                    .unwrap_or_default();
                !crate_roots
                    .iter()
                    .any(|text| text.contains(&format!("mod {name};")))
            }),
    );
    hold("every file is a module of its folder", breaches);
}

#[test]
fn groups_of_names_are_read() {
    let code =
        "use crate::{site::{Site, model}, network};\nlet x = crate::plan::y(); use super::z;";
    assert_eq!(
        taken(code),
        ["network", "plan", "site"].map(str::to_owned).into()
    );
}
