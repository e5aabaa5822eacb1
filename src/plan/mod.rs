//! Which cleared check tells most per minute, and when to stop.

pub mod exact;
pub mod information;
mod mixture;
pub mod order;
pub mod pair;
mod panels;
