//! What a check or a sign must hold by itself: selector, setup, hookup, units, braces.

use super::braces::{Stands, fault as brace_fault};
use super::parse::{Located, nearest};
use super::procedure::{Hookup, Meter, Setup, UnplugSet};
use super::records::*;
use super::validate::{Issues, each, id, within, word};
use super::words;

/// A check by itself.
pub fn check(row: &Located<'_, CheckForm>, out: &mut Issues) {
    let c = &row.record;
    id(row, "id", &c.id, out);
    word(row, "each", &c.each, words::EACH, out);
    each(row, "only", &c.only, words::ONLY, out);
    let never = never(&c.each);
    setup(row, "setup", &c.setup, &never, out);
    hookup(row, "hookup", &c.hookup, &never, out);
    within(row, "minutes", c.minutes, 0.05, 10000.0, out);
    let units = words::UNITS
        .iter()
        .find(|(q, _)| *q == c.hookup.quantity())
        .map_or(&[][..], |u| u.1);
    if !units.contains(&c.unit.as_str()) {
        let what = format!("`{}` is no unit of {}", c.unit, c.hookup.quantity());
        let cure = match units {
            [""] => "write \"\": it reads a word".to_owned(),
            _ => format!("write {}", units.join(" or ")),
        };
        out.push(row.issue("unit", what, cure));
    }
    let mut text = |path: &str, text: &str, stands| braces(row, path, text, stands, &never, out);
    text("name", &c.name, Stands::Text);
    text("text", &c.text, Stands::Text);
    if let Some(hazard) = &c.hazard {
        text("hazard", hazard, Stands::Text);
    }
    for (index, need) in c.needs.iter().enumerate() {
        text(&format!("needs.{index}"), need, Stands::Id);
    }
    for (index, hold) in c.hold.iter().enumerate() {
        text(&format!("hold.{index}.text"), &hold.text, Stands::Text);
    }
    for (index, proof) in c.proves.iter().enumerate() {
        text(&format!("proves.{index}.what"), &proof.what, Stands::Id);
    }
    for (index, proof) in c.proves.iter().enumerate() {
        let path = format!("proves.{index}");
        if proof.least.is_none() && proof.most.is_none() && proof.word.is_none() {
            let cure = "write least, most or word";
            out.push(row.issue(&path, "any reading would prove this", cure));
        }
        if let Some(required) = &proof.word {
            word(
                row,
                &format!("{path}.word"),
                required,
                words::READING_WORDS,
                out,
            );
        }
    }
    let loads = c.setup.load.iter().any(|load| load.watts > 0.0);
    if c.staged && !loads && c.hookup.quantity() != "loop" {
        let cure = "leave `staged` out, or write the stage's load";
        out.push(row.issue("staged", "a stage that loads nothing", cure));
    }
}

/// A complaint by itself.
pub fn symptom(row: &Located<'_, SymptomRow>, out: &mut Issues) {
    let s = &row.record;
    id(row, "kind", &s.kind, out);
    each(row, "at", &s.at, words::PLACES, out);
    within(row, "floor", s.floor, 0.0, 1.0, out);
    within(row, "nothing_wrong", s.nothing_wrong, 0.0, 1.0, out);
    within(row, "unlisted", s.unlisted, 1e-9, 1.0, out);
    if let Some(elsewhere) = s.elsewhere {
        within(row, "elsewhere", elsewhere, 1e-6, 1.0, out);
    }
    for (index, sign) in s.signs.iter().enumerate() {
        let path = format!("signs.{index}");
        setup(
            row,
            &format!("{path}.setup"),
            &sign.setup,
            &["a", "b", "to", "conductor"],
            out,
        );
        hookup(
            row,
            &format!("{path}.hookup"),
            &sign.hookup,
            &["a", "b", "to", "conductor"],
            out,
        );
        each(row, &format!("{path}.when"), &sign.when, words::WHEN, out);
        for (place, class) in sign.at.iter().enumerate() {
            if !s.at.contains(class) {
                let what = format!("a sign at `{class}`, where the complaint cannot be");
                out.push(row.issue(
                    &format!("{path}.at.{place}"),
                    what,
                    "use a class of its `at`",
                ));
            }
        }
        let tests = usize::from(sign.word.is_some())
            + usize::from(sign.above.is_some())
            + usize::from(sign.below.is_some());
        if tests != 1 {
            let what = format!("a sign with {tests} of word, above and below");
            out.push(row.issue(&path, what, "write exactly one"));
        }
        if let Some(shown) = &sign.word {
            word(
                row,
                &format!("{path}.word"),
                shown,
                words::READING_WORDS,
                out,
            );
        }
    }
}

