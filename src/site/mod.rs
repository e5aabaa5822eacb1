//! The installation: what is there and how it hangs together (contract §1).

pub mod model;

pub use model::*;
