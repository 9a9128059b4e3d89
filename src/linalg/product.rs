//! Matrix products over any strides.

use super::Scalar;
use super::view::{matmut, matref};
use faer::linalg::matmul::matmul;
use faer::{Accum, MatMut, MatRef, Par};
use ndarray::{Array2, ArrayView2, ArrayViewMut2};

/// A·B for A of shape (m, k) and B of shape (k, n), any strides, nothing copied.
///
/// The result has the same bits whatever the number of threads. Cost m·k·n multiply-adds.
///
/// # Panics
/// Where the inner sizes differ.
///
/// ```
/// use ndarray::array;
/// let a = array![[1.0, 2.0], [3.0, 4.0]];
/// let p = lierne::linalg::product(&a.view(), &a.t());
/// assert_eq!(p, array![[5.0, 11.0], [11.0, 25.0]]);
/// ```
#[track_caller]
pub fn product<T: Scalar>(a: &ArrayView2<'_, T>, b: &ArrayView2<'_, T>) -> Array2<T> {
    let mut out = Array2::from_elem((a.nrows(), b.ncols()), T::zero());
    product_into(a, b, &mut out.view_mut(), false);
    out
}

/// Writes A·B into `out`, or adds it where `add` is set.
///
/// # Panics
/// Where the shapes do not fit.
#[track_caller]
pub fn product_into<T: Scalar>(
    a: &ArrayView2<'_, T>,
    b: &ArrayView2<'_, T>,
    out: &mut ArrayViewMut2<'_, T>,
    add: bool,
) {
    assert_eq!(a.ncols(), b.nrows(), "inner sizes of a product differ");
    assert_eq!(out.dim(), (a.nrows(), b.ncols()), "the result of a product has another shape");
    split(matmut(out), matref(a), matref(b), add);
}

/// A matrix read through a pointer: first element, row stride, column stride.
#[derive(Clone, Copy)]
pub(crate) struct Operand<T> {
    pub at: *const T,
    pub rows: isize,
    pub cols: isize,
}
/// A matrix written through a pointer.
#[derive(Clone, Copy)]
pub(crate) struct Target<T> {
    pub at: *mut T,
    pub rows: isize,
    pub cols: isize,
}

/// C = A·B or C += A·B, over all threads of the pool.
///
/// # Safety
/// The three matrices of sizes (m,k), (k,n), (m,n) must lie in memory that may be read
/// (written, for `c`, which nobody else touches), and no two places of `c` may coincide.
pub(crate) unsafe fn multiply<T: Scalar>(
    (m, k, n): (usize, usize, usize),
    a: Operand<T>,
    b: Operand<T>,
    c: Target<T>,
    add: bool,
) {
    // SAFETY: the caller's promise.
    let (a, b, c) = unsafe {
        (
            MatRef::from_raw_parts(a.at, m, k, a.rows, a.cols),
            MatRef::from_raw_parts(b.at, k, n, b.rows, b.cols),
            MatMut::from_raw_parts_mut(c.at, m, n, c.rows, c.cols),
        )
    };
    split(c, a, b, add);
}

/// As [`multiply`], on the calling thread alone.
///
/// # Safety
/// As [`multiply`].
pub(crate) unsafe fn multiply_here<T: Scalar>(
    (m, k, n): (usize, usize, usize),
    a: Operand<T>,
    b: Operand<T>,
    c: Target<T>,
    add: bool,
) {
    // SAFETY: the caller's promise.
    let (a, b, c) = unsafe {
        (
            MatRef::from_raw_parts(a.at, m, k, a.rows, a.cols),
            MatRef::from_raw_parts(b.at, k, n, b.rows, b.cols),
            MatMut::from_raw_parts_mut(c.at, m, n, c.rows, c.cols),
        )
    };
    one(c, a, b, add);
}

