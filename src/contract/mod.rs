//! Contraction plans run on an algebra.
//!
//! [`run`] takes a network, [`solve()`] a bare [`Problem`]. A plan is compiled once (labels of
//! every intermediate, order of their axes, memory) and then run slice by slice on an
//! [`Algebra`]: dense numbers, real where all blocks are real.
//!
//! The result is tensor·10^log10_scale. Every intermediate is held as numbers near 1 times a
//! power of two, so nothing overflows or vanishes on the way and integers up to 2^53 stay
//! exact. The same plan gives the same bits whatever the number of threads.

mod algebra;
mod arena;
mod checkpoint;
mod dense;
mod error;
mod layout;
mod program;
mod record;
mod request;
mod schedule;
mod slices;
mod slicing;
mod solve;
mod sparse;
mod sums;
mod team;
mod total;
mod walk;
mod world;

pub use algebra::Algebra;
pub use error::ContractError;
pub use program::{Leaf, Step};
pub use request::{Forecast, Kind, Outcome, Precision, Problem, Request};
pub use solve::{forecast, on_algebra, run, share, solve};
pub use team::{Alone, Team};
pub use world::world;
