//! Answers as typed: numbers, choices, and lines of several parts.

use super::AnswerError;
use super::document::{BoardLine, EquipmentLine, RcdLine};
use crate::quantity::{nearest, nearest_text};
use crate::site::file::Known;

/// A line without what cannot stand in a name; longer than a line can be is refused.
pub fn clean(line: &str) -> Result<String, AnswerError> {
    let text: String = line.trim().chars().filter(|c| !c.is_control()).collect();
    if text.chars().count() > 200 {
        return Err(AnswerError::new(
            "that line is too long",
            "answer in at most 200 characters",
        ));
    }
    Ok(text)
}

/// An answer: what was typed, the default where nothing was, or don't know.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Answer {
    /// `None`: not known.
    text: Option<String>,
}

impl Answer {
    /// Reads a line; `default` may itself be `?`.
    pub fn read(line: &str, default: &str) -> Self {
        let text = if line.is_empty() { default } else { line };
        let lower = text.to_lowercase();
        let unknown = matches!(
            lower.as_str(),
            "?" | "unknown" | "don't know" | "dont know" | "do not know"
        );
        Self {
            text: (!unknown).then(|| text.to_owned()),
        }
    }

    /// As text; not known is `otherwise`.
    pub fn text(&self, otherwise: &str) -> String {
        self.text
            .clone()
            .unwrap_or_else(|| otherwise.to_owned())
            .chars()
            .take(120)
            .collect()
    }

    /// One of `choices`, in any case; not known is `otherwise`.
    pub fn choice(
        &self,
        choices: &[&'static str],
        otherwise: &'static str,
    ) -> Result<&'static str, AnswerError> {
        let Some(text) = &self.text else {
            return Ok(otherwise);
        };
        choices
            .iter()
            .find(|c| c.eq_ignore_ascii_case(text))
            .copied()
            .ok_or_else(|| {
                AnswerError::new(
                    format!("`{text}` is not one of the choices"),
                    format!("one of {}, or ?", choices.join(", ")),
                )
            })
    }

    /// A number from `least` to `most`, its unit behind it or not; not known is `None`.
    pub fn number(&self, unit: &str, least: f64, most: f64) -> Result<Option<f64>, AnswerError> {
        self.text
            .as_deref()
            .map_or(Ok(None), |text| number(text, unit, least, most))
    }

    /// Yes or no; not known is `None`.
    pub fn yes_no(&self) -> Result<Option<bool>, AnswerError> {
        let Some(text) = &self.text else {
            return Ok(None);
        };
        match text.to_lowercase().as_str() {
            "yes" | "y" => Ok(Some(true)),
            "no" | "n" => Ok(Some(false)),
            _ => Err(AnswerError::new(
                format!("`{text}` is neither yes nor no"),
                "yes, no, or ?",
            )),
        }
    }

    /// Parts between commas; not known is none.
    fn parts(&self) -> Vec<&str> {
        self.text
            .as_deref()
            .map_or_else(Vec::new, |t| t.split(',').map(str::trim).collect())
    }
}

/// `?` and nothing are not known.
fn number(text: &str, unit: &str, least: f64, most: f64) -> Result<Option<f64>, AnswerError> {
    if matches!(text, "" | "?") {
        return Ok(None);
    }
    let bare = text
        .trim_end_matches(unit)
        .trim_end_matches("mm2")
        .trim_end_matches("mA")
        .trim();
    let value: f64 = bare.parse().map_err(|_| {
        AnswerError::new(
            format!("`{text}` is not a number"),
            format!("a number in {unit} with a decimal point, or ?"),
        )
    })?;
    if !value.is_finite() || value < least || value > most {
        return Err(AnswerError::new(
            format!("{text} is outside anything real"),
            format!("between {least} and {most} {unit}, or ?"),
        ));
    }
    Ok(Some(value))
}

/// Most points or RCDs in one line: more is a slip of the finger.
const MOST: f64 = 50.0;

/// RCDs of a board: a count of 30 mA devices, or each one's rating.
pub fn rcds(answer: &Answer) -> Result<Vec<RcdLine>, AnswerError> {
    let parts = answer.parts();
    if let [one] = parts.as_slice() {
        let count: Option<usize> = if one.eq_ignore_ascii_case("none") {
            Some(0)
        } else {
            one.parse().ok()
        };
        // Below the least rating in use, a lone number can only be a count.
        if let Some(count) = count.filter(|c| *c < 6) {
            return Ok(vec![
                RcdLine {
                    ma: 30.0,
                    delayed: false
                };
                count
            ]);
        }
    }
    parts
        .into_iter()
        .map(|part| {
            let delayed = part.ends_with(['S', 's']);
            let ma = number(part.trim_end_matches(['S', 's']), "mA", 6.0, 3_000.0)?.unwrap_or(30.0);
            Ok(RcdLine { ma, delayed })
        })
        .collect()
}

/// A circuit as typed on one line.
#[derive(Clone, Debug, PartialEq)]
pub struct CircuitLine {
    /// Name.
    pub name: String,
    /// Breaker's A.
    pub amps: Option<f64>,
    /// RCD id.
    pub rcd: Option<String>,
    /// Number of points.
    pub points: usize,
    /// Metres to the farthest.
    pub metres: Option<f64>,
    /// `L1` … `L3`, `L1L2L3`.
    pub phase: &'static str,
}

