//! A reading as a person or a program writes it, understood or refused with the cure (contract §4).

use super::asked::Asked;
use super::reading::{Parsed, ParsedValue, Unit, Word};
use super::units;

/// Which error of contract §6 a refused reading is.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum ReadingFault {
    /// It cannot be understood, or cannot be.
    BadReading,
    /// It is in a unit of another kind.
    WrongUnit,
}

/// Why a reading was refused; nothing is recorded.
#[derive(Clone, Debug, PartialEq, Eq, thiserror::Error)]
#[error("{message}")]
pub struct ReadingError {
    /// Which error.
    pub fault: ReadingFault,
    /// What is wrong.
    pub message: String,
    /// The cure.
    pub hint: String,
}

impl ReadingError {
    /// The code of contract §6.
    pub fn code(&self) -> &'static str {
        match self.fault {
            ReadingFault::BadReading => "bad-reading",
            ReadingFault::WrongUnit => "wrong-unit",
        }
    }
}

fn bad(message: impl Into<String>, hint: impl Into<String>) -> ReadingError {
    ReadingError {
        fault: ReadingFault::BadReading,
        message: message.into(),
        hint: hint.into(),
    }
}

/// Longest text that can be a reading, in characters.
const LONGEST: usize = 80;

/// Understands a reading; see contract §4.
pub fn parse(text: &str, ask: &Asked) -> Result<Parsed, ReadingError> {
    let trimmed = text.trim();
    if trimmed.is_empty() {
        return Err(bad(
            "the reading is empty",
            format!("type {}", ask.example()),
        ));
    }
    if trimmed.chars().count() > LONGEST || trimmed.chars().any(char::is_control) {
        return Err(bad(
            "that is too long for a reading",
            format!("type {}", ask.example()),
        ));
    }
    let (rough, body) = match trimmed.strip_prefix('~') {
        Some(rest) => (true, rest.trim_start()),
        None => (false, trimmed),
    };
    if let Some(word) = word(body, ask)? {
        if rough {
            return Err(bad(
                format!("`{trimmed}`: a word cannot be rough"),
                "leave the ~ out",
            ));
        }
        return Ok(Parsed {
            value: word,
            unit: ask.unit,
            rough: false,
        });
    }
    let value = number_forms(body, ask)?;
    Ok(Parsed {
        value,
        unit: ask.unit,
        rough,
    })
}

fn word(body: &str, ask: &Asked) -> Result<Option<ParsedValue>, ReadingError> {
    let lower = body
        .to_lowercase()
        .split_whitespace()
        .collect::<Vec<_>>()
        .join(" ");
    if matches!(
        lower.as_str(),
        "ol" | "o.l" | "o.l." | "over range" | "overrange"
    ) {
        return over_range(body, ask).map(Some);
    }
    let Some(found) = Word::read(&lower) else {
        return Ok(None);
    };
    let said = match found {
        Word::Yes if ask.yes_is_holds => Word::Holds,
        Word::No if ask.yes_is_holds => Word::Trips,
        Word::Open if ask.unit == Unit::Ohm => return over_range(body, ask).map(Some),
        other => other,
    };
    if said == Word::Unknown || ask.words.contains(&said) {
        return Ok(Some(ParsedValue::Word { word: said }));
    }
    Err(bad(
        format!("`{body}` is no reading of this test"),
        format!("type {}", ask.example()),
    ))
}

fn over_range(body: &str, ask: &Asked) -> Result<ParsedValue, ReadingError> {
    match ask.over {
        _ if !ask.takes_numbers() => Err(bad(
            format!("`{body}` is no reading of this test"),
            format!("type {}", ask.example()),
        )),
        Some(over) => Ok(ParsedValue::Over { over }),
        None => Err(bad(
            format!("`{body}`: the range of this instrument is not known here"),
            format!("type the top of its range, as in >200 {}", ask.bare),
        )),
    }
}

fn number_forms(body: &str, ask: &Asked) -> Result<ParsedValue, ReadingError> {
    if let Some((low, high)) = body.split_once("..") {
        return range(body, low, high, ask);
    }
    let sign = body.chars().next();
    let rest = body
        .trim_start_matches(['>', '<', '≥', '≤', '='])
        .trim_start();
    match sign {
        Some('>' | '≥') => single(body, rest, ask).map(|over| ParsedValue::Over { over }),
        Some('<' | '≤') => single(body, rest, ask).map(|under| ParsedValue::Under { under }),
        Some('=') => Err(bad(
            format!("`{body}` is not a reading"),
            format!("type {}", ask.example()),
        )),
        _ => single(body, rest, ask).map(|value| ParsedValue::Value { value }),
    }
}

fn range(body: &str, low: &str, high: &str, ask: &Asked) -> Result<ParsedValue, ReadingError> {
    if low.trim().is_empty() || high.trim().is_empty() || high.contains("..") {
        return Err(bad(
            format!("`{body}` is not a range"),
            "a range is written 40..60 V",
        ));
    }
    let first = split(body, low, ask)?;
    let second = split(body, high, ask)?;
    // `40..60 mA`: an end without any unit takes the other's, prefix and all.
    let (first_unit, second_unit) = match (first.1, second.1) {
        ("", unit) => (unit, unit),
        (unit, "") => (unit, unit),
        both => both,
    };
    let low = scaled(body, first.0, first_unit, ask)?;
    let high = scaled(body, second.0, second_unit, ask)?;
    if low > high {
        return Err(bad(
            format!("`{body}` begins above its end"),
            "write the lower value first, as in 40..60 V",
        ));
    }
    Ok(if low == high {
        ParsedValue::Value { value: low }
    } else {
        ParsedValue::Range { low, high }
    })
}

