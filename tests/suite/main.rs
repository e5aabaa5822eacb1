//! The crate seen from outside: one binary, so that it links once.

mod architecture;
mod reference;
mod source;
