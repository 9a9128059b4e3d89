//! What can go wrong in a contraction.

use crate::order::OrderError;
use thiserror::Error;

/// Why a contraction gave no result.
#[derive(Debug, Error, Clone, PartialEq)]
#[non_exhaustive]
pub enum ContractError {
    /// The plan does not contract this shape.
    #[error(transparent)]
    Plan(#[from] OrderError),
    /// As many blocks as tensors are needed.
    #[error("{blocks} blocks were given for {tensors} tensors; give one block a tensor")]
    BlockCount {
        /// Blocks given.
        blocks: usize,
        /// Tensors of the shape.
        tensors: usize,
    },
    /// A block whose legs do not fit the labels.
    #[error("tensor {tensor} has sizes {expected:?} by its labels but its block has {found:?}")]
    BlockShape {
        /// The tensor's number.
        tensor: usize,
        /// Sizes of its labels.
        expected: Vec<u64>,
        /// Sizes of the block's legs.
        found: Vec<usize>,
    },
    /// A sliced label that no tensor holds.
    #[error("the plan slices label {label}, which no tensor holds")]
    SlicedNowhere {
        /// The label's number.
        label: u32,
    },
    /// A tensor with more entries than memory can address.
    #[error("tensor {tensor} of the plan would have more than 2^{bits} entries")]
    TooLarge {
        /// The tensor's number in the plan.
        tensor: usize,
        /// log2 of the limit.
        bits: u32,
    },
    /// Not a finite number.
    #[error("tensor {tensor} (block {block:?}) holds an entry that is NaN or infinite")]
    NotFinite {
        /// The tensor's number.
        tensor: usize,
        /// Its block.
        block: String,
    },
    /// More memory than allowed.
    #[error(
        "the contraction needs {needed} bytes even when it is sliced as far as that helps, but \
         {limit} are allowed"
    )]
    Memory {
        /// Fewest bytes predicted for any slicing tried.
        needed: u64,
        /// Bytes allowed.
        limit: u64,
    },
    /// A checkpoint that cannot be read or written.
    #[error("checkpoint {path}: {reason}")]
    Checkpoint {
        /// The file or folder.
        path: String,
        /// What is wrong.
        reason: String,
    },
    /// A checkpoint of something else.
    #[error(
        "checkpoint {path} belongs to another network, plan, precision or version; give another \
         folder or remove it"
    )]
    OtherCheckpoint {
        /// The file.
        path: String,
    },
    /// Bytes from another process that make no sense.
    #[error("rank 0 cannot read a partial sum that another rank sent: {reason}")]
    Message {
        /// What is wrong.
        reason: String,
    },
    /// No MPI in this build.
    #[error(
        "this build does not know MPI; build it with --features mpi to spread work over processes"
    )]
    NoMpi,
    /// MPI does not start.
    #[error("MPI did not start, or does not let a program with several threads call it")]
    MpiStart,
    /// The caller asked to stop.
    #[error("stopped after {done} of {slices} slices")]
    Stopped {
        /// Slices finished.
        done: u128,
        /// Slices in all.
        slices: u128,
    },
}