fn single(whole: &str, text: &str, ask: &Asked) -> Result<f64, ReadingError> {
    let (value, unit) = split(whole, text, ask)?;
    scaled(whole, value, unit, ask)
}

/// Parts a number from what follows it.
fn split<'t>(whole: &str, text: &'t str, ask: &Asked) -> Result<(f64, &'t str), ReadingError> {
    let text = text.trim();
    let not_a_number = || {
        let lower = text.to_lowercase();
        let bare = lower.trim_start_matches(['+', '-', '−']);
        if bare.starts_with("nan") {
            bad(
                format!("`{whole}` is not a number"),
                "read the instrument again; `unknown` if it shows nothing",
            )
        } else if bare.starts_with("inf") || bare.starts_with('∞') {
            bad(
                format!("`{whole}`: no instrument shows infinity"),
                "over range is written OL, or >200 MΩ",
            )
        } else if !ask.takes_numbers() {
            bad(
                format!("`{whole}` is no reading of this test"),
                format!("type {}", ask.example()),
            )
        } else {
            bad(
                format!("`{whole}` is not a reading"),
                format!("type {}", ask.example()),
            )
        }
    };
    let end = number_end(text);
    let (digits, unit) = text.split_at(end);
    if !digits.bytes().any(|b| b.is_ascii_digit()) {
        return Err(not_a_number());
    }
    if unit.starts_with(',') {
        let after: String = unit
            .chars()
            .skip(1)
            .take_while(char::is_ascii_digit)
            .collect();
        let cure = if after.is_empty() {
            "one number, without a comma".to_owned()
        } else {
            format!("write a decimal point: {digits}.{after}")
        };
        return Err(bad(format!("`{whole}` has a comma"), cure));
    }
    let value: f64 = digits
        .replace('−', "-")
        .parse()
        .map_err(|_| not_a_number())?;
    Ok((value, unit.trim()))
}

/// Byte length of the number at the beginning: sign, digits, one point, exponent.
fn number_end(text: &str) -> usize {
    let bytes = text.as_bytes();
    let mut at = match text.chars().next() {
        Some(c @ ('+' | '-' | '−')) => c.len_utf8(),
        _ => 0,
    };
    let digits = |from: usize| {
        from + bytes[from..]
            .iter()
            .take_while(|b| b.is_ascii_digit())
            .count()
    };
    at = digits(at);
    if bytes.get(at) == Some(&b'.') {
        at = digits(at + 1);
    }
    if matches!(bytes.get(at), Some(b'e' | b'E')) {
        let sign = usize::from(matches!(bytes.get(at + 1), Some(b'+' | b'-')));
        let end = digits(at + 1 + sign);
        if end > at + 1 + sign {
            at = end;
        }
    }
    at
}

fn scaled(whole: &str, value: f64, unit: &str, ask: &Asked) -> Result<f64, ReadingError> {
    let scale = scale(whole, unit, ask)?;
    if value < 0.0 {
        return Err(bad(
            format!("`{whole}` is negative; this test reads a magnitude"),
            "write it without the sign; if the instrument shows one, it is on DC: switch it to AC and read again",
        ));
    }
    let si = value * scale;
    let most = match ask.unit {
        Unit::Volt | Unit::Ampere => 1e5,
        Unit::Second => 1e6,
        Unit::Ohm => 1e14,
        Unit::Watt | Unit::None => 1e9,
    };
    if !si.is_finite() || si > most {
        return Err(bad(
            format!("`{whole}` is beyond what any instrument reads"),
            "check the number and its prefix (m is milli, M is mega); over range is written OL",
        ));
    }
    // Also turns -0 into 0.
    Ok(si + 0.0)
}

fn scale(whole: &str, unit: &str, ask: &Asked) -> Result<f64, ReadingError> {
    if !ask.takes_numbers() {
        return Err(bad(
            format!("`{whole}`: this test is answered by a word"),
            format!("type {}", ask.example()),
        ));
    }
    if unit.is_empty() {
        return Ok(ask.scale);
    }
    if let Some(read) = units::read(unit) {
        return match read.unit {
            None => Ok(read.scale),
            Some(found) if found == ask.unit => Ok(read.scale),
            Some(found) => Err(ReadingError {
                fault: ReadingFault::WrongUnit,
                message: format!(
                    "`{whole}` is in {}, this test reads {}",
                    units::measures(found),
                    units::measures(ask.unit)
                ),
                hint: format!("type {}", ask.example()),
            }),
        };
    }
    if unit.chars().any(|c| c.is_ascii_digit()) {
        return Err(bad(
            format!("`{whole}` is more than one value"),
            format!("give one value; a range is written 40..60 {}", ask.bare),
        ));
    }
    if !unit
        .chars()
        .next()
        .is_some_and(|c| c.is_alphabetic() || matches!(c, '°' | '%'))
    {
        return Err(bad(
            format!("`{whole}` is not a reading"),
            format!("type {}", ask.example()),
        ));
    }
    Err(ReadingError {
        fault: ReadingFault::WrongUnit,
        message: format!(
            "`{unit}` is not a unit of this test, which reads {}",
            units::measures(ask.unit)
        ),
        hint: format!("type {}", ask.example()),
    })
}
