//! Boundary regions to entropies, with evidence.
//!
//! The state is the network read as a vector on its open legs; bulk legs that a region does
//! not name belong to its complement, which holds the reference that they are entangled with.
//! [`Asker`] (or [`of_region`] for a single question) takes the cheapest evidence that
//! suffices:
//!
//! 1. [`cut`]: the minimal cut, always an upper bound;
//! 2. [`closure`]: isometries absorbed from both sides; what is left is the core ([`Split`]);
//! 3. [`stabilizer`]: ranks over prime fields, where all tensors of a piece are stabilizer
//!    states;
//! 4. contraction of each distinct piece of the core and its singular values, block by block;
//! 5. on request an estimate from random vectors;
//! 6. proven [`bounds`], with the price of the exact answer, where nothing else fits.
//!
//! All intervals of a boundary at once: [`Intervals`], [`intervals::closed_from`]. Derived
//! measures: [`measure`]. Records that can be checked without trust: [`Certificate`].
//! Averages over positions and their logarithmic law: [`fit`].

mod answer;
mod ask;
mod bounds;
pub mod certificate;
pub mod closure;
mod contraction;
mod copies;
pub mod cut;
mod decompose;
mod estimate;
mod fit;
mod flow;
pub mod intervals;
pub mod measure;
mod negativity;
mod planar;
mod sectors;
mod solve;
mod spectrum;
pub mod stabilizer;
#[cfg(test)]
mod testing;
mod the_core;
mod wires;

pub use answer::{Answer, EntropyError, Evidence, Part, Price, Request, Unsolved};
pub use ask::{Asker, of_region};
pub use bounds::bounds;
pub use certificate::Certificate;
pub use fit::{LogFit, fit};
pub use intervals::Intervals;
pub use planar::Planar;
pub use spectrum::{Level, Spectrum};
pub use the_core::{Core, Piece, Split, split};
pub use wires::{End, Node, Wires};
