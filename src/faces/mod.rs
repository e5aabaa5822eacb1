//! What a person or a program sees: prompt, pipe, text, audit, demo.

pub mod pipe;
pub mod prompt;
pub mod sites;
pub mod text;
pub mod words;
mod trouble;

pub use trouble::Trouble;
