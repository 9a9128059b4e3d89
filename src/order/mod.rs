//! Contraction orders: shapes, plans, what they cost and how to find good ones.

mod cost;
mod error;
mod file;
mod greedy;
mod magnitude;
mod net;
mod plan;
mod search;
mod shape;

pub use cost::{Cost, cost};
pub use error::OrderError;
pub use file::{load, save};
pub use plan::Plan;
pub use search::{Found, Objective, Request, search};
pub use shape::Shape;
