//! The question and the answer.

use crate::block::Block;
use crate::order::Shape;
use crate::tensor::DenseTensor;
use std::path::PathBuf;
use std::sync::Arc;

/// A contraction without a network around it: labels, sizes, numbers.
#[derive(Debug, Clone)]
pub struct Problem {
    /// Labels and sizes.
    pub shape: Shape,
    /// The numbers of each tensor of the shape, in its order.
    pub blocks: Vec<Arc<Block>>,
}

/// The kind of tensors that a plan is run on.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Default)]
#[non_exhaustive]
pub enum Kind {
    /// Sparse where that is estimated to be cheaper, dense elsewhere.
    #[default]
    Automatic,
    /// Dense throughout.
    Dense,
}

/// How exact the numbers are.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Default)]
pub enum Precision {
    /// 53 bits.
    #[default]
    Double,
    /// 24 bits, half the memory.
    Single,
}

/// How a plan is to be run. The default sets no limit.
#[derive(Debug, Clone, Default)]
pub struct Request {
    /// Most bytes of tensors that may be alive at once; no limit where it is `None`. A plan
    /// that takes more is sliced further.
    pub memory: Option<u64>,
    /// Folder for partial sums of the slices; what is found there is not done again.
    pub checkpoint: Option<PathBuf>,
    /// The kind of tensors.
    pub kind: Kind,
    /// How exact the numbers are.
    pub precision: Precision,
}

/// What running a plan takes.
#[derive(Debug, Clone, PartialEq)]
pub struct Forecast {
    /// The plan that would be run: the one given, sliced further where the memory asks for it.
    pub plan: crate::order::Plan,
    /// Most bytes of tensors alive at once, blocks and partial sums included.
    pub bytes: u64,
    /// Estimated seconds on one thread, all slices together, for dense tensors.
    pub seconds: f64,
    /// Number of slices.
    pub slices: u128,
}

/// The value of a contraction: `tensor`·10^`log10_scale`.
#[derive(Debug, Clone, PartialEq)]
pub struct Outcome {
    /// Axes in the order of the shape's open labels. Real where all blocks are real.
    pub tensor: DenseTensor,
    /// 0 wherever the value fits the range of a double.
    pub log10_scale: f64,
    /// Scalar multiply-adds of the steps, all slices together, counted as for dense tensors:
    /// what [`crate::order::cost`] says of the plan that was run.
    pub multiply_adds: u128,
    /// Multiply-adds really done; fewer where sparse tensors or a checkpoint saved some.
    pub done: u128,
    /// Most bytes alive at once that the run reckoned with; it took no more.
    pub peak_bytes: u64,
    /// Number of slices.
    pub slices: u128,
    /// Labels that were sliced, in the order of the plan that was run.
    pub sliced: Vec<crate::tensor::Label>,
}
