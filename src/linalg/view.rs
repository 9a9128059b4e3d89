//! ndarray views as the backend's views, and back, without copies.

use super::{LinalgError, Scalar};
use faer::{Mat, MatMut, MatRef};
use ndarray::{Array2, ArrayView2, ArrayViewMut2};

/// The same matrix as the backend sees it.
pub(super) fn matref<'a, T: Scalar>(a: &'a ArrayView2<'_, T>) -> MatRef<'a, T> {
    let (m, n) = a.dim();
    let (rs, cs) = (a.strides()[0], a.strides()[1]);
    // SAFETY: pointer, shape and strides (in elements, possibly negative) describe exactly
    // the elements that the ndarray view may read, and the result borrows the view.
    unsafe { MatRef::from_raw_parts(a.as_ptr(), m, n, rs, cs) }
}

/// The same matrix, to be written.
pub(super) fn matmut<'a, T: Scalar>(a: &'a mut ArrayViewMut2<'_, T>) -> MatMut<'a, T> {
    let (m, n) = a.dim();
    let (rs, cs) = (a.strides()[0], a.strides()[1]);
    // SAFETY: as in `matref`; the unique borrow of the view makes this the only writer.
    unsafe { MatMut::from_raw_parts_mut(a.as_mut_ptr(), m, n, rs, cs) }
}

/// A copy in ndarray's hands.
pub(super) fn to_array<T: Scalar>(m: &Mat<T>) -> Array2<T> {
    Array2::from_shape_fn((m.nrows(), m.ncols()), |(i, j)| m[(i, j)])
}

/// Refuses NaN and infinities.
pub(super) fn finite<T: Scalar>(a: &ArrayView2<'_, T>) -> Result<(), LinalgError> {
    for ((row, column), x) in a.indexed_iter() {
        if !x.finite() {
            return Err(LinalgError::NotFinite {
                row,
                column,
                rows: a.nrows(),
                columns: a.ncols(),
                value: format!("{x:?}"),
            });
        }
    }
    Ok(())
}

/// How a decomposition is spread over threads. The number of parts depends on the size
/// alone, never on the machine, so that the result has the same bits everywhere.
pub(super) fn parts(m: usize, n: usize) -> faer::Par {
    if m.min(n) < 256 { faer::Par::Seq } else { faer::Par::rayon(2) }
}

/// Scales by a power of two so that the largest entry is about 1; squares then neither
/// overflow nor vanish. Nothing for a zero or empty matrix.
pub(super) fn balance<T: Scalar>(a: &ArrayView2<'_, T>) -> Option<(Array2<T>, i32)> {
    let top = a.iter().map(|x| x.magnitude()).fold(0.0, f64::max);
    if top == 0.0 {
        return None;
    }
    let e = (top.log2().floor() as i32).clamp(-1000, 1000);
    Some((a.mapv(|x| x.times_two_to(-e)), e))
}
