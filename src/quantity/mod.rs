//! What a number is: units, parsed readings, and how people write both (contract §4).

mod asked;
mod format;
mod parse;
mod reading;
pub mod suggest;
mod units;

#[cfg(test)]
mod parse_tests;

pub use asked::Asked;
pub use format::{format, format_parsed};
pub use parse::{ReadingError, ReadingFault, parse};
pub use reading::{Parsed, ParsedValue, Unit, Word};
pub use suggest::{nearest, nearest_text};
pub use units::symbol;
