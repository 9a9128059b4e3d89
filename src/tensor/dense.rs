//! Dense tensors whose axes carry labels.

use super::Label;
use ndarray::ArrayD;
use num_complex::Complex64;
use thiserror::Error;

/// What can be wrong with a labelled tensor.
#[derive(Debug, Error, Clone, PartialEq)]
#[non_exhaustive]
pub enum TensorError {
    /// The number of labels differs from the number of axes.
    #[error("{labels} labels were given for an array of {axes} axes; give one label an axis")]
    LabelCount {
        /// Labels given.
        labels: usize,
        /// Axes of the array.
        axes: usize,
    },
}

/// Numbers, real where they are real.
#[derive(Debug, Clone, PartialEq)]
pub enum Dense {
    /// All entries are real.
    Real(ArrayD<f64>),
    /// Complex entries.
    Complex(ArrayD<Complex64>),
}

impl Dense {
    /// Sizes of the axes.
    pub fn shape(&self) -> &[usize] {
        match self {
            Dense::Real(a) => a.shape(),
            Dense::Complex(a) => a.shape(),
        }
    }
    /// The same numbers as complex ones.
    pub fn to_complex(&self) -> ArrayD<Complex64> {
        match self {
            Dense::Real(a) => a.mapv(|x| Complex64::new(x, 0.0)),
            Dense::Complex(a) => a.clone(),
        }
    }
}

/// A dense tensor with one label an axis. Invariant: as many labels as axes. A label may
/// stand twice (the diagonal of those two axes).
#[derive(Debug, Clone, PartialEq)]
pub struct DenseTensor {
    labels: Vec<Label>,
    data: Dense,
}

impl DenseTensor {
    /// Joins labels and numbers.
    ///
    /// # Errors
    /// [`TensorError::LabelCount`] where their counts differ.
    pub fn new(labels: Vec<Label>, data: Dense) -> Result<Self, TensorError> {
        if labels.len() != data.shape().len() {
            return Err(TensorError::LabelCount { labels: labels.len(), axes: data.shape().len() });
        }
        Ok(Self { labels, data })
    }
    /// The labels, one an axis.
    pub fn labels(&self) -> &[Label] {
        &self.labels
    }
    /// The numbers.
    pub fn data(&self) -> &Dense {
        &self.data
    }
    /// Gives both parts back.
    pub fn into_parts(self) -> (Vec<Label>, Dense) {
        (self.labels, self.data)
    }
}
