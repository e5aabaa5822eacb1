//! A number of the site file: a value or `{"low", "high"}`; null and absent are not known.

use serde::Deserialize;
use serde::de::{self, MapAccess, Visitor, value::MapAccessDeserializer};

/// A number as written.
#[derive(Clone, Copy, Debug, PartialEq)]
pub enum Num {
    /// One value.
    Value(f64),
    /// A range.
    Range(f64, f64),
}

#[derive(Deserialize)]
#[serde(deny_unknown_fields)]
struct RangeForm {
    low: f64,
    high: f64,
}

impl<'de> Deserialize<'de> for Num {
    fn deserialize<D: de::Deserializer<'de>>(deserializer: D) -> Result<Self, D::Error> {
        struct NumVisitor;
        impl<'de> Visitor<'de> for NumVisitor {
            type Value = Num;
            fn expecting(&self, f: &mut std::fmt::Formatter<'_>) -> std::fmt::Result {
                f.write_str("a number, null, or {\"low\": …, \"high\": …}")
            }
            fn visit_f64<E: de::Error>(self, v: f64) -> Result<Num, E> {
                Ok(Num::Value(v))
            }
            fn visit_i64<E: de::Error>(self, v: i64) -> Result<Num, E> {
                Ok(Num::Value(v as f64))
            }
            fn visit_u64<E: de::Error>(self, v: u64) -> Result<Num, E> {
                Ok(Num::Value(v as f64))
            }
            fn visit_map<A: MapAccess<'de>>(self, map: A) -> Result<Num, A::Error> {
                let range = RangeForm::deserialize(MapAccessDeserializer::new(map))?;
                Ok(Num::Range(range.low, range.high))
            }
        }
        deserializer.deserialize_any(NumVisitor)
    }
}

/// What a number may be.
#[derive(Clone, Copy, Debug)]
pub struct Bounds {
    /// What it is, as in "a length".
    pub what: &'static str,
    /// Unit for messages.
    pub unit: &'static str,
    /// Least real value; zero here admits zero.
    pub least: f64,
    /// Beyond this nothing is real.
    pub most: f64,
}

impl Bounds {
    /// Why `value` cannot be, and the cure.
    pub fn refuse(&self, value: f64) -> Option<(String, String)> {
        let Self {
            what,
            unit,
            least,
            most,
        } = *self;
        if !value.is_finite() {
            Some((
                format!("{what} must be a finite number"),
                "leave the key out if it is not known".into(),
            ))
        } else if value < 0.0 {
            Some((
                format!("{value} {unit}: {what} cannot be negative"),
                "write it without the sign".into(),
            ))
        } else if value == 0.0 && least > 0.0 {
            Some((
                format!("0 {unit}: {what} must be above zero"),
                "measure it, or leave the key out: then it is taken as not known".into(),
            ))
        } else if value < least || value > most {
            Some((
                format!(
                    "{value} {unit}: {what} is outside anything real ({least} to {most} {unit})"
                ),
                format!("check the unit: this key is in {unit}"),
            ))
        } else {
            None
        }
    }
}

const fn bounds(what: &'static str, unit: &'static str, least: f64, most: f64) -> Bounds {
    Bounds {
        what,
        unit,
        least,
        most,
    }
}

/// Cable and conductor lengths.
pub const METRES: Bounds = bounds("a length", "m", 1e-6, 10_000.0);
/// Conductor sections.
pub const MM2: Bounds = bounds("a conductor's section", "mm²", 0.2, 2_000.0);
/// Device ratings.
pub const AMPS: Bounds = bounds("a rated current", "A", 0.1, 6_300.0);
/// Residual ratings.
pub const MILLIAMPS: Bounds = bounds("a residual rating", "mA", 1.0, 30_000.0);
/// Supply volts.
pub const VOLTS: Bounds = bounds("a supply voltage", "V", 40.0, 1_000.0);
/// Supply frequency.
pub const HERTZ: Bounds = bounds("a supply frequency", "Hz", 10.0, 400.0);
/// Ratio of reactance to resistance.
pub const RATIO: Bounds = bounds("a ratio", "to 1", 0.0, 100.0);
/// Resistances of earths, pipes and the network; zero becomes a microhm.
pub const OHMS: Bounds = bounds("a resistance", "Ω", 0.0, 1e12);
/// Equipment power.
pub const WATTS: Bounds = bounds("a power", "W", 0.01, 1e7);
