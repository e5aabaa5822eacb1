//! Straypath leads an electrician, test by safe test, from a complaint to a proved cause.
//!
//! Current goes out and must come back. The crate solves the circuit of one installation under each
//! fault hypothesis, reads off what every instrument would show, and lets real readings move the odds.
//!
//! Layers, each naming only lower ones: `quantity`, `numeric` → `knowledge` → `site` → `network` →
//! `faults` | `checks` → `safety` | `belief` → `plan` → `session` → `faces`.

pub mod belief;
pub mod checks;
pub mod faces;
pub mod faults;
pub mod knowledge;
pub mod network;
pub mod numeric;
pub mod plan;
pub mod quantity;
pub mod safety;
pub mod session;
pub mod site;
