//! Numbers as people read them: a value with its unit, in the prefix the trade uses.

use super::reading::{Parsed, ParsedValue, Unit};
use super::units;

/// Prefixes of a unit, largest first: the least value written with it, its factor, its sign.
type Prefixes = &'static [(f64, f64, &'static str)];

/// Insulation is spoken in megohms from 0.1 MΩ on, continuity in ohms down to 10 mΩ, leakage in milliamperes
/// up to 1 A, trip times in milliseconds up to 1 s.
fn prefixes(unit: Unit) -> Prefixes {
    match unit {
        Unit::Ohm => &[
            (1e9, 1e9, "G"),
            (1e5, 1e6, "M"),
            (1e3, 1e3, "k"),
            (1e-2, 1.0, ""),
            (1e-5, 1e-3, "m"),
            (0.0, 1e-6, "µ"),
        ],
        Unit::Volt => &[
            (1e3, 1e3, "k"),
            (0.1, 1.0, ""),
            (1e-4, 1e-3, "m"),
            (0.0, 1e-6, "µ"),
        ],
        Unit::Ampere => &[
            (1e3, 1e3, "k"),
            (1.0, 1.0, ""),
            (1e-5, 1e-3, "m"),
            (0.0, 1e-6, "µ"),
        ],
        Unit::Second => &[(1.0, 1.0, ""), (1e-4, 1e-3, "m"), (0.0, 1e-6, "µ")],
        Unit::Watt => &[(1e3, 1e3, "k"), (0.1, 1.0, ""), (0.0, 1e-3, "m")],
        Unit::None => &[(0.0, 1.0, "")],
    }
}

/// `0.35 MΩ`, `1.8 mA`, `47 V`, `24 ms`: three significant figures, never `-0`.
///
/// Infinite ohms are `open`; other values that are not finite say so.
pub fn format(value: f64, unit: Unit) -> String {
    if value.is_nan() {
        return "not a number".into();
    }
    if value.is_infinite() {
        return if unit == Unit::Ohm {
            "open".into()
        } else {
            format!("beyond any {}", units::symbol(unit))
        };
    }
    let sign = if value < 0.0 { "-" } else { "" };
    // Rounding comes first, so that 999.9 mA becomes 1 A and not 1000 mA.
    let rounded = three_figures(value.abs());
    let (_, factor, prefix) = prefixes(unit)
        .iter()
        .find(|(least, _, _)| rounded >= *least)
        .copied()
        .unwrap_or((0.0, 1.0, ""));
    let number = plain(rounded / factor);
    if number == "0" {
        return with_unit("0", "", unit);
    }
    with_unit(&format!("{sign}{number}"), prefix, unit)
}

fn with_unit(number: &str, prefix: &str, unit: Unit) -> String {
    let symbol = units::symbol(unit);
    if prefix.is_empty() && symbol.is_empty() {
        number.to_owned()
    } else {
        format!("{number} {prefix}{symbol}")
    }
}

fn three_figures(value: f64) -> f64 {
    // Text in scientific form is the one rounding to figures that is exact on every machine.
    format!("{value:.2e}").parse().unwrap_or(value)
}

/// Three significant figures in plain digits, without trailing zeros.
fn plain(value: f64) -> String {
    let decimals = match value {
        v if v >= 99.95 => 0,
        v if v >= 9.995 => 1,
        v if v >= 0.9995 => 2,
        v if v >= 0.09995 => 3,
        v if v >= 0.009995 => 4,
        _ => 5,
    };
    let text = format!("{value:.decimals$}");
    if text.contains('.') {
        text.trim_end_matches('0').trim_end_matches('.').to_owned()
    } else {
        text
    }
}

/// A parsed reading: `40 V to 60 V`, `above 200 MΩ`, `about 230 V`, `no trip`.
pub fn format_parsed(parsed: &Parsed) -> String {
    let unit = parsed.unit;
    let text = match parsed.value {
        ParsedValue::Value { value } => format(value, unit),
        ParsedValue::Range { low, high } => {
            format!("{} to {}", format(low, unit), format(high, unit))
        }
        ParsedValue::Over { over } => format!("above {}", format(over, unit)),
        ParsedValue::Under { under } => format!("below {}", format(under, unit)),
        ParsedValue::Word { word } => word.text().to_owned(),
    };
    if parsed.rough {
        format!("about {text}")
    } else {
        text
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn values_read_as_the_trade_speaks() {
        for (value, unit, text) in [
            (350e3, Unit::Ohm, "0.35 MΩ"),
            (1.8e-3, Unit::Ampere, "1.8 mA"),
            (47.0, Unit::Volt, "47 V"),
            (0.024, Unit::Second, "24 ms"),
            (0.35, Unit::Ohm, "0.35 Ω"),
            (0.3, Unit::Ampere, "300 mA"),
            (0.9999, Unit::Ampere, "1 A"),
            (2e8, Unit::Ohm, "200 MΩ"),
            (1666.67, Unit::Ohm, "1.67 kΩ"),
            (230.4, Unit::Volt, "230 V"),
            (-0.0, Unit::Volt, "0 V"),
            (-1e-30, Unit::Volt, "0 V"),
            (-5.0, Unit::Volt, "-5 V"),
            (f64::INFINITY, Unit::Ohm, "open"),
            (f64::NAN, Unit::Volt, "not a number"),
            (2200.0, Unit::Watt, "2.2 kW"),
            (0.64, Unit::None, "0.64"),
        ] {
            assert_eq!(format(value, unit), text);
        }
    }
}