fn never(each: &str) -> Vec<&'static str> {
    let mut never = vec!["to", "to-name", "to-circuit", "conductor-name"];
    if each != "circuit-pair" {
        never.extend(["a", "b"]);
    }
    if each != "main-line" {
        never.push("conductor");
    }
    never
}

fn braces<T>(
    row: &Located<'_, T>,
    path: &str,
    text: &str,
    stands: Stands,
    never: &[&str],
    out: &mut Issues,
) {
    if let Some((what, cure)) = brace_fault(text, stands, &[], never) {
        out.push(row.issue(path, what, cure));
    }
}

fn setup<T>(row: &Located<'_, T>, path: &str, setup: &Setup, never: &[&str], out: &mut Issues) {
    let unplug: &[String] = match &setup.unplug {
        UnplugSet::All(_) => &[],
        UnplugSet::These(list) => list,
    };
    let lists = [
        ("open", &setup.open[..]),
        ("closed", &setup.closed),
        ("lift", &setup.lift),
        ("unplug", unplug),
        ("on", &setup.on),
        ("off", &setup.off),
    ];
    for (name, list) in lists {
        for (index, item) in list.iter().enumerate() {
            braces(
                row,
                &format!("{path}.{name}.{index}"),
                item,
                Stands::Element,
                never,
                out,
            );
        }
    }
    for (index, load) in setup.load.iter().enumerate() {
        let path = format!("{path}.load.{index}");
        braces(row, &path, &load.at, Stands::Id, never, out);
        within(row, &format!("{path}.watts"), load.watts, 0.1, 20000.0, out);
    }
    for source in setup.sources.keys() {
        braces(
            row,
            &format!("{path}.sources.{source}"),
            source,
            Stands::Id,
            never,
            out,
        );
    }
}

fn hookup<T>(row: &Located<'_, T>, path: &str, hookup: &Hookup, never: &[&str], out: &mut Issues) {
    let mut ids: Vec<&str> = Vec::new();
    match hookup {
        Hookup::Volts { between, meter } => {
            ids.extend(between.iter().map(String::as_str));
            if let Some(Meter::Ohms(ohms)) = meter {
                within(row, &format!("{path}.meter"), *ohms, 1.0, 1e12, out);
            }
        }
        Hookup::Continuity { between } => ids.extend(between.iter().map(String::as_str)),
        Hookup::Loop { between, amps } => {
            ids.extend(between.iter().map(String::as_str));
            if let Some(amps) = amps {
                within(row, &format!("{path}.amps"), *amps, 0.001, 100.0, out);
            }
        }
        Hookup::Amps { around } => ids.extend(around.iter().map(String::as_str)),
        Hookup::Insulation {
            between,
            test_volts,
        } => {
            ids.extend(between.iter().flatten().map(String::as_str));
            among(
                row,
                &format!("{path}.test_volts"),
                *test_volts,
                &[250.0, 500.0, 1000.0],
                out,
            );
        }
        Hookup::TripTime {
            rcd,
            at,
            multiple,
            half_cycle,
        } => {
            ids.push(rcd);
            ids.extend(at.as_deref());
            among(
                row,
                &format!("{path}.multiple"),
                *multiple,
                &[0.5, 1.0, 5.0],
                out,
            );
            if let Some(degrees) = half_cycle {
                among(
                    row,
                    &format!("{path}.half_cycle"),
                    *degrees,
                    &[0.0, 180.0],
                    out,
                );
            }
        }
        Hookup::Ramp { rcd, at } => {
            ids.push(rcd);
            ids.extend(at.as_deref());
        }
        Hookup::Holds { device } => ids.push(device),
        Hookup::Lamp { at } => ids.push(at),
        Hookup::Seen { at, what } => {
            ids.push(at);
            word(row, &format!("{path}.what"), what, words::SEEN, out);
        }
    }
    let groups_empty = match hookup {
        Hookup::Amps { around } => around.is_empty(),
        Hookup::Insulation { between, .. } => between.iter().any(Vec::is_empty),
        _ => false,
    };
    if groups_empty {
        out.push(row.issue(path, "an empty group of terminals", "name at least one"));
    }
    for id in ids {
        braces(row, path, id, Stands::Id, never, out);
    }
}

fn among<T>(row: &Located<'_, T>, path: &str, value: f64, allowed: &[f64], out: &mut Issues) {
    if !allowed.iter().any(|a| (a - value).abs() < 1e-9) {
        let words: Vec<String> = allowed.iter().map(f64::to_string).collect();
        let cure = format!("write {}", nearest("", words.iter().map(String::as_str)));
        out.push(row.issue(
            path,
            format!("{value} is not offered by the instrument"),
            cure,
        ));
    }
}
