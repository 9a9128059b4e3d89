//! What can go wrong in a decomposition.

use thiserror::Error;

/// Why a decomposition was not given.
#[derive(Debug, Error, Clone, PartialEq)]
#[non_exhaustive]
pub enum LinalgError {
    /// An entry is NaN or infinite.
    #[error("entry ({row}, {column}) of a {rows}×{columns} matrix is {value}, not a finite number")]
    NotFinite {
        /// Row of the entry.
        row: usize,
        /// Column of the entry.
        column: usize,
        /// Rows of the matrix.
        rows: usize,
        /// Columns of the matrix.
        columns: usize,
        /// The entry as text.
        value: String,
    },
    /// A square matrix was needed.
    #[error("a square matrix is needed here, but this one is {rows}×{columns}")]
    NotSquare {
        /// Rows of the matrix.
        rows: usize,
        /// Columns of the matrix.
        columns: usize,
    },
    /// No method gave a spectrum that agrees with the matrix's own norm.
    #[error(
        "no method gave singular values of a {rows}×{columns} matrix whose squares sum to its \
         squared norm {expected:e}; the nearest sum was {found:e}"
    )]
    Untrusted {
        /// Rows of the matrix.
        rows: usize,
        /// Columns of the matrix.
        columns: usize,
        /// The squared Frobenius norm.
        expected: f64,
        /// Sum of squares of the best attempt.
        found: f64,
    },
}
