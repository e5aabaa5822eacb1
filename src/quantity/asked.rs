//! What a test asks for: the unit of its reading, the unit of a bare number, the words it may be.

use super::reading::{Unit, Word};
use super::units;

/// What a reading may be.
#[derive(Clone, Debug, PartialEq)]
pub struct Asked {
    /// SI unit of the reading; `Unit::None`: words alone.
    pub unit: Unit,
    /// How a bare number's unit is written: `V`, `A`, `mA`, `MΩ`, `Ω`, `ms`, `s`.
    pub bare: String,
    /// SI value of one bare unit.
    pub scale: f64,
    /// Words that are readings of this test; `unknown` always is one.
    pub words: Vec<Word>,
    /// `yes` and `no` stand for `holds` and `trips`.
    pub yes_is_holds: bool,
    /// Upper end of the instrument's range, SI: what `OL` is above.
    pub over: Option<f64>,
}

impl Asked {
    /// What a quantity of contract §3 asks: `volts`, `amps`, `insulation`, `continuity`, `loop`, `trip-time`,
    /// `ramp`, `holds`, `lamp`, `seen`.
    ///
    /// `bare` is the unit that a bare number takes (the test's `unit`; empty or unknown: the SI unit); `over` the
    /// upper end of the instrument's range, SI. Of volts, `trips` is a reading with a low-z meter alone
    /// (`low_z`). A quantity that is not known asks for a pure number.
    pub fn new(quantity: &str, bare: &str, low_z: bool, over: Option<f64>) -> Self {
        let (unit, words): (Unit, &[Word]) = match quantity {
            "volts" if low_z => (Unit::Volt, &[Word::Trips]),
            "volts" => (Unit::Volt, &[]),
            "amps" => (Unit::Ampere, &[]),
            "insulation" | "continuity" => (Unit::Ohm, &[]),
            "loop" => (Unit::Ohm, &[Word::Trips]),
            "trip-time" => (Unit::Second, &[Word::NoTrip]),
            "ramp" => (Unit::Ampere, &[Word::NoTrip]),
            "holds" => (Unit::None, &[Word::Holds, Word::Trips]),
            "lamp" => (Unit::None, &[Word::Dims, Word::Brightens, Word::None]),
            "seen" => (Unit::None, &[Word::Yes, Word::No]),
            _ => (Unit::None, &[]),
        };
        let (bare, scale) = match units::read(bare) {
            Some(units::Read {
                unit: Some(found),
                scale,
                ..
            }) if found == unit => (bare.to_owned(), scale),
            _ => (units::symbol(unit).to_owned(), 1.0),
        };
        Self {
            unit,
            bare,
            scale,
            words: words.to_vec(),
            yes_is_holds: quantity == "holds",
            over: over.filter(|o| o.is_finite() && *o > 0.0),
        }
    }

    /// Whether a number can answer.
    pub fn takes_numbers(&self) -> bool {
        self.unit != Unit::None
    }

    /// What may be typed, for hints: `a value in MΩ (0.35, 350k, >200), …`.
    pub fn example(&self) -> String {
        let mut parts: Vec<String> = Vec::new();
        if self.takes_numbers() {
            let sample = match self.unit {
                Unit::Volt => "47 V or 0.9 V",
                Unit::Ampere => "1.8 mA or 0.4 A",
                Unit::Ohm if self.scale >= 1e6 => "0.35 MΩ, 350k or >200 MΩ",
                Unit::Ohm => "0.35 Ω, 1.2k or OL",
                Unit::Second => "24 ms or 0.3 s",
                Unit::Watt => "60 W",
                Unit::None => "3",
            };
            parts.push(format!(
                "a value such as {sample} (a bare number is {})",
                self.bare
            ));
        }
        parts.extend(self.words.iter().map(|w| format!("`{}`", w.text())));
        if self.yes_is_holds {
            parts.push("`yes` (holds)".into());
        }
        parts.push("`unknown`".into());
        let last = parts.pop().unwrap_or_default();
        if parts.is_empty() {
            last
        } else {
            format!("{} or {last}", parts.join(", "))
        }
    }
}
