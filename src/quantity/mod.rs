//! What a number is: units, parsed readings, and how people write both (contract §4).

mod reading;

pub use reading::{Parsed, ParsedValue, Unit, Word};
