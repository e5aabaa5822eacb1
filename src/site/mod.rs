//! The installation: what is there and how it hangs together (contract §1).

pub mod condition;
pub mod embedded;
pub mod file;
pub mod interview;
pub mod lookup;
pub mod model;
pub mod names;
pub mod place;
#[cfg(test)]
pub mod samples;
pub mod spot;
pub mod terminals;
pub mod topology;
pub mod words;

pub use condition::holds;
pub use embedded::{embedded, embedded_names};
pub use file::{Known, LoadedFile, SiteError, SiteWarning, load_path, load_str, load_value};
pub use interview::{AnswerError, AnswerKind, Interview, Question};
pub use lookup::lines_of;
pub use model::*;
pub use names::name_of;
pub use place::{Place, circuit_pairs, places};
pub use spot::{Spot, spots};
pub use terminals::{devices, ends, terminals};
pub use topology::{Joint, Topology};
pub use words::{Words, words};
