//! How to compute with numbers: elimination, distributions, random streams, with the same bits everywhere.

pub mod fold;
pub mod dist;
mod normal;
pub mod quadrature;
pub mod rng;
pub mod special;
pub mod stats;

pub use rng::Stream;
