//! Networks with bulk legs as codes: what the bulk encodes, what can be recovered, how many
//! erasures survive.
mod checks;
mod span;
pub mod strata;

pub use checks::{Checks, Held};
