//! The prompt as a person types at it.
