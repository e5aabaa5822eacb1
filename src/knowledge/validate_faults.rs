//! What a fault kind must hold by itself: places, edits that fit its value, sums, words, braces.

use super::braces::{Stands, fault as brace_fault};
use super::parse::Located;
use super::records::*;
use super::validate::{Issues, each, id, prior, within, word};
use super::words;

type Row<'a> = Located<'a, FaultKind>;

/// A fault kind by itself.
pub fn fault(row: &Row<'_>, out: &mut Issues) {
    let f = &row.record;
    id(row, "kind", &f.kind, out);
    if f.at.is_empty() {
        out.push(row.issue(
            "at",
            "`at` names no place",
            "write a place class, such as \"point\"",
        ));
    }
    each(row, "at", &f.at, words::PLACES, out);
    if let Some(to) = f.to.as_deref().filter(|to| *to != "point" && *to != "bar") {
        let what = format!("`to` cannot be `{to}`");
        out.push(row.issue("to", what, "write \"point\" or \"bar\", or leave it out"));
    }
    each(row, "only", &f.only, words::ONLY, out);
    for (index, conductor) in f.conductors.iter().enumerate() {
        if !["L", "L1", "L2", "L3", "N", "PE"].contains(&conductor.as_str()) {
            let path = format!("conductors.{index}");
            let what = format!("`{conductor}` is no conductor");
            out.push(row.issue(&path, what, "write L, L1, L2, L3, N or PE"));
        }
    }
    within(row, "presence", f.presence, 1e-9, 1.0, out);
    for (complaint, p) in &f.complaints {
        within(row, &format!("complaints.{complaint}"), *p, 0.0, 1.0, out);
    }
    let sum: f64 = f.complaints.values().sum();
    if sum > 1.02 {
        let what = format!("the complaints sum to {sum:.3}");
        out.push(row.issue("complaints", what, "lower them to 1 at most"));
    }
    for (when, p) in &f.when {
        word(row, &format!("when.{when}"), when, words::WHEN, out);
        within(row, &format!("when.{when}"), *p, 0.0, 1.0, out);
    }
    let sum: f64 = f.when.values().sum();
    if sum > 1.001 {
        let what = format!("the shares of `when` sum to {sum:.3}");
        out.push(row.issue("when", what, "lower them to 1 at most"));
    }
    if let Some(manner) = &f.manner {
        within(row, "manner.shows", manner.shows, 0.0, 1.0, out);
        for (provoke, p) in &manner.provoked {
            let name = format!("{provoke:?}").to_lowercase();
            within(row, &format!("manner.provoked.{name}"), *p, 0.0, 1.0, out);
        }
    }
    value(row, out);
    for (index, edit) in f.edits.iter().enumerate() {
        one_edit(row, &format!("edits.{index}"), edit, out);
    }
    for (index, look) in f.looks.iter().enumerate() {
        word(
            row,
            &format!("looks.{index}.what"),
            &look.what,
            words::SEEN,
            out,
        );
        within(row, &format!("looks.{index}.p"), look.p, 0.0, 1.0, out);
        braces(row, &format!("looks.{index}.at"), &look.at, Stands::Id, out);
    }
    for (index, outcome) in f.outcomes.iter().enumerate() {
        word(
            row,
            &format!("outcomes.{index}.word"),
            &outcome.word,
            words::READING_WORDS,
            out,
        );
        within(
            row,
            &format!("outcomes.{index}.p"),
            outcome.p,
            0.0,
            1.0,
            out,
        );
        braces(
            row,
            &format!("outcomes.{index}.at"),
            &outcome.at,
            Stands::Id,
            out,
        );
    }
    repair(row, out);
}

fn value(row: &Row<'_>, out: &mut Issues) {
    let f = &row.record;
    let uses = f
        .edits
        .iter()
        .flat_map(amounts)
        .any(|a| matches!(a, Amount::Word(w) if w.ends_with("value")));
    match &f.value {
        Some(value) => {
            word(row, "value.unit", &value.unit, words::VALUE_UNITS, out);
            prior(row, "value.prior", &value.prior, out);
            if !uses && !f.edits.is_empty() {
                let what = "a [value] that no edit uses";
                out.push(row.issue("value", what, "write \"value\" in an edit, or leave it out"));
            }
        }
        None if uses => {
            out.push(row.issue(
                "edits",
                "an edit uses `value`, but there is no [value]",
                "add one",
            ));
        }
        None => {}
    }
    let element = f
        .edits
        .iter()
        .any(|e| matches!(e, EditForm::Element { .. }));
    if f.position != element {
        let what = "`position` belongs to an edit of an element, and to no other";
        out.push(row.issue("position", what, "write both or neither"));
    }
}

