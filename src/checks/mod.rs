//! What can be tested here: every check of knowledge at every place it fits.

pub mod available;
pub mod catalogue;
pub mod check;
pub mod effort;
pub mod energised;
mod expand;
mod select;
pub mod sign;

pub use available::{availability, whole_kit};
pub use catalogue::{CheckError, catalogue, misfits};
pub use check::Check;
pub use effort::{transition, walk};
pub use energised::{energised, energised_in, supplied};
pub use sign::sign_at;

#[cfg(test)]
mod tests;
