//! Contraction orders: shapes, plans, what they cost and how to find good ones.

mod anneal;
mod bisection;
mod calibrate;
mod cost;
mod elimination;
mod error;
mod exhaustive;
mod file;
mod graph;
mod greedy;
mod hypergraph;
mod kernel;
mod lower;
mod magnitude;
mod narrow;
mod net;
mod parts;
mod plan;
mod portfolio;
mod price;
mod schedule;
mod search;
mod shape;
mod slicing;
mod subsets;
mod tree;
mod windows;

pub use calibrate::{Calibration, calibrate};
pub use cost::{Cost, cost};
pub use error::OrderError;
pub use file::{load, save};
pub use plan::Plan;
pub use search::{Found, Method, Objective, Request, search};
pub use shape::Shape;
