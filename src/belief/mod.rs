//! What is likely: odds over hypotheses and their unknowns, moved by readings.

pub mod odds;
