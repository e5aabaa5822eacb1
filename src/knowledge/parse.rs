//! Text of knowledge files → records that know their lines; every record's own mistake is reported.

use serde::Deserialize;
use toml::Spanned;
use toml::de::{DeTable, DeValue};

use super::issue::Issue;
use super::records::*;
use super::source::{File, Files};

/// A record with the place it was read from.
#[derive(Clone, Debug)]
pub struct Located<'a, T> {
    /// The record.
    pub record: T,
    /// File as messages name it.
    pub file: &'a str,
    /// Text of that file.
    text: &'a str,
    /// Its table.
    tree: Spanned<DeValue<'a>>,
}

impl<T> Located<'_, T> {
    /// Line of the deepest part of a dotted path (`repair.confirm`, `confused_with.1`) that is in the file.
    pub fn line(&self, path: &str) -> usize {
        let mut span = self.tree.span();
        let mut node = self.tree.as_ref();
        for part in path.split('.').filter(|p| !p.is_empty()) {
            let next = match part.parse::<usize>() {
                Ok(index) => node.get(index),
                Err(_) => node.get(part),
            };
            let Some(next) = next else { break };
            span = next.span();
            node = next.as_ref();
        }
        line_of(self.text, span.start)
    }

    /// An issue at a dotted path.
    pub fn issue(&self, path: &str, what: impl Into<String>, cure: impl Into<String>) -> Issue {
        Issue {
            file: self.file.to_owned(),
            line: self.line(path),
            what: what.into(),
            cure: cure.into(),
        }
    }
}

/// Every record of every file.
#[derive(Debug, Default)]
pub struct Parsed<'a> {
    /// Fault kinds.
    pub faults: Vec<Located<'a, FaultKind>>,
    /// Checks.
    pub checks: Vec<Located<'a, CheckForm>>,
    /// Equipment.
    pub equipment: Vec<Located<'a, EquipmentRow>>,
    /// Parameters.
    pub parameters: Vec<Located<'a, ParameterRow>>,
    /// Instrument errors.
    pub errors: Vec<Located<'a, ErrorRow>>,
    /// Complaints.
    pub symptoms: Vec<Located<'a, SymptomRow>>,
    /// Warnings.
    pub warnings: Vec<Located<'a, WarningRow>>,
    /// Rule sets.
    pub rules: Vec<Located<'a, RuleRow>>,
    /// Limits.
    pub limits: Vec<Located<'a, LimitRow>>,
    /// Instruments.
    pub kit: Vec<Located<'a, KitRow>>,
    /// Cables.
    pub cables: Vec<Located<'a, CableRow>>,
    /// Metals.
    pub metals: Vec<Located<'a, MetalRow>>,
    /// Body impedance.
    pub bodies: Vec<Located<'a, BodyRow>>,
    /// Minutes.
    pub effort: Vec<Located<'a, Effort>>,
    /// Safety numbers.
    pub safety: Vec<Located<'a, SafetyRow>>,
    /// Costs.
    pub costs: Vec<Located<'a, CostRow>>,
    /// Shares beside the kinds.
    pub beside: Vec<Located<'a, Beside>>,
}

/// Keys that a file may hold: the first group as `[[key]]`, many; the second as `[key]`, one in all files.
const TABLES: &[&str] = &[
    "fault",
    "check",
    "equipment",
    "parameter",
    "error",
    "symptom",
    "warning",
    "rules",
    "limit",
    "kit",
    "cable",
    "metal",
    "body",
    "effort",
    "safety",
    "costs",
    "beside",
];

/// Reads all files; what is faulty is left out and reported.
pub fn parse(files: &Files) -> (Parsed<'_>, Vec<Issue>) {
    let mut parsed = Parsed::default();
    let mut issues = Vec::new();
    let (added, built_in): (Vec<&File>, Vec<&File>) = files.values().partition(|file| file.added);
    // Of two rows with one name the added one is to blame.
    for file in built_in.into_iter().chain(added) {
        match std::str::from_utf8(&file.bytes) {
            Ok(text) => parse_file(&file.shown, text, &mut parsed, &mut issues),
            Err(e) => {
                let good = &file.bytes[..e.valid_up_to()];
                issues.push(Issue {
                    file: file.shown.clone(),
                    line: good.iter().filter(|b| **b == b'\n').count() + 1,
                    what: "not UTF-8 text".into(),
                    cure: "save it as UTF-8".into(),
                });
            }
        }
    }
    (parsed, issues)
}

