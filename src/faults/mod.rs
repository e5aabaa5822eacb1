//! What may be wrong here: fault kinds at places, their edits, priors, pairs.

pub mod apply;
mod build;
pub mod describe;
pub mod enumerate;
mod error;
pub mod fault;
pub mod pairs;
mod telltale;
mod valid;

pub use apply::{edits, manner, value_prior};
pub use describe::{describe, repair_text};
pub use enumerate::{Hypothesis, NOTHING_WRONG, Space, UNLISTED, enumerate};
pub use error::FaultError;
pub use fault::Fault;
pub use pairs::{PairList, best_first};
pub use telltale::{Telltale, looks, outcomes};

#[cfg(test)]
mod tests;
