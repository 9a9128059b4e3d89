//! The polar factor.

use super::{LinalgError, Scalar, product, thin_svd};
use ndarray::{Array2, ArrayView2};

/// The isometry nearest to A in the Frobenius norm: U·V† of A = U·diag(s)·V†, shape (m, n).
///
/// For m ≥ n its columns are orthonormal, else its rows. It is unique where A has full rank;
/// elsewhere one of several. Cost as [`thin_svd`]. SIAM J. Sci. Stat. Comput. 7, 1160 (1986).
///
/// # Errors
/// As [`thin_svd`].
pub fn polar<T: Scalar>(a: &ArrayView2<'_, T>) -> Result<Array2<T>, LinalgError> {
    let svd = thin_svd(a)?;
    Ok(product(&svd.u.view(), &svd.vt.view()))
}
