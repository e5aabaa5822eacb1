//! What a person or a program sees: prompt, pipe, text, audit, demo.

pub mod audit;
pub mod demo;
pub mod pipe;
pub mod prompt;
pub mod sites;
pub mod text;
mod trouble;
pub mod words;

pub use trouble::Trouble;
