//! Networks with bulk legs as codes: what the bulk encodes, what can be recovered, how many
//! erasures survive.
pub mod bounds;
mod checks;
mod dense;
pub mod distance;
pub mod enumerator;
pub mod erasure;
pub mod greedy;
pub mod isometry;
pub mod pattern;
pub mod pauli;
pub mod push;
pub mod reach;
pub mod recover;
#[cfg(test)]
mod samples;
mod short;
mod span;
pub mod strata;
mod the_code;
pub mod tree;

pub use checks::{Checks, Held};
pub use dense::Budget;
pub use the_code::{Code, CodeError};
