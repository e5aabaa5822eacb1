//! What may be wrong here: fault kinds at places, their edits, priors, pairs.

pub mod fault;

pub use fault::Fault;