/// Work below which a piece is not split further: multiply-adds, and as many as take the
/// time of moving one entry for each entry of the three matrices.
const PIECE: usize = 1 << 22;
const ENTRY: usize = 8;
/// Shortest side that is split.
const SIDE: usize = 256;

/// Splits the longer side of the result until the pieces are small enough to spread, each
/// computed by one thread. Where to split depends on sizes alone: the bits do not depend
/// on the number of threads.
fn split<T: Scalar>(c: MatMut<'_, T>, a: MatRef<'_, T>, b: MatRef<'_, T>, add: bool) {
    let (m, n, k) = (c.nrows(), c.ncols(), a.ncols());
    let work = m
        .saturating_mul(n)
        .saturating_mul(k)
        .saturating_add(ENTRY.saturating_mul(m * k + k * n + m * n));
    if m.max(n) <= SIDE || work <= PIECE {
        one(c, a, b, add);
    } else if m >= n {
        let at = (m / 2).next_multiple_of(32);
        let (c0, c1) = c.split_at_row_mut(at);
        let (a0, a1) = a.split_at_row(at);
        rayon::join(|| split(c0, a0, b, add), || split(c1, a1, b, add));
    } else {
        let at = (n / 2).next_multiple_of(32);
        let (c0, c1) = c.split_at_col_mut(at);
        let (b0, b1) = b.split_at_col(at);
        rayon::join(|| split(c0, a, b0, add), || split(c1, a, b1, add));
    }
}

fn one<T: Scalar>(c: MatMut<'_, T>, a: MatRef<'_, T>, b: MatRef<'_, T>, add: bool) {
    let mode = if add { Accum::Add } else { Accum::Replace };
    matmul(c, mode, a, b, T::one(), Par::Seq);
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::linalg::testing::{Strides, dense, slow_product, strided};
    use num_complex::{Complex32, Complex64};

    fn over_shapes<T: Scalar>(tolerance: f64) {
        for (m, k, n) in [
            (0, 3, 2),
            (3, 0, 2),
            (1, 1, 1),
            (2, 5, 3),
            (17, 1, 16),
            (31, 33, 32),
            (300, 7, 4),
            (5, 260, 310),
        ] {
            for sa in Strides::ALL {
                for sb in Strides::ALL {
                    let (a, b) = (dense::<T>(m, k, 1), dense::<T>(k, n, 2));
                    let (fa, fb) = (strided(&a, sa), strided(&b, sb));
                    let got = product(&sa.view(&fa, m, k), &sb.view(&fb, k, n));
                    let want = slow_product(&a.view(), &b.view());
                    let off = got
                        .iter()
                        .zip(&want)
                        .map(|(x, y)| (*x - *y).magnitude())
                        .fold(0.0, f64::max);
                    assert!(
                        off <= tolerance * (k as f64 + 1.0),
                        "{m}×{k}×{n} {sa:?} {sb:?}: {off:e}"
                    );
                    let mut twice = got.clone();
                    product_into(&a.view(), &b.view(), &mut twice.view_mut(), true);
                    let off = twice
                        .iter()
                        .zip(&want)
                        .map(|(x, y)| (*x - *y - *y).magnitude())
                        .fold(0.0, f64::max);
                    assert!(off <= 3.0 * tolerance * (k as f64 + 1.0));
                }
            }
        }
    }

    #[test]
    fn agrees_with_the_definition_for_all_strides() {
        over_shapes::<f64>(1e-15);
        over_shapes::<Complex64>(2e-15);
        over_shapes::<f32>(1e-6);
        over_shapes::<Complex32>(2e-6);
    }

    #[test]
    fn same_bits_on_one_and_on_three_threads() {
        let (a, b) = (dense::<Complex64>(700, 300, 1), dense::<Complex64>(300, 900, 2));
        let on = |threads| {
            let pool = rayon::ThreadPoolBuilder::new().num_threads(threads).build().unwrap();
            pool.install(|| product(&a.view(), &b.view()))
        };
        assert_eq!(on(1), on(3));
    }
}
