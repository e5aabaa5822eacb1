//! The pipe: one JSON object a line in, one line out (contract §6).

pub mod protocol;
pub mod serve;
