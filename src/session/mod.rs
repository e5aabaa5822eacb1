//! A visit: commands in, events to the log, state and views out.

pub mod chain;
pub mod clock;
pub mod command;
pub mod engine;
mod error;
pub mod event;
pub mod limits;
pub mod log;
pub mod predict;
pub mod rechecks;
pub mod view;
pub mod vocabulary;

pub use clock::Clock;
pub use engine::Engine;
pub use error::{ErrorCode, SessionError};
pub use event::Event;
pub use log::Log;
