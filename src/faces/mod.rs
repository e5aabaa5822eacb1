//! What a person or a program sees: prompt, pipe, text, audit, demo.

pub mod pipe;
