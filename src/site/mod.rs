//! The installation: what is there and how it hangs together (contract §1).

pub mod file;
pub mod condition;
pub mod lookup;
pub mod model;
pub mod place;

pub use file::{Known, SiteError, SiteWarning, load_path, load_str, load_value};
pub use condition::holds;
pub use lookup::lines_of;
pub use model::*;
pub use place::{Place, Spot, circuit_pairs, places};
