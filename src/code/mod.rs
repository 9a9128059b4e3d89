//! Bulk legs as a quantum code.
