//! The files as a whole: every row by itself, references between rows, duplicates, sums.

use std::collections::BTreeMap;

use super::braces::shape;
use super::parse::{Located, Parsed};
use super::procedure::Hookup;
use super::records::SymptomRow;
use super::validate::{Issues, refers, tables};
use super::validate_checks::{check, symptom};
use super::validate_faults::fault;
use super::words::WARNINGS;

/// Every fault of the rows.
pub fn diagnose(parsed: &Parsed<'_>) -> Issues {
    let mut out = Issues::new();
    parsed.faults.iter().for_each(|row| fault(row, &mut out));
    parsed.checks.iter().for_each(|row| check(row, &mut out));
    parsed
        .symptoms
        .iter()
        .for_each(|row| symptom(row, &mut out));
    tables(parsed, &mut out);
    duplicates(parsed, &mut out);
    fault_references(parsed, &mut out);
    check_references(parsed, &mut out);
    other_references(parsed, &mut out);
    out
}

fn twice<T>(
    rows: &[Located<'_, T>],
    what: &str,
    path: &str,
    key: fn(&T) -> String,
    out: &mut Issues,
) {
    let mut first: BTreeMap<String, &Located<'_, T>> = BTreeMap::new();
    for row in rows {
        let key = key(&row.record);
        match first.get(&key) {
            Some(before) => {
                let what = format!(
                    "{what} `{key}` a second time, after {}:{}",
                    before.file,
                    before.line(path)
                );
                out.push(row.issue(path, what, "rename one or leave it out"));
            }
            None => {
                first.insert(key, row);
            }
        }
    }
}

fn duplicates(parsed: &Parsed<'_>, out: &mut Issues) {
    twice(
        &parsed.faults,
        "fault kind",
        "kind",
        |r| r.kind.clone(),
        out,
    );
    twice(&parsed.checks, "check", "id", |r| r.id.clone(), out);
    twice(
        &parsed.equipment,
        "equipment",
        "kind",
        |r| r.kind.clone(),
        out,
    );
    twice(
        &parsed.parameters,
        "parameter",
        "path",
        |r| {
            format!("{} {}", r.path, r.system.as_deref().unwrap_or_default())
                .trim()
                .to_owned()
        },
        out,
    );
    twice(
        &parsed.errors,
        "instrument error",
        "quantity",
        |r| r.quantity.clone(),
        out,
    );
    twice(
        &parsed.symptoms,
        "complaint",
        "kind",
        |r| r.kind.clone(),
        out,
    );
    twice(&parsed.warnings, "warning", "code", |r| r.code.clone(), out);
    twice(&parsed.rules, "rule set", "id", |r| r.id.clone(), out);
    twice(&parsed.limits, "limit", "id", |r| r.id.clone(), out);
    twice(&parsed.kit, "instrument", "kind", |r| r.kind.clone(), out);
    twice(
        &parsed.cables,
        "cable",
        "mm2",
        |r| format!("{} mm²", r.mm2),
        out,
    );
    twice(&parsed.metals, "metal", "metal", |r| r.metal.clone(), out);
    twice(
        &parsed.bodies,
        "body",
        "table",
        |r| format!("{} {} %", r.table, r.percentile),
        out,
    );
}

fn fault_references(parsed: &Parsed<'_>, out: &mut Issues) {
    let kinds = parsed.faults.iter().map(|r| r.record.kind.as_str());
    let checks = parsed.checks.iter().map(|r| r.record.id.as_str());
    let complaints = parsed.symptoms.iter().map(|r| r.record.kind.as_str());
    for row in &parsed.faults {
        let f = &row.record;
        for (index, other) in f.confused_with.iter().enumerate() {
            refers(
                row,
                &format!("confused_with.{index}"),
                other,
                "fault kind",
                kinds.clone(),
                out,
            );
        }
        for complaint in f.complaints.keys() {
            let path = format!("complaints.{complaint}");
            refers(row, &path, complaint, "complaint", complaints.clone(), out);
        }
        for (index, recheck) in f.repair.rechecks.iter().enumerate() {
            let path = format!("repair.rechecks.{index}");
            refers(row, &path, recheck, "check", checks.clone(), out);
        }
        if let Some(confirm) = &f.repair.confirm {
            refers(row, "repair.confirm", confirm, "check", checks.clone(), out);
        }
        for (index, outcome) in f.outcomes.iter().enumerate() {
            let path = format!("outcomes.{index}.test");
            refers(row, &path, &outcome.test, "check", checks.clone(), out);
        }
        for (index, look) in f.looks.iter().enumerate() {
            let looked = parsed.checks.iter().any(
                |c| matches!(&c.record.hookup, Hookup::Seen { what, .. } if *what == look.what),
            );
            if !looked {
                let what = format!("no check looks for `{}`", look.what);
                out.push(row.issue(&format!("looks.{index}.what"), what, "add such a check"));
            }
        }
    }
}

fn check_references(parsed: &Parsed<'_>, out: &mut Issues) {
    let proofs: Vec<String> = parsed
        .checks
        .iter()
        .flat_map(|c| &c.record.proves)
        .map(|p| shape(&p.what))
        .collect();
    let proofs = || proofs.iter().map(String::as_str);
    let kit = parsed.kit.iter().map(|r| r.record.kind.as_str());
    for row in &parsed.checks {
        let c = &row.record;
        for (index, need) in c.needs.iter().enumerate() {
            refers(
                row,
                &format!("needs.{index}"),
                &shape(need),
                "check that proves",
                proofs(),
                out,
            );
        }
        for (index, need) in c.kit.iter().enumerate() {
            for word in need.split('|') {
                refers(
                    row,
                    &format!("kit.{index}"),
                    word,
                    "instrument",
                    kit.clone(),
                    out,
                );
            }
        }
        for (index, id) in c.limits.iter().enumerate() {
            let path = format!("limits.{index}");
            let limits = parsed.limits.iter().map(|r| r.record.id.as_str());
            refers(row, &path, id, "limit", limits, out);
            let limit = parsed.limits.iter().find(|l| l.record.id == *id);
            if let Some(l) = limit.filter(|l| l.record.quantity != c.hookup.quantity()) {
                let what = format!(
                    "the limit `{id}` judges {}, this reads {}",
                    l.record.quantity,
                    c.hookup.quantity()
                );
                out.push(row.issue(&path, what, "name a limit of its quantity"));
            }
        }
        let key = c.hookup.error_key();
        let errors = parsed.errors.iter().map(|r| r.record.quantity.as_str());
        refers(row, "hookup", key, "instrument error for", errors, out);
    }
    for row in &parsed.safety {
        let proof = shape(&row.record.supply_proof);
        refers(
            row,
            "supply_proof",
            &proof,
            "check that proves",
            proofs(),
            out,
        );
    }
}

fn other_references(parsed: &Parsed<'_>, out: &mut Issues) {
    let codes = parsed.warnings.iter().map(|r| r.record.code.as_str());
    for row in &parsed.symptoms {
        for (index, code) in row.record.warnings.iter().enumerate() {
            refers(
                row,
                &format!("warnings.{index}"),
                code,
                "warning",
                codes.clone(),
                out,
            );
        }
    }
    for row in &parsed.warnings {
        let known = WARNINGS.iter().copied();
        refers(row, "code", &row.record.code, "warning code", known, out);
    }
    for row in &parsed.limits {
        for (index, rule) in row.record.rules.iter().enumerate() {
            let rules = parsed.rules.iter().map(|r| r.record.id.as_str());
            refers(row, &format!("rules.{index}"), rule, "rule set", rules, out);
        }
    }
    for row in &parsed.kit {
        for (index, other) in row.record.brings.iter().enumerate() {
            let kit = parsed.kit.iter().map(|r| r.record.kind.as_str());
            refers(
                row,
                &format!("brings.{index}"),
                other,
                "instrument",
                kit,
                out,
            );
        }
    }
    type Share = fn(&SymptomRow) -> f64;
    let shares = [
        ("nothing_wrong", (|s| s.nothing_wrong) as Share),
        ("unlisted", |s| s.unlisted),
    ];
    for (name, share) in shares {
        let sum: f64 = parsed.symptoms.iter().map(|s| share(&s.record)).sum();
        if let Some(row) = parsed.symptoms.last().filter(|_| sum > 1.0 + 1e-9) {
            let what = format!("the complaints' `{name}` sum to {sum:.3}");
            out.push(row.issue(name, what, "lower them to 1 at most"));
        }
    }
}
