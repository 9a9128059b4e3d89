//! The question and the answer.

use crate::block::Block;
use crate::order::Shape;
use crate::tensor::DenseTensor;
use std::sync::Arc;

/// A contraction without a network around it: labels, sizes, numbers.
#[derive(Debug, Clone)]
pub struct Problem {
    /// Labels and sizes.
    pub shape: Shape,
    /// The numbers of each tensor of the shape, in its order.
    pub blocks: Vec<Arc<Block>>,
}

/// How a plan is to be run. The default sets no limit.
#[derive(Debug, Clone, Default)]
pub struct Request {
    /// Most bytes of tensors that may be alive at once; no limit where it is `None`.
    pub memory: Option<u64>,
}

/// The value of a contraction: `tensor`·10^`log10_scale`.
#[derive(Debug, Clone, PartialEq)]
pub struct Outcome {
    /// Axes in the order of the shape's open labels. Real where all blocks are real.
    pub tensor: DenseTensor,
    /// 0 wherever the value fits the range of a double.
    pub log10_scale: f64,
    /// Scalar multiply-adds done, all slices together; what [`crate::order::cost`] says.
    pub multiply_adds: u128,
    /// Most bytes of tensors alive at once.
    pub peak_bytes: u64,
}
