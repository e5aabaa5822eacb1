//! What the trade knows, as data: fault kinds, checks, equipment, symptoms, limits, instruments.

mod braces;
mod calibration;
mod diagnose;
mod issue;
mod library;
pub mod list;
mod parse;
pub mod procedure;
pub mod records;
mod source;
pub mod template;
mod validate;
mod validate_checks;
mod validate_faults;
pub mod words;

pub use issue::{Issue, KnowledgeError};
pub use library::Knowledge;
pub use procedure::{
    AllWord, Hookup, Load, Meter, MeterWord, Provoke, Setup, SourceMode, UnplugSet,
};
pub use records::*;
pub use template::{Unfilled, fill};
