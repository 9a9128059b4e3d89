//! Networks whose tensors are stabilizer states: exact entropies from ranks over GF(p).
//!
//! [`states`] contracts a network to the stabilizer group of its state, one group a prime;
//! [`State::entropy`] answers one bipartition, [`Clipped`] all intervals at once.

mod clipped;
mod contract;
mod digits;
mod state;
mod tableau;

pub use clipped::Clipped;
pub use contract::{StabilizerError, has_states, primes, states};
pub use state::State;
