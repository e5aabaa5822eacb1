//! A visit: commands in, events to the log, state and views out.

pub mod chain;
pub mod clock;
pub mod command;
mod error;
pub mod event;
pub mod log;
pub mod view;

pub use clock::Clock;
pub use error::{ErrorCode, SessionError};
pub use event::Event;
pub use log::Log;
