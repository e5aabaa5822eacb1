//! The checked whole of knowledge, its digest, and the look-ups that other layers use.

use std::collections::BTreeMap;
use std::path::Path;

use super::diagnose::diagnose;
use super::issue::{Issue, KnowledgeError};
use super::parse::{Located, Parsed, parse};
use super::procedure::Hookup;
use super::records::*;
use super::source;

/// Everything the trade knows, checked as a whole: references resolve, units and ranges hold.
#[derive(Clone, Debug, PartialEq)]
pub struct Knowledge {
    /// Fault kinds, in order of files and lines.
    pub faults: Vec<FaultKind>,
    /// Checks, in order of files and lines.
    pub checks: Vec<CheckForm>,
    /// Equipment kinds.
    pub equipment: Vec<EquipmentRow>,
    /// Parameters of the network; the first row that matches a path counts.
    pub parameters: Vec<ParameterRow>,
    /// Instrument errors, one a quantity.
    pub errors: Vec<ErrorRow>,
    /// Complaints.
    pub symptoms: Vec<SymptomRow>,
    /// Warnings.
    pub warnings: Vec<WarningRow>,
    /// Rule sets.
    pub rules: Vec<RuleRow>,
    /// Limits.
    pub limits: Vec<LimitRow>,
    /// Instruments.
    pub kit: Vec<KitRow>,
    /// Conductor sizes, rising.
    pub cables: Vec<CableRow>,
    /// Metals.
    pub metals: Vec<MetalRow>,
    /// Body-impedance tables.
    pub bodies: Vec<BodyRow>,
    /// Minutes of acts.
    pub effort: Effort,
    /// Safety numbers.
    pub safety: SafetyRow,
    /// Costs.
    pub costs: CostRow,
    /// Shares beside the kinds.
    pub beside: Beside,
    /// SHA-256 of the files, hex.
    pub digest: String,
    fault_rows: BTreeMap<String, usize>,
    check_rows: BTreeMap<String, usize>,
}

impl Knowledge {
    /// The knowledge inside the binary.
    ///
    /// # Errors
    /// Faults of its files; a test holds that there are none.
    pub fn embedded() -> Result<Self, KnowledgeError> {
        Self::load(None)
    }

    /// The knowledge inside the binary, with a folder's files added; a file there with the relative path
    /// of an embedded one replaces it.
    ///
    /// # Errors
    /// A folder that cannot be read, or every fault of the files.
    pub fn load(folder: Option<&Path>) -> Result<Self, KnowledgeError> {
        let files = read(folder)?;
        let (parsed, mut issues) = parse(&files);
        issues.extend(diagnose(&parsed));
        issues.sort();
        let digest = source::digest(&files);
        match assemble(parsed, digest) {
            Some(knowledge) if issues.is_empty() => Ok(knowledge),
            _ => Err(KnowledgeError::Faulty(issues)),
        }
    }

    /// Every fault of the files, in order of file and line; empty: sound (`straypath knowledge check`).
    ///
    /// # Errors
    /// A folder that cannot be read.
    pub fn check_files(folder: Option<&Path>) -> Result<Vec<Issue>, KnowledgeError> {
        match Self::load(folder) {
            Ok(_) => Ok(Vec::new()),
            Err(KnowledgeError::Faulty(issues)) => Ok(issues),
            Err(other) => Err(other),
        }
    }

    /// A fault kind by its word.
    pub fn fault(&self, kind: &str) -> Option<&FaultKind> {
        self.fault_rows
            .get(kind)
            .and_then(|row| self.faults.get(*row))
    }

    /// A check by its word.
    pub fn check(&self, id: &str) -> Option<&CheckForm> {
        self.check_row(id).and_then(|row| self.checks.get(row))
    }

    /// Index of a check in [`Self::checks`].
    pub fn check_row(&self, id: &str) -> Option<usize> {
        self.check_rows.get(id).copied()
    }

    /// A row of equipment by its word.
    pub fn equipment(&self, kind: &str) -> Option<&EquipmentRow> {
        self.equipment.iter().find(|row| row.kind == kind)
    }

    /// A complaint by its word.
    pub fn symptom(&self, kind: &str) -> Option<&SymptomRow> {
        self.symptoms.iter().find(|row| row.kind == kind)
    }

