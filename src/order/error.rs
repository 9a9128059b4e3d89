//! What can go wrong with orders.

use thiserror::Error;

/// What can be wrong with a shape, a plan, a plan file or a request for one.
#[derive(Debug, Error, Clone, PartialEq)]
#[non_exhaustive]
pub enum OrderError {
    /// Nothing to contract.
    #[error("the network has no tensor; a contraction needs at least one")]
    Empty,
    /// More tensors or labels than a plan can number.
    #[error("there are {count} {what}; an order numbers at most {limit}")]
    TooMany {
        /// What there is too much of.
        what: &'static str,
        /// How many.
        count: usize,
        /// The limit.
        limit: usize,
    },
    /// A tensor names a label without a size.
    #[error("tensor {tensor} holds label {label}, but only {labels} labels have a size")]
    LabelUnknown {
        /// Number of the tensor.
        tensor: usize,
        /// The label's number.
        label: u32,
        /// Labels with a size.
        labels: usize,
    },
    /// A label of size 0.
    #[error("label {label} has size 0; sizes start at 1")]
    LabelSize {
        /// The label's number.
        label: u32,
    },
    /// An open label that no tensor holds.
    #[error("label {label} is open, but no tensor holds it")]
    OpenNowhere {
        /// The label's number.
        label: u32,
    },
    /// A label listed twice where each may stand once.
    #[error("label {label} is listed twice among the {list} labels")]
    ListedTwice {
        /// The label's number.
        label: u32,
        /// Which list.
        list: &'static str,
    },
    /// Too few or too many steps.
    #[error("the plan has {found} steps; {tensors} tensors take {}", .tensors.saturating_sub(1))]
    StepCount {
        /// Steps of the plan.
        found: usize,
        /// Tensors of the shape.
        tensors: usize,
    },
    /// A step that names a tensor that is not there (any more).
    #[error(
        "step {step} of the plan names tensor {tensor}, which was used before or is not made yet"
    )]
    StepTensor {
        /// The step, from 0.
        step: usize,
        /// The tensor's number.
        tensor: u32,
    },
    /// A sliced label that the shape does not have.
    #[error("the plan slices label {label}, but the network has {labels} labels")]
    SlicedUnknown {
        /// The label's number.
        label: u32,
        /// Labels of the shape.
        labels: usize,
    },
    /// More slices than can be counted.
    #[error("the plan's slices number more than 2^127")]
    TooManySlices,
    /// A file that cannot be read or written.
    #[error("{path}: {reason}")]
    File {
        /// The file.
        path: String,
        /// What the system says.
        reason: String,
    },
    /// A file that is no plan.
    #[error("{path} is not a plan file: {reason}")]
    Format {
        /// The file.
        path: String,
        /// Where reading it failed.
        reason: String,
    },
    /// A plan file of another version.
    #[error("{path} is a plan file of version {found}; this program reads version {known}")]
    Version {
        /// The file.
        path: String,
        /// Its version.
        found: u64,
        /// The version that is read.
        known: u64,
    },
    /// A plan for another network.
    #[error(
        "{path} holds a plan for a network of another shape ({found}; this network has {expected})"
    )]
    OtherShape {
        /// The file.
        path: String,
        /// Hash in the file.
        found: String,
        /// Hash of the network's shape.
        expected: String,
    },
    /// The exhaustive method on too many tensors.
    #[error(
        "weighing every order of these {tensors} connected tensors takes more work than was given, or sizes too large for it; take another method"
    )]
    TooWide {
        /// Tensors of the part.
        tensors: usize,
    },
    /// The memory cannot hold even a fully sliced plan.
    #[error(
        "no plan fits into {limit} elements: the result alone, or the smallest step found, takes 2^{needed:.1}"
    )]
    Memory {
        /// Elements allowed.
        limit: u64,
        /// log2 of the elements needed.
        needed: f64,
    },
    /// A name that no method has.
    #[error("there is no ordering method {name:?}; take one of {known}")]
    Method {
        /// The name.
        name: String,
        /// The names there are.
        known: String,
    },
}
