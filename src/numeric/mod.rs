//! How to compute with numbers: elimination, distributions, random streams, with the same bits everywhere.
