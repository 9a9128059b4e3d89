//! Contraction orders: shapes, plans, what they cost and how to find good ones.

mod cost;
mod plan;
mod shape;

pub use cost::Cost;
pub use plan::Plan;
pub use shape::Shape;
