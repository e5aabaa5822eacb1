//! Site files: from the JSON as given to a checked `Site`, or one precise error (contract §1).

mod boards;
mod circuits;
mod devices;
mod error;
mod feeds;
mod form;
mod ids;
mod known;
mod load;
mod number;
mod reader;
mod rest;

pub use error::{SiteError, SiteWarning};
pub use known::Known;
pub use load::{LoadedFile, MOST_BYTES, SCHEMA, load_path, load_str, load_value};

#[cfg(test)]
mod tests;
