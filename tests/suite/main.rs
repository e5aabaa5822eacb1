//! The crate seen from outside: one binary, so that it links once.
#![allow(clippy::unwrap_used)]

mod architecture;
mod bad_knowledge;
mod knowledge_on_sites;
mod pipe;
mod prompt;
mod reference;
mod source;
mod terminal;
