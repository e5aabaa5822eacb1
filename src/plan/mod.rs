//! Which cleared check tells most per minute, and when to stop.

pub mod choose;
pub mod exact;
pub mod information;
mod mixture;
pub mod order;
pub mod pair;
mod panels;
pub mod scope;
pub mod table;
pub mod verdict;

pub use choose::{Advice, Now, Plan, minutes_of, plan};
pub use scope::shortlist;
pub use verdict::{Verdict, suspect, verdict};
