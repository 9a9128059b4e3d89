//! A contraction plan.

use crate::tensor::Label;
use serde::{Deserialize, Serialize};

/// In which order to contract, and which labels to fix.
///
/// A step names two tensors by number; the inputs are 0..n and the result of step s is
/// n + s. All tensors are used once, so n ≥ 1 tensors take n − 1 steps.
#[derive(Debug, Clone, PartialEq, Eq, Default, Serialize, Deserialize)]
pub struct Plan {
    /// The pairwise steps.
    pub steps: Vec<(u32, u32)>,
    /// Labels that are fixed to each of their values in turn, one slice for each combination
    /// (the first label's value varies slowest). Slices are summed, or laid side by side
    /// where the label is open.
    pub sliced: Vec<Label>,
}
