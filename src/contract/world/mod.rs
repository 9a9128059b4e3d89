//! The team of processes that an MPI launcher started, where this build knows MPI.

#[cfg(not(feature = "mpi"))]
mod disabled;
#[cfg(feature = "mpi")]
mod enabled;

#[cfg(not(feature = "mpi"))]
pub use disabled::world;
#[cfg(feature = "mpi")]
pub use enabled::world;
