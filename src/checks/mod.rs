//! What can be tested here: every check of knowledge at every place it fits.

pub mod check;

pub use check::Check;
