//! Units and prefixes as people write them.

use super::reading::{Unit, Word};

/// What stands behind a number.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Read {
    /// The unit; `None`: a lone prefix, or nothing.
    pub unit: Option<Unit>,
    /// Factor of the prefix.
    pub scale: f64,
    /// A prefix was written.
    pub prefixed: bool,
}

/// The SI symbol.
pub fn symbol(unit: Unit) -> &'static str {
    match unit {
        Unit::Volt => "V",
        Unit::Ampere => "A",
        Unit::Ohm => "Ω",
        Unit::Second => "s",
        Unit::Watt => "W",
        Unit::None => "",
    }
}

/// What a unit measures, for messages.
pub fn measures(unit: Unit) -> &'static str {
    match unit {
        Unit::Volt => "volts",
        Unit::Ampere => "amperes",
        Unit::Ohm => "ohms",
        Unit::Second => "seconds",
        Unit::Watt => "watts",
        Unit::None => "a word",
    }
}

/// Reads `kΩ`, `mA`, `Mohm`, `k`, `V`, …; `None`: not a unit of this program.
///
/// `m` is milli and `M` mega whatever the test; both Ω signs, `ohm`, `ohms` and `R` are ohms.
pub fn read(text: &str) -> Option<Read> {
    if let Some(unit) = base(text) {
        return Some(Read {
            unit,
            scale: 1.0,
            prefixed: false,
        });
    }
    let mut rest = text.chars();
    let scale = prefix(rest.next()?)?;
    let tail = rest.as_str().trim_start();
    base(tail).map(|unit| Read {
        unit,
        scale,
        prefixed: true,
    })
}

fn prefix(c: char) -> Option<f64> {
    Some(match c {
        'p' => 1e-12,
        'n' => 1e-9,
        // Micro sign, Greek mu, and the letter that stands for them on a keyboard.
        '\u{b5}' | '\u{3bc}' | 'u' => 1e-6,
        'm' => 1e-3,
        'k' | 'K' => 1e3,
        'M' => 1e6,
        'G' => 1e9,
        'T' => 1e12,
        _ => return None,
    })
}

/// A unit without prefix; `Some(None)` for nothing.
fn base(text: &str) -> Option<Option<Unit>> {
    Some(match text {
        "" => None,
        // Greek capital omega, and the ohm sign.
        "\u{3a9}" | "\u{2126}" | "R" => Some(Unit::Ohm),
        "v" | "V" => Some(Unit::Volt),
        "a" | "A" => Some(Unit::Ampere),
        "s" | "S" => Some(Unit::Second),
        "w" | "W" => Some(Unit::Watt),
        _ => match text.to_lowercase().as_str() {
            "ohm" | "ohms" => Some(Unit::Ohm),
            "volt" | "volts" => Some(Unit::Volt),
            "amp" | "amps" | "ampere" | "amperes" => Some(Unit::Ampere),
            "sec" | "second" | "seconds" => Some(Unit::Second),
            "watt" | "watts" => Some(Unit::Watt),
            _ => return None,
        },
    })
}

impl Word {
    /// The word of the contract.
    pub fn text(self) -> &'static str {
        match self {
            Self::Holds => "holds",
            Self::Trips => "trips",
            Self::NoTrip => "no trip",
            Self::Yes => "yes",
            Self::No => "no",
            Self::Dims => "dims",
            Self::Brightens => "brightens",
            Self::None => "none",
            Self::Open => "open",
            Self::Unknown => "unknown",
        }
    }

    /// Reads a word as people write it, in small letters with single spaces.
    pub fn read(text: &str) -> Option<Self> {
        Some(match text {
            "holds" | "held" | "hold" => Self::Holds,
            "trips" | "trip" | "tripped" => Self::Trips,
            "no trip" | "no-trip" | "no trips" | "not tripped" => Self::NoTrip,
            "yes" | "y" => Self::Yes,
            "no" | "n" => Self::No,
            "dims" | "dim" | "dimmed" => Self::Dims,
            "brightens" | "brighter" | "brightened" => Self::Brightens,
            "none" | "no change" => Self::None,
            "open" | "open circuit" => Self::Open,
            "unknown" => Self::Unknown,
            _ => return None,
        })
    }
}