fn parse_file<'a>(shown: &'a str, text: &'a str, into: &mut Parsed<'a>, issues: &mut Vec<Issue>) {
    let (root, errors) = DeTable::parse_recoverable(text);
    if !errors.is_empty() {
        for error in errors {
            issues.push(Issue {
                file: shown.to_owned(),
                line: line_of(text, error.span().map_or(0, |s| s.start)),
                what: format!("not TOML: {}", error.message().replace('\n', ", ")),
                cure: "correct this line".into(),
            });
        }
        return;
    }
    for (key, value) in root.into_inner() {
        let mut reader = Reader {
            shown,
            text,
            issues,
        };
        match key.get_ref().as_ref() {
            "fault" => reader.rows(value, &mut into.faults),
            "check" => reader.rows(value, &mut into.checks),
            "equipment" => reader.rows(value, &mut into.equipment),
            "parameter" => reader.rows(value, &mut into.parameters),
            "error" => reader.rows(value, &mut into.errors),
            "symptom" => reader.rows(value, &mut into.symptoms),
            "warning" => reader.rows(value, &mut into.warnings),
            "rules" => reader.rows(value, &mut into.rules),
            "limit" => reader.rows(value, &mut into.limits),
            "kit" => reader.rows(value, &mut into.kit),
            "cable" => reader.rows(value, &mut into.cables),
            "metal" => reader.rows(value, &mut into.metals),
            "body" => reader.rows(value, &mut into.bodies),
            "effort" => reader.row(value, &mut into.effort),
            "safety" => reader.row(value, &mut into.safety),
            "costs" => reader.row(value, &mut into.costs),
            "beside" => reader.row(value, &mut into.beside),
            other => issues.push(Issue {
                file: shown.to_owned(),
                line: line_of(text, key.span().start),
                what: format!("unknown table `{other}`"),
                cure: format!("write {}", nearest(other, TABLES.iter().copied())),
            }),
        }
    }
}

struct Reader<'a, 'i> {
    shown: &'a str,
    text: &'a str,
    issues: &'i mut Vec<Issue>,
}

impl<'a> Reader<'a, '_> {
    fn rows<T: Deserialize<'a>>(
        &mut self,
        value: Spanned<DeValue<'a>>,
        into: &mut Vec<Located<'a, T>>,
    ) {
        let start = value.span().start;
        match value.into_inner() {
            DeValue::Array(rows) => {
                for row in rows {
                    self.row(row, into);
                }
            }
            _ => self.issues.push(Issue {
                file: self.shown.to_owned(),
                line: line_of(self.text, start),
                what: "one table where a list of tables belongs".into(),
                cure: "write its name in double brackets, [[name]]".into(),
            }),
        }
    }

    fn row<T: Deserialize<'a>>(
        &mut self,
        value: Spanned<DeValue<'a>>,
        into: &mut Vec<Located<'a, T>>,
    ) {
        match T::deserialize(toml::de::ValueDeserializer::from(value.clone())) {
            Ok(record) => into.push(Located {
                record,
                file: self.shown,
                text: self.text,
                tree: value,
            }),
            Err(error) => {
                let start = error.span().map_or(value.span().start, |s| s.start);
                self.issues.push(Issue {
                    file: self.shown.to_owned(),
                    line: line_of(self.text, start),
                    what: error.message().replace('\n', ", "),
                    cure: "see knowledge/README.md for the keys of a row".into(),
                });
            }
        }
    }
}

fn line_of(text: &str, offset: usize) -> usize {
    let end = offset.min(text.len());
    text.as_bytes()[..end]
        .iter()
        .filter(|b| **b == b'\n')
        .count()
        + 1
}

/// The nearest of some words in quotes, or all of them if none is near.
pub fn nearest<'w>(word: &str, words: impl Iterator<Item = &'w str>) -> String {
    let words: Vec<&str> = words.collect();
    let mut near: Vec<(usize, &str)> = words
        .iter()
        .map(|w| (strsim::damerau_levenshtein(word, w), *w))
        .collect();
    near.sort();
    match near.first() {
        Some((distance, best)) if *distance <= 1 + best.len() / 3 => format!("`{best}`"),
        Some(_) if words.len() <= 12 => format!("one of {}", words.join(", ")),
        Some((_, best)) => format!("another word (nearest: `{best}`)"),
        None => "another word".into(),
    }
}
