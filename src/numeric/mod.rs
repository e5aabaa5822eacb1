//! How to compute with numbers: elimination, distributions, random streams, with the same bits everywhere.

pub mod dist;
pub mod fold;
mod normal;
pub mod quadrature;
pub mod rng;
pub mod special;
pub mod stats;

pub use rng::Stream;
