//! Dense linear algebra with checked spectra: an ndarray face over a pure-Rust backend.
//!
//! | question | member | cost (m ≥ n) |
//! |---|---|---|
//! | A·B, any strides | [`product()`], [`product_into`] | m·k·n |
//! | singular values | [`singular_values`] | about 8/3·m·n² |
//! | A = U·diag(s)·V† | [`thin_svd`] | about 10·m·n² |
//! | eigenvalues of A = A† | [`hermitian_eigenvalues`], [`hermitian_eigen`] | about 4/3·n³, 9·n³ |
//! | nearest isometry | [`polar()`] | as [`thin_svd`] |
//! | A = Q·R | [`qr()`] | about 4·m·n² |
//! | independent blocks of a matrix | [`blocks()`] | one pass over the entries |
//!
//! Flat, rank-deficient and zero matrices are the normal case here. The backend's default
//! singular value routine is wrong on some of them: its divide-and-conquer step can report
//! one spurious value of 1e-5 to 1e-4 times the largest. Every decomposition therefore goes
//! through one wrapper that keeps that step switched off, holds the spectrum against the
//! Frobenius norm, and falls back to slower and simpler methods.
//!
//! The result of every function has the same bits whatever the number of threads.

mod blocks;
mod error;
mod hermitian;
mod jacobi;
mod polar;
mod product;
mod qr;
mod scalar;
mod singular;
#[cfg(test)]
mod testing;
mod view;

pub use blocks::{Patch, blocks};
pub use error::LinalgError;
pub use hermitian::{hermitian_eigen, hermitian_eigenvalues};
pub use jacobi::jacobi_singular_values;
pub use polar::polar;
pub(crate) use product::{Operand, Target, multiply, multiply_here};
pub use product::{product, product_into};
pub use qr::{Qr, qr};
pub use scalar::Scalar;
pub use singular::{Svd, rank, singular_values, thin_svd};