impl CircuitLine {
    /// Reads `name, amps, RCD, points, metres[, phase]`; what is left out at the end is not known.
    pub fn read(answer: &Answer, three: bool, rcds: &[String]) -> Result<Self, AnswerError> {
        let parts = answer.parts();
        let part = |i: usize| parts.get(i).copied().unwrap_or("");
        let most = if three { 6 } else { 5 };
        if parts.len() > most {
            return Err(AnswerError::new(
                format!("{} parts are too many", parts.len()),
                "name, amps, RCD, points, metres; a name has no comma",
            ));
        }
        let name = if part(0).is_empty() {
            "sockets"
        } else {
            part(0)
        };
        if name.parse::<f64>().is_ok() {
            return Err(AnswerError::new(
                format!("`{name}` is not a name"),
                "begin with the circuit's name",
            ));
        }
        Ok(Self {
            name: name.to_owned(),
            amps: number(part(1), "A", 1.0, 400.0)?,
            rcd: rcd(part(2), rcds)?,
            points: number(part(3), "points", 1.0, MOST)?.map_or(1, |n| n.round() as usize),
            metres: number(part(4), "m", 0.5, 2_000.0)?,
            phase: phase(part(5))?,
        })
    }
}

fn rcd(text: &str, rcds: &[String]) -> Result<Option<String>, AnswerError> {
    let lower = text.to_lowercase();
    if matches!(lower.as_str(), "none" | "no" | "0" | "-") {
        return Ok(None);
    }
    if matches!(lower.as_str(), "" | "?") {
        return Ok(rcds.first().cloned());
    }
    let by_number = lower
        .parse::<usize>()
        .ok()
        .and_then(|n| rcds.get(n.checked_sub(1)?));
    by_number
        .or_else(|| rcds.iter().find(|r| **r == lower))
        .cloned()
        .map(Some)
        .ok_or_else(|| {
            let cure = if rcds.is_empty() {
                "this board has none: write none".to_owned()
            } else {
                format!("1 to {}, or none", rcds.len())
            };
            AnswerError::new(format!("there is no RCD `{text}` on this board"), cure)
        })
}

fn phase(text: &str) -> Result<&'static str, AnswerError> {
    match text.to_uppercase().as_str() {
        "" | "?" | "L1" | "1" => Ok("L1"),
        "L2" | "2" => Ok("L2"),
        "L3" => Ok("L3"),
        "3" | "L1L2L3" => Ok("L1L2L3"),
        _ => Err(AnswerError::new(
            format!("`{text}` is not a phase"),
            "L1, L2, L3, or 3 for all three",
        )),
    }
}

/// Everyday words for kinds of equipment.
const EVERYDAY: [(&str, &str); 16] = [
    ("fridge", "refrigerator"),
    ("tv", "television"),
    ("washer", "washing machine"),
    ("dryer", "tumble dryer"),
    ("microwave", "microwave oven"),
    ("stove", "cooktop"),
    ("hob", "cooktop"),
    ("heater", "portable heater"),
    ("hot water", "storage water heater"),
    ("water heater", "storage water heater"),
    ("light", "luminaire"),
    ("lights", "luminaire"),
    ("aircon", "air conditioner"),
    ("pc", "computer"),
    ("drill", "power tool"),
    ("charger", "vehicle charger"),
];

/// Equipment of a circuit with `points` points.
pub fn equipment(
    answer: &Answer,
    known: &Known,
    points: usize,
) -> Result<Vec<EquipmentLine>, AnswerError> {
    let parts = answer.parts();
    let none = |p: &str| matches!(p.to_lowercase().as_str(), "" | "none" | "nothing");
    parts
        .into_iter()
        .filter(|p| !none(p))
        .map(|part| one_equipment(part, known, points))
        .collect()
}

fn one_equipment(part: &str, known: &Known, points: usize) -> Result<EquipmentLine, AnswerError> {
    let (word, at) = part
        .split_once('@')
        .map_or((part, "1"), |(w, at)| (w.trim(), at.trim()));
    let point = at
        .parse::<usize>()
        .ok()
        .filter(|n| (1..=points).contains(n))
        .ok_or_else(|| {
            AnswerError::new(
                format!("`{part}`: there is no point {at}"),
                format!("1 to {points}, as in kettle@1"),
            )
        })?;
    let lower = word.to_lowercase();
    if let Some(name) = lower.strip_prefix("other ") {
        return Ok(EquipmentLine {
            kind: "other".into(),
            name: Some(name.trim().to_owned()),
            point,
        });
    }
    let kind = EVERYDAY
        .iter()
        .find(|(w, _)| *w == lower)
        .map_or(lower.as_str(), |(_, kind)| *kind);
    if kind == "other" || known.kinds.contains_key(kind) {
        return Ok(EquipmentLine {
            kind: kind.to_owned(),
            name: None,
            point,
        });
    }
    let near = nearest(kind, known.kinds.keys(), 3);
    let cure = if near.is_empty() {
        String::new()
    } else {
        format!("{}; ", nearest_text(&near))
    };
    Err(AnswerError::new(
        format!("`{word}` is not a kind of equipment known here"),
        format!("{cure}or write `other {word}`"),
    ))
}

/// Another board: `name, metres, amps, mm²`; `None`: there is none.
pub fn board(answer: &Answer) -> Result<Option<BoardLine>, AnswerError> {
    let parts = answer.parts();
    let part = |i: usize| parts.get(i).copied().unwrap_or("");
    if matches!(
        part(0).to_lowercase().as_str(),
        "" | "none" | "no" | "no more"
    ) {
        return Ok(None);
    }
    if parts.len() > 4 {
        return Err(AnswerError::new(
            "that has too many parts",
            "name, metres, breaker amps, cable mm²",
        ));
    }
    Ok(Some(BoardLine {
        name: part(0).to_owned(),
        metres: number(part(1), "m", 0.5, 5_000.0)?,
        amps: number(part(2), "A", 1.0, 1_000.0)?,
        mm2: number(part(3), "mm²", 0.5, 500.0)?,
    }))
}
