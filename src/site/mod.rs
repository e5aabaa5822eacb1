//! The installation: what is there and how it hangs together (contract §1).

pub mod lookup;
pub mod model;

pub use lookup::lines_of;
pub use model::*;
