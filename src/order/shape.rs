//! What an order is sought for: labels and sizes, no numbers.

use crate::tensor::Label;

/// The shape of a contraction.
///
/// Labels are numbered 0..sizes.len(). A label in `open` stays; every other label is summed
/// once all tensors that hold it are one. A label may stand on any number of tensors, and
/// twice on one (its diagonal).
#[derive(Debug, Clone, PartialEq, Eq, Default)]
pub struct Shape {
    /// Size of each label.
    pub sizes: Vec<u64>,
    /// Labels of each tensor, in the order of its axes.
    pub tensors: Vec<Vec<Label>>,
    /// Labels that stay open, in the order of the result's axes.
    pub open: Vec<Label>,
}
