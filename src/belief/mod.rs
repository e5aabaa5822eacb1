//! What is likely: odds over hypotheses and their unknowns, moved by readings.
//!
//! One vector of unknowns per hypothesis for the whole visit, shared by all readings. Evidence is the mean
//! over weighted draws of the readings' joint likelihood; where prior draws miss sharp readings, draws are
//! made anew round the mode (Laplace, then Student-t importance sampling). Pairs enter when a bound says
//! that they may matter; what was not examined is told.

pub mod cloud;
pub mod complaint;
mod explain;
pub mod fit;
pub mod forecast;
pub mod model;
mod nearness;
pub mod odds;
mod pairs;
pub mod reading;
pub mod sight;
pub mod state;
pub mod unlisted;
pub mod world;

pub use complaint::Complaint;
pub use forecast::{Forecast, ForecastTable};
pub use model::{Model, ModelError};
pub use reading::{Group, Reading};
pub use state::{Belief, Candidate, Cause, Odds};
pub use world::World;
