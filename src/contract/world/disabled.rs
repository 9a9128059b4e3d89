//! A build without MPI.

use crate::contract::{ContractError, Team};

/// The team of all processes that the MPI launcher started.
///
/// # Errors
/// [`ContractError::NoMpi`]: this build does not know MPI.
pub fn world() -> Result<Box<dyn Team>, ContractError> {
    Err(ContractError::NoMpi)
}
