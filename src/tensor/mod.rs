//! Labelled dense tensors: what a leg is called, which numbers a tensor holds, how two
//! tensors are joined.

mod dense;
mod label;

pub use dense::{Dense, DenseTensor, TensorError};
pub use label::Label;
