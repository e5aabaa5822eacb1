//! What the trade knows, as data: fault kinds, checks, equipment, symptoms, limits, instruments.

pub mod procedure;
pub mod records;

pub use procedure::{Hookup, Load, Meter, Provoke, Setup, SourceMode, UnplugSet};
pub use records::*;