fn amounts(edit: &EditForm) -> Vec<Amount> {
    match edit {
        EditForm::Series { ohms, .. }
        | EditForm::Replace { ohms, .. }
        | EditForm::Shunt { ohms, .. }
        | EditForm::NetworkInjection { ohms }
        | EditForm::Element { ohms, .. } => vec![ohms.clone()],
        EditForm::Capacitor { amps, .. } => vec![amps.clone()],
        EditForm::SourceVolts { volts } => vec![volts.clone()],
        EditForm::Device { what, value, .. } => match value {
            Some(value) => vec![value.clone()],
            None if what == "dead" => Vec::new(),
            None => vec![Amount::Word("value".into())],
        },
        EditForm::Swap { .. } | EditForm::SwapService {} | EditForm::Move { .. } => Vec::new(),
    }
}

fn one_edit(row: &Row<'_>, path: &str, edit: &EditForm, out: &mut Issues) {
    for amount in amounts(edit) {
        match amount {
            Amount::Word(w) => word(row, path, &w, words::AMOUNTS, out),
            Amount::Number(n) => within(row, path, n, 0.0, 1e12, out),
        }
    }
    let mut text = |text: &str| braces(row, path, text, Stands::Id, out);
    match edit {
        EditForm::Series { branch, .. } | EditForm::Replace { branch, .. } => text(branch),
        EditForm::Shunt { between, .. } | EditForm::Capacitor { between, .. } => {
            between.iter().for_each(|b| text(b));
        }
        EditForm::Swap { at, conductors } => {
            text(at);
            if conductors
                .iter()
                .any(|c| !["L", "N", "PE"].contains(&c.as_str()))
            {
                let cure = "write two of L, N and PE";
                out.push(row.issue(path, "a swap of what is no conductor", cure));
            }
        }
        EditForm::Move { end, to } => {
            text(end);
            match to {
                Amount::Word(to) => text(to),
                Amount::Number(_) => {
                    let cure = "write a terminal, such as \"{to}\"";
                    out.push(row.issue(path, "a moved end lands on a number", cure));
                }
            }
        }
        EditForm::Element { equipment, .. } => text(equipment),
        EditForm::Device { id, what, .. } => {
            text(id);
            if !["trip-amps", "trip-seconds", "dead"].contains(&what.as_str()) {
                let cure = "write trip-amps, trip-seconds or dead";
                out.push(row.issue(path, format!("a device has no `{what}`"), cure));
            }
        }
        EditForm::SwapService {}
        | EditForm::SourceVolts { .. }
        | EditForm::NetworkInjection { .. } => {}
    }
}

fn repair(row: &Row<'_>, out: &mut Issues) {
    let f = &row.record;
    word(row, "repair.action", &f.repair.action, words::ACTIONS, out);
    within(row, "repair.minutes", f.repair.minutes, 0.1, 10000.0, out);
    braces(row, "repair.group", &f.repair.group, Stands::Id, out);
    braces(row, "repair.text", &f.repair.text, Stands::Text, out);
    braces(row, "name", &f.name, Stands::Text, out);
    if f.repair.group.trim().is_empty() {
        out.push(row.issue(
            "repair.group",
            "the repair has no group",
            "name it, such as \"joint {at}\"",
        ));
    }
    if f.harmless != (f.repair.action == "nothing-found") {
        let what = "harmless and the action `nothing-found` belong together";
        out.push(row.issue("repair.action", what, "write both or neither"));
    }
    if f.harmless && f.dangerous {
        out.push(row.issue("dangerous", "harmless and dangerous at once", "keep one"));
    }
}

fn braces(row: &Row<'_>, path: &str, text: &str, stands: Stands, out: &mut Issues) {
    let f = &row.record;
    let mut never = vec!["a", "b"];
    if f.to.is_none() {
        never.extend(["to", "to-name", "to-circuit"]);
    }
    if f.conductors.is_empty() {
        never.extend(["conductor", "conductor-name"]);
    }
    if let Some((what, cure)) = brace_fault(text, stands, &[], &never) {
        out.push(row.issue(path, what, cure));
    }
}
