//! Patches of tilings: who is whose neighbour, in which order the open sides follow.
//!
//! [`grow()`] lays tiles ring by ring and decides by counting alone, never by coordinates, who
//! touches whom; the result is a [`Patch`]. [`geometry`] computes places afterwards, for
//! drawing only.

pub mod geometry;
mod grow;
mod patch;
mod regular;

pub use grow::{Bounds, Centre, Growth, Rule, grow, grow_within};
pub use patch::{Patch, Side};
pub use regular::{Curvature, Tiling, TilingError};
