//! Labelled dense tensors: what a leg is called, which numbers a tensor holds, how two
//! tensors are joined.
//!
//! | question | member |
//! |---|---|
//! | axes in another order | [`permuted`] |
//! | diagonals, traces and sums of one tensor | [`reduced`] |
//! | two tensors into one | [`contract_pair`] |

mod dense;
mod join;
mod label;
mod pair;
mod permute;
mod reduce;

pub use dense::{Dense, DenseTensor, TensorError};
pub(crate) use join::{Join, Leg, Loops};
pub use label::Label;
pub use pair::contract_pair;
pub(crate) use permute::gather;
pub use permute::permuted;
pub(crate) use reduce::largest;
pub use reduce::reduced;
