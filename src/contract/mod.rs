//! Contraction plans run on an algebra.
