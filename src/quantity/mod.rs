//! What a number is: units, parsed readings, and how people write both (contract §4).

mod reading;
pub mod suggest;

pub use reading::{Parsed, ParsedValue, Unit, Word};
pub use suggest::{nearest, nearest_text};