    /// A warning by its code.
    pub fn warning(&self, code: &str) -> Option<&WarningRow> {
        self.warnings.iter().find(|row| row.code == code)
    }

    /// The prior of a parameter by its dotted path; a `*` in a row stands for one id. A row for this supply
    /// system (`TN-C-S`, `TN-S`, `TT`) counts before one for every system.
    pub fn parameter(&self, path: &str, system: &str) -> Option<&ParameterRow> {
        let fits = |row: &&ParameterRow| matches(&row.path, path);
        let own = self
            .parameters
            .iter()
            .filter(fits)
            .find(|row| row.system.as_deref() == Some(system));
        own.or_else(|| {
            self.parameters
                .iter()
                .filter(fits)
                .find(|row| row.system.is_none())
        })
    }

    /// How the instrument errs that reads a quantity, by key (`volts-high-z`, `loop-no-trip`, `amps`, …).
    pub fn error_row(&self, key: &str) -> Option<&ErrorRow> {
        self.errors.iter().find(|row| row.quantity == key)
    }

    /// How the instrument errs in a hookup.
    pub fn error_of(&self, hookup: &Hookup) -> Option<&ErrorRow> {
        self.error_row(hookup.error_key())
    }

    /// A limit by its id.
    pub fn limit(&self, id: &str) -> Option<&LimitRow> {
        self.limits.iter().find(|row| row.id == id)
    }

    /// A rule set by its id.
    pub fn rule(&self, id: &str) -> Option<&RuleRow> {
        self.rules.iter().find(|row| row.id == id)
    }

    /// An instrument by its word.
    pub fn kit(&self, kind: &str) -> Option<&KitRow> {
        self.kit.iter().find(|row| row.kind == kind)
    }
}

fn read(folder: Option<&Path>) -> Result<source::Files, KnowledgeError> {
    let mut files = source::embedded();
    if let Some(root) = folder {
        source::add_folder(root, &mut files)?;
    }
    Ok(files)
}

fn assemble(parsed: Parsed<'_>, digest: String) -> Option<Knowledge> {
    let faults = bare(parsed.faults);
    let checks = bare(parsed.checks);
    let mut cables = bare(parsed.cables);
    cables.sort_by(|a, b| a.mm2.total_cmp(&b.mm2));
    Some(Knowledge {
        fault_rows: faults
            .iter()
            .enumerate()
            .map(|(row, f)| (f.kind.clone(), row))
            .collect(),
        check_rows: checks
            .iter()
            .enumerate()
            .map(|(row, c)| (c.id.clone(), row))
            .collect(),
        faults,
        checks,
        equipment: bare(parsed.equipment),
        parameters: bare(parsed.parameters),
        errors: bare(parsed.errors),
        symptoms: bare(parsed.symptoms),
        warnings: bare(parsed.warnings),
        rules: bare(parsed.rules),
        limits: bare(parsed.limits),
        kit: bare(parsed.kit),
        cables,
        metals: bare(parsed.metals),
        bodies: bare(parsed.bodies),
        effort: parsed.effort.into_iter().next()?.record,
        safety: parsed.safety.into_iter().next()?.record,
        costs: parsed.costs.into_iter().next()?.record,
        beside: parsed.beside.into_iter().next()?.record,
        digest,
    })
}

fn bare<T>(rows: Vec<Located<'_, T>>) -> Vec<T> {
    rows.into_iter().map(|row| row.record).collect()
}

fn matches(pattern: &str, path: &str) -> bool {
    let mut left = pattern.split('.');
    let mut right = path.split('.');
    loop {
        match (left.next(), right.next()) {
            (None, None) => return true,
            (Some("*"), Some(_)) => {}
            (Some(a), Some(b)) if a == b => {}
            _ => return false,
        }
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn embedded_knowledge_is_sound() {
        let issues = Knowledge::check_files(None).unwrap();
        assert!(
            issues.is_empty(),
            "{}",
            issues.iter().map(|i| format!("{i}\n")).collect::<String>()
        );
    }

    #[test]
    fn a_star_stands_for_one_id() {
        assert!(matches("*.watts", "kettle.watts"));
        assert!(!matches("*.watts", "a.b.watts"));
        assert!(!matches("*.watts", "kettle"));
    }
}
